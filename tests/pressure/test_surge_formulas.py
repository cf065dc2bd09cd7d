"""Limits, meeting routes, rescaling and the law of the unknown for water and surge."""

import numpy as np
import pytest

from screener.pressure import surge, water


def test_outside_its_range_water_is_unknown():
    for function in (water.density, water.isothermal_bulk_modulus, water.isentropic_bulk_modulus, water.speed_of_sound, water.vapour_pressure):
        values = function(np.array([-0.1, 0.0, 60.0, 60.1, np.nan]))
        assert np.array_equal(np.isnan(values), [True, False, False, True, True]), function.__name__


def test_bulk_moduli_meet_where_water_is_densest():
    """K_S/K_T - 1 = T v alpha^2 K_S / c_p vanishes with the expansion alpha, at 4 C."""
    temperature = np.linspace(0, 60, 61)
    ratio = water.isentropic_bulk_modulus(temperature) / water.isothermal_bulk_modulus(temperature)
    assert ratio[4] == pytest.approx(1, abs=3e-4)
    assert np.all(ratio > 0.9995) and ratio[60] == pytest.approx(1.052, abs=0.002)


def test_slow_closure_meets_sudden_stop_and_michaud():
    rise = surge.slow_closure(1000.0, 300.0, 600.0, 1.0, np.array([0.0, 3.9, 4.0, 8.0, 40.0, np.nan, -1.0]))
    assert rise[:5] == pytest.approx([3e5, 3e5, 3e5, 1.5e5, 2 * 1000 * 600 / 40])
    assert np.isnan(rise[5:]).all()


def test_slow_closure_at_a_point_falls_to_nothing_at_the_reservoir():
    rise = surge.slow_closure(1000.0, 300.0, np.array([0.0, 300.0, 600.0]), 1.0, 8.0)
    assert rise == pytest.approx([0.0, 0.75e5, 1.5e5])


def test_trapped_closure_settles_at_half_the_first_peak_of_one_reflection_time():
    """Flow that falls linearly over T = 2 L/a into a dead end: dVol = A V T/2 gives rho a V: the level the waves swing about."""
    area, length, speed, velocity = 0.1, 600.0, 300.0, 1.0
    volume = area * velocity * (2 * length / speed) / 2
    assert float(surge.trapped_rise(1000.0, speed, volume, area * length)) == pytest.approx(1000 * speed * velocity)


def test_junction_limits():
    assert float(surge.junction_transmission([0.2], [300.0], 0)) == pytest.approx(2)  # dead end
    assert float(surge.junction_transmission([0.2, 1e9], [300.0, 300.0], 0)) == pytest.approx(0, abs=1e-6)  # reservoir
    many = surge.junction_transmission(np.array([[1.0, 1.0], [1.0, np.nan]]), np.array([[400.0, 1200.0], [400.0, 1200.0]]), 0)
    assert many[0] == pytest.approx(1.5) and np.isnan(many[1])


def test_junction_keeps_power():
    """Energy flux goes with A/a p^2: what comes in is what goes back and on."""
    area, speed = np.array([0.3, 0.5, 0.1]), np.array([350.0, 1100.0, 420.0])
    passed, back = surge.junction_transmission(area, speed, 1), surge.junction_reflection(area, speed, 1)
    conductance = area / speed
    assert conductance[1] == pytest.approx(conductance[1] * back**2 + (conductance[0] + conductance[2]) * passed**2)


def test_thick_wall_tends_to_thin():
    assert float(surge.thick_wall_factor(1e9, 0.45, 0.8)) == pytest.approx(0.8)
    assert float(surge.axial_restraint(0.45, "anchored upstream")) == pytest.approx(0.775)
    assert np.isnan(surge.axial_restraint(0.45, ["something else"]))[0]


@pytest.mark.parametrize("place", range(5))
def test_celerity_unknown_in_unknown_out(place):
    values = [998.0, 2.2e9, 1.0e9, 15.0, 0.9]
    values[place] = np.nan
    assert np.isnan(surge.celerity(*values))


def test_association_celerity_has_no_answer_for_impossible_ratios():
    assert np.isnan(surge.association_celerity(np.array([2.0, 0.0, -5.0, np.nan]))).all()


def test_rescaling_to_feet_and_slugs():
    """Same numbers in another consistent system: speeds in ft/s, density in slug/ft3, pressures in lbf/ft2."""
    foot, slug_per_cubic_foot, pound_per_square_foot = 0.3048, 515.3788184, 47.88025898
    arguments = (998.0, 2.2e9, 1.0e9, 15.0, 0.9)
    speed = surge.celerity(*arguments)
    rescaled = surge.celerity(998.0 / slug_per_cubic_foot, 2.2e9 / pound_per_square_foot, 1.0e9 / pound_per_square_foot, 15.0, 0.9)
    assert rescaled * foot == pytest.approx(speed)
    rise = surge.joukowsky(998.0 / slug_per_cubic_foot, rescaled, 1.0 / foot)
    assert rise * pound_per_square_foot == pytest.approx(surge.joukowsky(998.0, speed, 1.0))


def test_margin_to_vapour():
    margin = surge.margin_to_vapour(np.array([3e5, 1e5]), 2.5e5, 2339.0, 101_325.0)
    assert margin[0] > 0 > margin[1] and margin[0] == pytest.approx(3e5 - 2.5e5 + 101_325 - 2339)
