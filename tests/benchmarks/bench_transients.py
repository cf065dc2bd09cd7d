"""How long a 10 km main, 60 s, 500 reaches takes, against the same scheme written point by point in plain Python; printed, never asserted.

Run with:  python tests/benchmarks/bench_transients.py    (or pytest -m benchmark -s tests/benchmarks/bench_transients.py)
"""

import sys
import time
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parents[1] / "outside"))
from test_transients_helpers import G, Reservoir, pipes, run, stop  # noqa: E402

LENGTH, BORE, SPEED, FRICTION, HEAD, VELOCITY, REACHES, SECONDS = 10_000.0, 0.5, 1200.0, 0.015, 150.0, 1.0, 500, 60.0


def plain():
    """Point by point: interior, reservoir, closed valve; envelope kept. The same friction as the solver."""
    area = np.pi / 4 * BORE**2
    dt = LENGTH / REACHES / SPEED
    b, r = SPEED / (G * area), FRICTION * LENGTH / REACHES / (2 * G * BORE * area**2)
    q = [VELOCITY * area] * (REACHES + 1)
    h = [HEAD - i * r * q[0] ** 2 for i in range(REACHES + 1)]
    high = h[:]
    for _ in range(int(np.ceil(SECONDS / dt - 1e-9))):
        hn, qn = h[:], q[:]
        for i in range(1, REACHES):
            cp, bp = h[i - 1] + b * q[i - 1], b + r * abs(q[i - 1])
            cm, bm = h[i + 1] - b * q[i + 1], b + r * abs(q[i + 1])
            hn[i] = (cp * bm + cm * bp) / (bp + bm)
            qn[i] = (cp - cm) / (bp + bm)
        qn[0] = (HEAD - h[1] + b * q[1]) / (b + r * abs(q[1]))
        hn[-1], qn[-1] = h[-2] + b * q[-2], 0.0
        h, q = hn, qn
        high = [max(x, y) for x, y in zip(high, h, strict=True)]
    return np.array(high)


def timed(work):
    start = time.perf_counter()
    result = work()
    return time.perf_counter() - start, result


@pytest.mark.benchmark
def test_speed_of_a_long_main():
    flow = VELOCITY * np.pi / 4 * BORE**2
    slow, reference = timed(plain)

    def fast(**given):
        creep = given.pop("creep", ())
        sections = pipes(LENGTH, BORE, SPEED, FRICTION, 0.05, 1.0, creep, [0.05, 0.5, 1.5, 5.0, 10.0][: len(creep)])
        return run(sections, REACHES, Reservoir(HEAD), stop(flow), SECONDS, **given)

    quick, result = timed(fast)
    steps = len(result.time) - 1
    print(f"\n10 km, 60 s, 500 reaches, {steps} steps: plain loop {slow:.2f} s, arrays {quick:.2f} s, ratio {slow / quick:.0f}")
    for name, given in (("with cavities allowed", {"vapour_head": -10.0}), ("with unsteady friction", {"unsteady": True}), ("with five creep elements", {"creep": [1e-10] * 5})):
        print(f"  {name}: {timed(lambda given=given: fast(**given))[0]:.2f} s")
    assert np.abs(result.maximum_head - reference).max() < 1e-6


if __name__ == "__main__":
    test_speed_of_a_long_main()
