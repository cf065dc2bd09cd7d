"""The solver against cases whose answer is known without it: closed forms, an inverted Laplace transform, an ordinary differential equation.

Joukowsky (1898), Allievi (1903, 1913) and Michaud (1878) are named from memory; the closed forms marked derived follow from them.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from screener.pressure.surge import front_attenuation
from screener.pressure.transient_ends import Pumps
from screener.pressure.transient_pipe import relaxed_wave_speed
from test_transients_helpers import G, Reservoir, SetFlow, pipes, run, stop, valve

L, D, A_SPEED, V0, H0 = 1000.0, 0.5, 1000.0, 1.2, 80.0
AREA = np.pi / 4 * D**2
RISE = A_SPEED * V0 / G
TRIP = 2 * L / A_SPEED


def at(result, time, column=-1):
    """Head of a kept node at a time that the grid hits."""
    return result.history_head[int(round(time / result.time[1])), column]


def test_joukowsky_rise_and_period_4l_over_a():
    """Instantaneous stop, no friction: H0 + aV0/g for 2L/a, H0 - aV0/g for 2L/a, again and again (derived, exact)."""
    result = run(pipes(L, D, A_SPEED), 50, Reservoir(H0), stop(V0 * AREA), 20 * TRIP, keep=(-1,))
    step = result.time[1]
    for k in range(20):
        middle, early, late = (k + 0.5) * TRIP, k * TRIP + 1.5 * step, (k + 1) * TRIP - 0.5 * step
        for time in (early, middle, late):
            assert at(result, time) == pytest.approx(H0 + RISE * (-1) ** k, abs=1e-8)
    assert abs(result.mass_error) < 1e-12


@pytest.mark.parametrize("share", [0.25, 0.5, 0.75])
def test_high_pulse_at_x_from_reservoir_lasts_2x_over_a(share):
    """At x from the reservoir the high pulse lasts 2x/a (derived, exact); the low one as long."""
    node = int(share * 200)
    result = run(pipes(L, D, A_SPEED), 200, Reservoir(H0), stop(V0 * AREA), 2 * TRIP, keep=(node,))
    head, step = result.history_head[:, 0], result.time[1]
    assert np.count_nonzero(head > H0 + 0.99 * RISE) * step == pytest.approx(2 * share * L / A_SPEED, abs=1.01 * step)
    assert np.count_nonzero(head < H0 - 0.99 * RISE) * step == pytest.approx(2 * share * L / A_SPEED, abs=1.01 * step)
    assert head.max() == pytest.approx(H0 + RISE, abs=1e-8)


def test_water_at_rest_stays_at_rest():
    """A dead end under a reservoir: nothing moves."""
    still = SetFlow((np.zeros(1), np.zeros(1)))
    result = run(pipes(L, D, A_SPEED, 0.02), 50, Reservoir(10.0), still, 3.0, keep=(-1,))
    assert result.history_head == pytest.approx(10.0, abs=1e-9) and np.abs(result.end_flow).max() < 1e-12


def test_dead_end_doubles_a_front():
    """A flow front of aV/g from one end meets a closed end: head 2 aV/g there, T = 2 (derived, exact)."""
    source = SetFlow((np.array([0.0, 0.0]), np.array([0.0, 0.3 * AREA])))
    sections = pipes([L, 1.0], D, A_SPEED)
    shut = valve(-1e-6, [[0, 1], [0, 0]], discharge_area=1.0)
    result = run(sections, 1001, source, shut, 1.6 * L / A_SPEED, keep=(0, -1))
    assert at(result, 1.5 * L / A_SPEED) == pytest.approx(2 * A_SPEED * 0.3 / G, rel=1e-5)


def test_reservoir_reflects_minus_one():
    """R = -1 at a reservoir: after 2L/a the head change at the closed valve has turned its sign (derived, exact)."""
    result = run(pipes(L, D, A_SPEED), 40, Reservoir(H0), stop(V0 * AREA), 1.6 * TRIP, keep=(-1,))
    assert at(result, 1.5 * TRIP) - H0 == pytest.approx(-(at(result, 0.5 * TRIP) - H0), abs=1e-9)


@pytest.mark.parametrize("closure_in_trips", [0.5, 1.0, 2.0, 5.0, 13.0])
def test_michaud_slow_stop(closure_in_trips):
    """Flow stopped in a straight line over Tc: rise aV0/g up to Tc = 2L/a, then 2 L V0/(g Tc) (Michaud; exact without friction)."""
    seconds = closure_in_trips * TRIP
    result = run(pipes(L, D, A_SPEED), 60, Reservoir(H0), stop(V0 * AREA, seconds), seconds + 2 * TRIP, keep=(-1,))
    expected = min(RISE, 2 * L * V0 / (G * seconds))
    assert result.maximum_head[-1] - H0 == pytest.approx(expected, rel=1e-9)


def test_allievi_chain_for_a_valve_that_closes():
    """Allievi's chain equations, z_i^2 + z_(i-1)^2 - 2 = 2 rho (tau_(i-1) z_(i-1) - tau_i z_i) at steps of 2L/a, z^2 = H/H0, rho = aV0/(2gH0)."""
    seconds, rho = 5 * TRIP, A_SPEED * V0 / (2 * G * H0)
    result = run(pipes(L, D, A_SPEED), 30, Reservoir(H0), valve(0.0, [[0, 1], [seconds, 0]], initial_flow=V0 * AREA), 8 * TRIP, keep=(-1,))
    z, opening = 1.0, 1.0
    for k in range(1, 8):
        following = max(0.0, 1 - k * TRIP / seconds)
        b, c = 2 * rho * following, z**2 - 2 - 2 * rho * opening * z
        z = (-b + np.sqrt(b * b - 4 * c)) / 2
        opening = following
        assert at(result, k * TRIP) == pytest.approx(z**2 * H0, rel=1e-9), k


def test_front_attenuation_by_steady_friction():
    """p(x)/p0 = 1 - tanh(f V0 x/(4 D a)) for a full-stop front (derived; Leslie and Tijsseling 2000, from memory): f 0.015, V0 1.5, D 0.3, a 300, 2000 m -> 0.876."""
    assert float(front_attenuation(0.015, 1.5, 2000.0, 0.3, 300.0)) == pytest.approx(0.876, abs=0.0005)
    area = np.pi / 4 * 0.3**2
    result = run(pipes(2500.0, 0.3, 300.0, 0.015), 2500, Reservoir(300.0), stop(1.5 * area), 2100 / 300.0, keep=(500,))
    front = int(round(2000 / 300 / result.time[1]))
    jump = result.history_head[front + 2, 0] - result.history_head[front - 3, 0]
    assert jump / (300 * 1.5 / G) == pytest.approx(0.876, abs=0.004)


def test_line_packing_lifts_the_valve_to_reservoir_plus_rise():
    """Instant stop with small friction: Joukowsky at first, then packing towards reservoir head + aV0/g, whatever the steady loss (Wylie and Streeter, from memory)."""
    result = run(pipes(10_000.0, 0.6, 1000.0, 0.012), 500, Reservoir(120.0), stop(0.8 * np.pi / 4 * 0.36), 19.9, keep=(-1,))
    loss = 120.0 - result.steady.head[-1]
    rise = 1000 * 0.8 / G
    assert result.history_head[1, 0] == pytest.approx(result.steady.head[-1] + rise, abs=0.05)
    packed = result.maximum_head[-1] - (result.steady.head[-1] + rise)
    assert 0.85 * loss < packed < 1.02 * loss
    assert (np.diff(result.history_head[1:, 0]) > -1e-9).all()


def test_mass_balance_of_a_run_with_friction():
    """Water in, less water out, equals what the line stores; the scheme's own error falls with the grid."""
    errors = []
    for reaches in (50, 100, 200):
        result = run(pipes([700.0, 500.0], [0.5, 0.4], [1000.0, 800.0], 0.02), reaches, Reservoir(90.0), valve(0, [[0, 1], [3, 0.2]], initial_flow=0.2), 9.0)
        errors.append(abs(result.mass_error))
    assert errors[0] < 5e-4 and errors[2] < errors[1] < errors[0]


def test_steady_state_stays_steady():
    """No event, with friction, demands and two bores: every head stays (the steady state suits the scheme)."""
    sections = pipes([700.0, 500.0, 300.0], [0.5, 0.4, 0.45], [1000.0, 400.0, 700.0], [0.02, 0.015, 0.03])
    result = run(sections, 150, Reservoir(90.0), Reservoir(60.0), 20.0)
    assert result.maximum_head == pytest.approx(result.steady.head, abs=1e-9)
    assert result.minimum_head == pytest.approx(result.steady.head, abs=1e-9)
    loss = sum(f * ln / d * (result.steady.flow_in[0] / (np.pi / 4 * d**2)) ** 2 / (2 * G) for f, ln, d in ((0.02, 700, 0.5), (0.015, 500, 0.4), (0.03, 300, 0.45)))
    assert loss == pytest.approx(30.0, rel=1e-9)


# ---------------------------------------------------------------- vapour cavity


def cavity_steps(ratio):
    """Exact frictionless cavity at a suddenly shut valve, horizontal pipe: collapse time in units of 2L/a after the stop, head peak over vapour in units of H0 - Hv.

    At vapour head the valve-side velocity grows by 2 g (H0 - Hv)/a each 2L/a from -V0 + g (H0 - Hv)/a (derived). ratio = V0 a/(g (H0 - Hv)).
    """
    volume, k = 0.0, 0
    while True:
        speed = -ratio + 2 * k + 1
        if volume - speed <= 0 and speed > 0:
            return 1 + k + volume / speed, speed + 2
        volume -= speed
        k += 1


@pytest.mark.parametrize("ratio", [1.337, 2.5, 4.3])
def test_cavity_at_valve_frictionless_closed_form(ratio):
    """Duration and the short peak above Joukowsky that follows the collapse; grid error of the collapse is one step."""
    vapour, reservoir = -10.0, 50.0
    flow = ratio * G * (reservoir - vapour) / A_SPEED * AREA
    collapse, peak = cavity_steps(ratio)
    result = run(pipes(L, D, A_SPEED), 400, Reservoir(reservoir), stop(flow), (collapse + 1.2) * TRIP, vapour_head=vapour, keep=(-1,))
    head = result.history_head[:, 0]
    opened = np.argmax(head < vapour + 1e-6)
    closed = opened + np.argmax(head[opened:] > vapour + 1e-6)
    assert result.first_cavity_time == pytest.approx(TRIP, abs=2.1 * result.time[1])
    assert result.time[closed] == pytest.approx(collapse * TRIP, abs=0.01 * TRIP)
    assert result.maximum_head[-1] == pytest.approx(vapour + max(peak, 1 + ratio) * (reservoir - vapour), rel=0.01)
    if peak > 1 + ratio:
        assert result.maximum_head[-1] > reservoir + A_SPEED * flow / AREA / G  # above Joukowsky: why a screening must not trust it
    assert result.maximum_before_cavity[-1] == pytest.approx(reservoir + A_SPEED * flow / AREA / G, rel=1e-9)


# ---------------------------------------------------------------- pumps


def test_pump_trip_before_the_reflection_against_an_ode():
    """Until 2L/a the line is H = H0 - B (Q0 - Q); with the affinity laws that leaves one differential equation for the speed, solved by scipy to 1e-10."""
    pump = Pumps(5.0, 62.0, 46.0, 0.06, 155.0, 224.0, 0.5, 2.4, 2, 0.0)
    sections = pipes(4000.0, 0.4, 300.0)
    result = run(sections, 2000, pump, Reservoir(46.0), 20.0, keep=(0,))
    impedance = 300.0 / (G * np.pi / 4 * 0.16)
    flow0, head0 = result.steady.flow_in[0], result.steady.head[0]
    assert head0 == pytest.approx(5 + 62 - pump.loss * flow0**2)

    def flow_of(speed):
        drive = 5 + 62 * speed**2 - (head0 - impedance * flow0)
        return 2 * drive / (impedance + np.sqrt(impedance**2 + 4 * pump.loss * drive)) if drive > 0 else 0.0

    def slow_down(_, y):
        speed = y[0]
        return [-224.0 / (2.4 * 155.0) * (0.5 * speed**2 + 0.5 * speed * flow_of(speed) / 0.12)]

    answer = solve_ivp(slow_down, (0, 20), [1.0], rtol=1e-10, atol=1e-12, dense_output=True)
    times = result.time[1:]
    expected = np.array([flow_of(s) for s in answer.sol(times)[0]])
    assert np.abs(result.end_flow[1:, 0] - expected).max() < 2e-5 * flow0
    shut = times[np.argmax(expected == 0)]
    assert pump.check_valve_shut_at == pytest.approx(shut, abs=2 * result.time[1])


def test_pumps_without_inertia_stop_like_a_gate():
    """As inertia goes to nothing the flow stops at once behind the check valve: the fall is aV0/g (derived limit)."""
    pump = Pumps(5.0, 62.0, 46.0, 0.06, 155.0, 224.0, 0.5, 1e-6, 2, 0.0)
    result = run(pipes(4000.0, 0.4, 300.0), 200, pump, Reservoir(46.0), 20.0, keep=(0,))
    fall = 300.0 * result.steady.flow_in[0] / (np.pi / 4 * 0.16) / G
    assert at(result, 10.0, 0) == pytest.approx(result.steady.head[0] - fall, rel=1e-3)


# ---------------------------------------------------------------- viscoelastic wall

CREEP, TIMES = np.array([1.0e-10, 0.9e-10, 0.7e-10]), np.array([0.05, 0.5, 4.0])
PE = {"length": 280.0, "diameter": 0.0506, "speed": 395.0, "wall": 0.00625, "factor": 1.07}


def laplace_head(times, flow, seconds, creep, retardation):
    """Head rise at a valve that stops `flow` over `seconds`, no friction: H(s) = Z tanh(s L/a(s)) q(s), inverted by Durbin's Fourier series."""
    area, span = np.pi / 4 * PE["diameter"] ** 2, 2.5 * times[-1]
    shift, count = 8.0 / span, 40_000
    s = shift + 1j * np.pi / span * np.arange(count)
    compliance = (creep[:, None] / (1 + retardation[:, None] * s)).sum(axis=0)
    a = (PE["speed"] ** -2 + 1000.0 * PE["factor"] * PE["diameter"] / PE["wall"] * compliance) ** -0.5
    q = flow * (1 - np.exp(-s * seconds)) / (s**2 * seconds)
    transform = a / (G * area) * np.tanh(s * PE["length"] / a) * q
    transform *= np.sinc(np.arange(count) / count)  # Lanczos factors
    weight = np.where(np.arange(count) == 0, 0.5, 1.0)
    return np.array([np.exp(shift * t) / span * (weight * (transform * np.exp(1j * s.imag * t)).real).sum() for t in times])


def pe_run(reaches, flow, seconds, duration):
    sections = pipes(PE["length"], PE["diameter"], PE["speed"], 0.0, PE["wall"], PE["factor"], CREEP, TIMES)
    return run(sections, reaches, Reservoir(45.0), stop(flow, seconds), duration, keep=(-1,))


def test_viscoelastic_wall_against_laplace_inversion_and_convergence():
    """Two routes to the damped wave in a Kelvin-Voigt pipe; and the time-stepping error falls at first order with the grid."""
    flow, seconds = 1.0e-3, 0.3
    times = np.linspace(0.2, 12.0, 60)
    exact = laplace_head(times, flow, seconds, CREEP, TIMES)
    errors = []
    for reaches in (40, 80, 160):
        result = pe_run(reaches, flow, seconds, 12.5)
        head = np.interp(times, result.time, result.history_head[:, 0]) - 45.0
        errors.append(np.sqrt(np.mean((head - exact) ** 2)))
    scale = np.abs(exact).max()
    assert errors[2] < 0.01 * scale
    assert 1.6 < errors[0] / errors[1] < 2.6 and 1.6 < errors[1] / errors[2] < 2.6


def test_wall_that_creeps_at_once_is_a_softer_wall():
    """An element far quicker than the time step only lowers the wave speed, 1/a'^2 = 1/a^2 + rho c (D/e) J: the period is 4L/a' (derived)."""
    sections = pipes(PE["length"], PE["diameter"], PE["speed"], 0.0, PE["wall"], PE["factor"], [2e-10], [1e-5])
    result = run(sections, 400, Reservoir(45.0), stop(1e-3, 0.3), 14.0, keep=(-1,))
    slow = float(relaxed_wave_speed(PE["speed"], 1000.0, PE["diameter"], PE["wall"], PE["factor"], 2e-10))
    head = result.history_head[:, 0] - 45.0
    falls = np.flatnonzero((head[:-1] > 0) & (head[1:] <= 0))
    period = np.diff(result.time[falls]).mean()
    assert slow < 0.92 * PE["speed"]
    assert period == pytest.approx(4 * PE["length"] / slow, rel=0.005)


# ---------------------------------------------------------------- grid convergence


def test_grid_convergence_of_a_closing_valve_with_friction():
    """Head at the valve with friction, on grids of 25 to 200 reaches against 1600: the error falls at least at first order."""

    def heads(reaches):
        result = run(pipes(1200.0, 0.4, 1000.0, 0.03), reaches, Reservoir(100.0), valve(0, [[0, 1], [2.0, 0]], initial_flow=0.25), 9.0, keep=(-1,))
        return np.interp(np.arange(0.6, 9.0, 0.6), result.time, result.history_head[:, 0])

    reference = heads(1600)
    errors = [np.abs(heads(n) - reference).max() for n in (25, 50, 100, 200)]
    assert all(coarse / fine > 1.8 for coarse, fine in zip(errors, errors[1:], strict=False))
    assert errors[-1] < 0.02


def test_unsteady_friction_leaves_the_first_rise_and_damps_the_rest():
    """Brunone's loss in Vitkovsky's form is nil in a front that stops the flow (dV/dt = -a |dV/dx|) and doubles where flow speeds up (derived).

    A stop over one second, since a jump has no derivative: there the answer still drifts with the grid, by 1 % in eleven periods.
    """
    sections, slow = pipes(L, D, A_SPEED, 0.02), stop(V0 * AREA, 1.0)
    places = (0, 2, 4, 6, 8, 10)

    def plateaus(reaches, unsteady):
        result = run(sections, reaches, Reservoir(H0), slow, 12 * TRIP, keep=(-1,), unsteady=unsteady)
        return np.array([at(result, (k + 0.5) * TRIP + 0.5) - H0 for k in places])

    plain, damped, fine = plateaus(100, False), plateaus(100, True), plateaus(400, True)
    assert damped[0] == pytest.approx(plain[0], abs=1e-3 * RISE)
    assert (damped[1:] < plain[1:]).all() and (np.diff(damped / plain) < 0).all()
    assert damped == pytest.approx(fine, rel=1e-3)
