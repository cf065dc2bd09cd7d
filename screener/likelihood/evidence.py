"""What has been seen, put to the estimates: leaks and leak-free years of a cohort, and findings at single joints.

A cohort (joints of one era, contractor or main) shares one unknown factor on its predicted leaks. A joint with an unknown attribute is several
scenarios with weights. Every piece of evidence multiplies in, so the order in which it comes makes no difference.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.stats import gamma

PRIOR_VARIATION = 2.0
"""Coefficient of variation of a cohort's factor before any record: the model may be off by an order of magnitude. Judgement, no source."""


@dataclass(frozen=True, eq=False)
class CohortFactor:
    """Gamma distribution of the factor on predicted leaks, one per cohort: shape [-], rate [-] (mean = shape / rate)."""

    shape: np.ndarray
    rate: np.ndarray

    @property
    def mean(self):
        return self.shape / self.rate

    @property
    def variation(self):
        return 1.0 / np.sqrt(self.shape)

    def interval(self, share: float = 0.9):
        """(low, high) between which the factor lies with probability `share`."""
        tail = 0.5 * (1.0 - share)
        return gamma.ppf(tail, self.shape, scale=1 / self.rate), gamma.ppf(1 - tail, self.shape, scale=1 / self.rate)


def prior_factor(cohorts: int, mean: float = 1.0, variation: float = PRIOR_VARIATION) -> CohortFactor:
    """Factor of every cohort before its records: shape 1 / V^2, rate shape / mean."""
    shape = np.full(cohorts, 1.0 / variation**2)
    return CohortFactor(shape, shape / mean)


def updated_factor(factor: CohortFactor, leaks, predicted_leaks) -> CohortFactor:
    """Factor after `leaks` were seen where `predicted_leaks` (sum of annual likelihoods over joint-years) were predicted.

    Poisson counts with a Gamma factor: shape + leaks, rate + predicted. Source: conjugate Bayes, any textbook. Counts that are negative or
    not whole give NaN.
    """
    leaks, predicted = np.asarray(leaks, dtype=float), np.asarray(predicted_leaks, dtype=float)
    possible = (leaks >= 0) & (leaks == np.floor(leaks)) & (predicted >= 0)
    # Leaks where none at all were predicted can't be put down to a factor.
    possible &= ~((leaks > 0) & (predicted == 0))
    return CohortFactor(np.where(possible, factor.shape + leaks, np.nan), np.where(possible, factor.rate + predicted, np.nan))


def cohort_sums(cohort, values):
    """(labels in sorted order, sum of `values` per label): leaks, joint-years or predicted leaks of each cohort."""
    labels, index = np.unique(np.asarray(cohort).astype(str), return_inverse=True)
    return labels, np.bincount(index, weights=np.asarray(values, dtype=float), minlength=len(labels))


def scaled_likelihood(annual_likelihood, factor):
    """Annual likelihood under a factor on its rate, 1 - (1 - p)^factor [-]; p times the factor while small, never above 1."""
    with np.errstate(divide="ignore"):
        return -np.expm1(np.asarray(factor) * np.log1p(-np.asarray(annual_likelihood)))


@dataclass(frozen=True, eq=False)
class ScenarioWeights:
    """weights (n, s): chance of each scenario of each joint; rows sum to 1, NaN where `impossible` (n,): no scenario allows what was seen."""

    weights: np.ndarray
    impossible: np.ndarray


def scenario_weights(prior, *log_evidence) -> ScenarioWeights:
    """Weights of scenarios after evidence, by Bayes' rule on the grid of scenarios: `ScenarioWeights`.

    prior (n, s): weights before, any positive scale; log_evidence: natural logarithms (n, s) of the probability (or density) of each
    independent observation under each scenario, -inf where it rules the scenario out, 0 where nothing was seen.
    """
    prior = np.asarray(prior, dtype=float)
    with np.errstate(divide="ignore"):
        total = np.log(prior)
    for term in log_evidence:
        total = total + np.asarray(term, dtype=float)
    largest = total.max(axis=1, keepdims=True)
    impossible = np.isneginf(largest[:, 0])
    relative = np.exp(total - np.where(impossible[:, None], 0.0, largest))
    sums = relative.sum(axis=1, keepdims=True)
    weights = relative / np.where(impossible[:, None], 1.0, sums)
    return ScenarioWeights(np.where(impossible[:, None], np.nan, weights), impossible)


def mixed_likelihood(weights, likelihoods):
    """Likelihood over scenarios, sum of weight times likelihood, (n, s) each: (n,) [-]."""
    return np.sum(np.asarray(weights) * np.asarray(likelihoods), axis=1)


def log_survived(annual_likelihood, years):
    """ln probability of `years` without a leak, years ln(1 - p) [-]; -inf where a leak was certain."""
    with np.errstate(divide="ignore", invalid="ignore"):
        said = np.asarray(years) * np.log1p(-np.asarray(annual_likelihood, dtype=float))
    return np.where(np.asarray(years) == 0, 0.0, said)


def log_leaks(annual_likelihood, leaks, years):
    """ln probability of `leaks` in `years`, Poisson with mean years p [-]; -inf where leaks were seen and p is zero."""
    expected = np.asarray(annual_likelihood, dtype=float) * years
    leaks = np.asarray(leaks, dtype=float)
    with np.errstate(divide="ignore", invalid="ignore"):
        seen = np.where(leaks > 0, leaks * np.log(expected), 0.0)
    return seen - expected


def log_measured(measured, estimate, variation):
    """ln density of a measured positive quantity (torque, gap, thickness) about a scenario's estimate, lognormal with median `estimate` [-].

    variation: coefficient of variation of measurement and joint together. 0 where nothing was measured (NaN).
    """
    spread = np.sqrt(np.log1p(np.square(variation)))
    away = np.log(np.asarray(measured, dtype=float) / estimate) / spread
    return np.where(np.isnan(measured), 0.0, -0.5 * np.square(away) - np.log(spread))
