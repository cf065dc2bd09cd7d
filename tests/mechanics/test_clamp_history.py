"""A clamp tightened more than once, against the hereditary integral solved step by step.

The solver knows nothing of the closed form: a spring in series with a creeping collar, its stretch held between tightenings and set at each of
them, every change of force creeping from its own instant (Boltzmann).
"""

import numpy as np
import pytest

from screener.mechanics import clamp

HOUR, YEAR = 3600.0, 365.25 * 86400.0
TIGHTENING, TODAY = 0.5 * HOUR, 10 * YEAR
HISTORIES = ([0.0], [0.0, 24 * HOUR], [0.0, YEAR], [0.0, 24 * HOUR, 5 * YEAR], [0.0, 2 * YEAR, 4 * YEAR, 8 * YEAR])


def power_law(age):
    """Collar compliance over that at tightening, exponent of the PE4XXX table."""
    return np.maximum(np.asarray(age, dtype=float) / TIGHTENING, 1.0) ** 0.09


def prony(age):
    """A slowing solid instead: three retardation times, no power law anywhere."""
    aged = np.maximum(np.asarray(age, dtype=float) - TIGHTENING, 0.0)
    return 1.0 + sum(size * -np.expm1(-aged / time) for size, time in ((0.5, 10 * HOUR), (0.6, 0.1 * YEAR), (0.7, 3 * YEAR)))


def hereditary(elastic, creep, tightened, asked, steps=250):
    """Force today by stepping through the history."""
    ends = [*tightened[1:], TODAY]
    times = [tightened[0]]
    for begin, end in zip(tightened, ends, strict=True):
        times += [begin, *(begin + np.geomspace(TIGHTENING / 10, end - begin, steps))]
    times = np.unique(times)
    changes, stretch = np.zeros(len(times)), 0.0
    for k, now in enumerate(times):
        earlier = changes[:k]
        held = elastic * earlier.sum() + earlier @ creep(now - times[:k])
        changes[k] = (stretch - held) / (elastic + 1.0)
        if now in tightened:
            changes[k] = max(changes[k], asked[tightened.index(now)] - earlier.sum())
            stretch = held + changes[k] * (elastic + 1.0)
    return changes.sum()


def closed_form(elastic, creep, tightened, asked):
    moments = np.array([*tightened, TODAY])
    kept = clamp.relaxation(elastic, 1.0, creep(moments[:, None] - np.array(tightened)))
    return clamp.clamp_after_tightenings(asked, kept)


@pytest.mark.parametrize("creep", [power_law, prony])
@pytest.mark.parametrize("tightened", HISTORIES)
@pytest.mark.parametrize("elastic", [0.1, 0.5, 2.0, 8.0])
def test_tightening_history_against_the_hereditary_integral(elastic, tightened, creep):
    asked = [1.0] * len(tightened)
    slack = 0.016 if creep is power_law else 0.006
    assert closed_form(elastic, creep, tightened, asked) == pytest.approx(hereditary(elastic, creep, tightened, asked), rel=slack)


def test_stepping_is_fine_enough():
    coarse, fine = (hereditary(0.5, power_law, HISTORIES[3], [1.0] * 3, steps) for steps in (250, 500))
    assert coarse == pytest.approx(fine, rel=1e-3)


def test_two_tightenings_are_the_case_of_two():
    generator = np.random.default_rng(3)
    first, second = generator.uniform(1, 2, (2, 50))
    then, now, later = generator.uniform(0.3, 1.0, (3, 50))
    blank = np.full(50, np.nan)
    kept = np.array([[blank, blank], [then, blank], [now, later]])
    many = clamp.clamp_after_tightenings([first, second], kept)
    np.testing.assert_allclose(many, clamp.clamp_after_retightening(first, second, now, then, later))


def test_a_wrench_does_not_slacken_and_each_tightening_helps():
    kept = clamp.relaxation(0.5, 1.0, power_law(np.array([0.0, YEAR, 2 * YEAR, TODAY])[:, None] - np.array([0.0, YEAR, 2 * YEAR])))
    once = clamp.clamp_after_tightenings([1.0, 0.0, 0.0], kept)
    assert once == pytest.approx(kept[3, 0])
    assert once < clamp.clamp_after_tightenings([1.0, 1.0, 0.0], kept) < clamp.clamp_after_tightenings([1.0, 1.0, 1.0], kept) < 1.0
    assert np.isnan(clamp.clamp_after_tightenings([1.0, np.nan, 1.0], kept))
