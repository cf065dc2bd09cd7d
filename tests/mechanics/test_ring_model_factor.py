"""Model factors: how they combine, their range, and that each names what it rests on."""

import numpy as np
import pytest

from screener.mechanics import ring_model_factor as factor


def test_independent_factors_combine():
    both = factor.combined(factor.ModelFactor(1.1, 0.03, "one"), factor.ModelFactor(0.9, 0.04, "two"))
    assert (both.mean, both.variation, both.source) == (pytest.approx(0.99), pytest.approx(0.05), "one; two")


def test_pull_beyond_the_study_is_unknown():
    found = factor.hub_bed_arm_factor(np.array([-0.01, 0.0, 0.7, 0.71, np.nan]))
    assert list(np.isnan(found.mean)) == list(np.isnan(found.variation)) == [True, False, False, True, True]
    assert found.mean[0:3][2] > found.mean[1] > 1


def test_every_kind_has_a_factor_with_a_source():
    for kind in factor.RING_KIND_FACTOR.values():
        assert 0.9 < kind.mean < 1.2 and 0 < kind.variation < 0.3 and kind.source


def test_judgements_say_so():
    assert "judgement, no source" in factor.STATED_RATING.source
    assert "judgement, no source" in factor.BEYOND_FINITE_ELEMENTS.source
