"""First-order reliability of our leak limit state for 100 000 invented joints against OpenTURNS joint by joint, in the same run; prints, asserts no time.

Run: OMP_NUM_THREADS=1 python tests/benchmarks/bench_reliability.py
"""

import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "outside"))

from test_reliability_openturns import invented_joints, reference  # noqa: E402

from screener.likelihood.form import first_order  # noqa: E402
from screener.likelihood.tightness import Doubt, HeldBy, limit_state  # noqa: E402

JOINTS = 100_000
SHARE = 300  # joints handed to the slow route, per limit state


def main():
    joints = invented_joints(JOINTS, 1)
    ours = theirs = 0.0
    for held_by in HeldBy:
        start, clock = time.perf_counter(), time.process_time()
        found = first_order(limit_state(joints, held_by), JOINTS, len(Doubt))
        fast, processor = time.perf_counter() - start, time.process_time() - clock
        start = time.perf_counter()
        difference = max(abs(reference(joints, i, held_by)[0] - found.beta[i]) for i in range(SHARE))
        slow = (time.perf_counter() - start) / SHARE
        ours, theirs = ours + fast, theirs + slow
        print(f"held by {held_by.name.lower()}: {fast:.2f} s ({processor:.2f} s of processor) for {JOINTS:,} joints, all converged: {found.converged.all()}, "
              f"{found.trials.mean():.1f} evaluations a joint (at most {found.trials.max()}); {slow / (fast / JOINTS):.0f} times the joints a second of the reference; "
              f"beta differs by at most {difference:.1e}")  # fmt: skip
    print(f"three limit states: {ours:.2f} s; {theirs / (ours / JOINTS):.0f} times the reference; beta {np.nanmin(found.beta):.1f} to {np.nanmax(found.beta):.1f}")


if __name__ == "__main__":
    main()
