"""One joint's likelihood in plain sentences: what most of the doubt is, how the leak would come about, what would change it most."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from screener.likelihood.leak import METHOD_WORDS, Method, leak_likelihood
from screener.likelihood.step import Likelihood
from screener.likelihood.tightness import DOUBT_LABELS, Doubt, HeldBy, assembly_clamps, kept_share
from screener.likelihood.years import YearsLikelihood

PASCAL_PER_BAR = 1.0e5
PASCAL_PER_PSI = 6894.757
NOTICEABLE = 0.05
"""Share of the doubt from which a quantity belongs in the story."""
CHANGE = 0.2
"""Relative improvement by which the possible measures are compared."""
CONTRADICTION = 0.01
"""Chance of the record under the estimates below which the two are said to contradict each other."""

HELD_WORDS = {
    HeldBy.TORQUE: "set by the torque",
    HeldBy.RING_COLLAPSE: "held down by the ring's collapse",
    HeldBy.BOLT_PROOF: "held down by the bolts' proof load",
}


def explain(likelihood: Likelihood, i: int) -> list[str]:
    """Sentences about joint `i` (index into the fleet). Chances are per year and, without leak records, only relative to other joints."""
    leak = likelihood.leak
    if leak.method[i] == Method.UNKNOWN:
        return ["The likelihood of a leak is not estimated: one of its inputs is unknown."]
    one = likelihood.take(np.array([i]))
    sentences = [
        f"Relative likelihood of a leak in a year: {odds(likelihood.likelihood[i])} "
        f"({METHOD_WORDS[Method(int(leak.method[i]))]}; it orders joints and is not a rate, as no leak records stand behind it)."
    ]
    if np.isfinite(leak.alpha2[i]).all():
        sentences += [_doubt(leak.alpha2[i]), _story(one)]
    sentences.append(_change(one))
    return sentences


def explain_record(years: YearsLikelihood, i: int, leak_free_years: float, horizon_years: float) -> str:
    """What joint `i`'s own record makes of its likelihood, in one or two sentences."""
    if not np.isfinite(years.annual[i]):
        return "What its record says of this joint is not estimated: an input is unknown, or the estimates rule the record out."
    said = (
        f"After {leak_free_years:.0f} leak-free years the chance of a leak is {odds(years.annual[i])} in the coming year and "
        f"{odds(years.within[i])} within {horizon_years:.0f} years."
    )
    if years.survival[i] < CONTRADICTION:
        said += f" The estimates gave this record a chance of only {odds(years.survival[i])}: the joint is likely not what its row says."
    return said


def odds(chance: float) -> str:
    """A chance as people say it, two figures."""
    if not np.isfinite(chance):
        return "unknown"
    if chance < 1e-9:
        return "less than 1 in a thousand million"
    if chance > 0.99:
        return "more than 99 %"
    if chance >= 0.095:
        return f"{100 * chance:.0f} %"
    return f"1 in {_two_figures(1 / chance)}"


def _two_figures(number):
    step = 10 ** max(int(np.floor(np.log10(number))) - 1, 0)
    return f"{int(round(number / step)) * step:,}".replace(",", " ")


def _doubt(shares):
    order = np.argsort(-shares, kind="stable")
    said = [f"{DOUBT_LABELS[k]} ({100 * shares[k]:.0f} %)" for k in order[:3] if shares[k] >= NOTICEABLE]
    return "Most of the doubt is " + ", then ".join(said) + "."


def _story(one: Likelihood):
    """The design point told as events."""
    leak, joints, x = one.leak, one.joints, one.leak.design_point
    shares = leak.alpha2[0]
    held = HeldBy(int(leak.held_by[0]))
    mean = expected(joints)
    clamp_share = assembly_clamps(joints, x)[0, held] / assembly_clamps(joints, mean)[0].min()
    parts = [f"the clamp at assembly was {100 * clamp_share:.0f} % of the expected, {HELD_WORDS[held]}"]
    if shares[Doubt.CREEP] >= NOTICEABLE:
        parts.append(f"{100 * kept_share(joints.kept, x[:, Doubt.CREEP])[0]:.0f} % of it is left instead of {100 * joints.kept[0]:.0f} %")
    if shares[Doubt.REQUIRED_STRESS] >= NOTICEABLE:
        parts.append(f"the face needs {x[0, Doubt.REQUIRED_STRESS]:.2f} times the pressure to seal instead of {joints.required_stress_factor[0]:.2f}")
    if shares[Doubt.COOLING] >= NOTICEABLE:
        parts.append(f"the pipe is {x[0, Doubt.COOLING]:.0f} K below its installation temperature")
    peak = x[0, Doubt.OPERATING_PRESSURE] + x[0, Doubt.SURGE_PEAK]
    usual = mean[0, Doubt.OPERATING_PRESSURE] + mean[0, Doubt.SURGE_PEAK]
    parts.append(f"the year's peak reaches {pressure_words(peak)} (expected {pressure_words(usual)})")
    told = ", ".join(parts[:-1]) + ", and " + parts[-1] + "."
    if leak.beta[0] < 0:
        return "By the estimates the face leaks at the year's peak; it would just stay tight if " + told
    return "The likeliest way to leak: " + told


def expected(joints):
    """Mean of every quantity with true strengths over estimated ones at 1, as the limit states take them: (n, k)."""
    one = np.ones(len(joints))
    means = (one, one, one, one, joints.required_stress_factor, joints.operating_pressure, joints.surge_peak, joints.cooling)
    return np.stack(means, axis=1)


def pressure_words(pressure: float) -> str:
    """A pressure (Pa) in bar and psi."""
    return f"{pressure / PASCAL_PER_BAR:.1f} bar ({pressure / PASCAL_PER_PSI:.0f} psi)"


def measures(joints) -> dict[str, object]:
    """The same joints with one thing at a time made a fifth better, by plain words."""
    kept = kept_share(joints.kept, 1 - CHANGE)
    return {
        "a torque 20 % higher": replace(joints, torque_clamp=joints.torque_clamp * (1 + CHANGE)),
        "a ring that carries 20 % more before it collapses": replace(joints, collapse_load=joints.collapse_load * (1 + CHANGE)),
        "a fifth less creep since the bolts were set (as by tightening again)": replace(joints, kept=kept),
        "a surge 20 % lower": replace(joints, surge_peak=joints.surge_peak * (1 - CHANGE)),
        "an operating pressure 20 % lower": replace(joints, operating_pressure=joints.operating_pressure * (1 - CHANGE)),
        "knowing the clamp at assembly to 10 %": replace(joints, preload_variation=np.minimum(joints.preload_variation, 0.1)),
    }


def _change(one: Likelihood):
    before = float(leak_likelihood(one.joints, 0).likelihood[0])
    after = {words: float(leak_likelihood(better, 0).likelihood[0]) for words, better in measures(one.joints).items()}
    best = min(after, key=lambda words: after[words])
    if not after[best] < 0.98 * before:
        return "No single change by a fifth would make it noticeably less likely."
    return f"What would change it most: {best}; the relative likelihood would go from {odds(before)} to {odds(after[best])}."
