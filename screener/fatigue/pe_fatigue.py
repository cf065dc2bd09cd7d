"""Pressure cycling of PE pipe: a published life equation and published re-rating, kept apart by generation of the material.

All of it rests on pipe under hoop stress, 20 to 23 C, continuous cycling, without notches. None covers the radius of a stub end under its
ring, scratched pipe, bending at the flange or more than 30 C. High-toughness PE is rarely governed by fatigue: over-pressure and
vacuum govern, and a result here that says otherwise deserves a second look.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

MEGAPASCAL = 1e6


@dataclass(frozen=True)
class LifeEquation:
    """log10 N = (intercept - log10 S)/slope, S the peak hoop stress in MPa of cycles from zero. materials it was found for."""

    intercept: float
    slope: float
    materials: tuple[str, ...]
    source: str
    status: str


HIGH_TOUGHNESS_LIFE = LifeEquation(
    1.708, 0.101, ("PE4710", "PE100"),
    "mean life under pressure cycling from zero, trade association's technical review of 2012 and a paper of 2013", "from memory",
)  # fmt: skip
"""At 1.5 times the pressure class (10.3 MPa) 7 million cycles; pipe with butt fusions was read to have gone beyond 4.2 million there."""

HIGH_TOUGHNESS = frozenset({"PE4710", "PE100"})
RERATED = frozenset({"PE4710", "PE100", "PE80"})
"""Generations that the re-rating table is headed with; older or other grades (PE3408, PE3608, PE2406 ...) get no number from it."""


def hoop_stress(pressure, dimension_ratio):
    """Hoop stress [Pa] = P (DR - 1)/2; pressure P [Pa], dimension_ratio DR [-]. The form of PE pressure ratings (ISO 161-1, ASTM D2837)."""
    return np.asarray(pressure, dtype=float) * (np.asarray(dimension_ratio, dtype=float) - 1) / 2


def life(peak_hoop_stress, material, equation: LifeEquation):
    """Mean cycles to failure [-] from zero to a peak hoop stress [Pa]; NaN for a material the equation was not found for.

    Half of the pipes fail earlier. Small stresses extrapolate far beyond any test: read the answer as "endless".
    """
    stress = np.asarray(peak_hoop_stress, dtype=float) / MEGAPASCAL
    applies = np.isin(np.asarray(material, dtype=object).astype(str), equation.materials)
    with np.errstate(divide="ignore"):
        return np.where(applies, 10.0 ** ((equation.intercept - np.log10(stress)) / equation.slope), np.nan)


def rerating_factor(total_cycles, material, table_cycles, table_factors):
    """Share f [-] of the rating that a pressure range may use over the life: log-log between the rows of a published table.

    total_cycles over 100 years; below the first row its factor, beyond the last NaN: no extrapolation. material outside `RERATED`: NaN.
    Table handed in: Australian guideline for PE80 and PE100 (from memory, not confirmed).
    """
    n = np.asarray(total_cycles, dtype=float)
    rows, factors = np.log(np.asarray(table_cycles, dtype=float)), np.log(np.asarray(table_factors, dtype=float))
    inside = (n >= 0) & (n <= table_cycles[-1]) & np.isin(np.asarray(material, dtype=object).astype(str), sorted(RERATED))
    return np.where(inside, np.exp(np.interp(np.log(np.maximum(n, 1.0)), rows, factors)), np.nan)


def rerating_utilization(pressure_range, factor, rating):
    """Demand over capacity [-]: (dP/f)/PN; pressure_range dP (surge included), rating PN [Pa], factor f from `rerating_factor`."""
    return np.asarray(pressure_range, dtype=float) / (np.asarray(factor, dtype=float) * rating)


def misalignment_factor(offset, wall):
    """Stress at a butt fusion over the axial stress [-]: 1 + 3 m/e, plates with offset m, wall e [m] (from memory).

    Offsets above 10 % of the wall cut fatigue life markedly (Parmar and Bowman, PPCA York 1985, abstract read).
    """
    return 1 + 3 * np.asarray(offset, dtype=float) / wall


def reason_without_number(material, hoop_range):
    """Why a joint has, or need not have, a PE fatigue number: (n,) text; empty where the published figures apply and matter.

    hoop_range [Pa]: largest daily range. Below 1.5 times the class (10.3 MPa at 23 C) high-toughness PE ran 4.2 million cycles unbroken.
    """
    names, span = np.broadcast_arrays(np.asarray(material, dtype=object).astype(str), np.asarray(hoop_range, dtype=float))
    reason = np.full(names.shape, "", dtype=object)
    tough = np.isin(names, sorted(HIGH_TOUGHNESS))
    reason[tough & (span <= 10.3 * MEGAPASCAL)] = "high-toughness PE at these ranges: fatigue of the pipe rarely governs (tests beyond 4.2 million cycles)"
    reason[~tough] = "no published pressure-cycling life for this generation of PE was found; notches and slow crack growth may govern"
    reason[np.isnan(span)] = "pressure range unknown"
    return reason
