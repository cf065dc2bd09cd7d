"""Does the likelihood find the joints that leak? An invented world with its own physics decides; prints, asserts nothing.

The world shares the dimensions of rings, bolts and pipes with the tool and nothing else: it has crews with habits, bolts set one by one, a creep
law of its own, a plastic hinge with a reaction near the hub's rim, real yields and thicknesses, a sealing stress that differs from joint to joint,
and surges that come as single events through the years. It is lived through from installation to the present, leaking joints being tightened
again, then for ten more years. The tool sees an inventory with gaps. The world is of our own invention and no evidence about real joints.

Run: OMP_NUM_THREADS=1 python tests/benchmarks/truth_test.py [joints] [seed]
"""

import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import pandas as pd

from screener import Settings, read_inventory, screen
from screener.likelihood.calibration import brier_score, calibrate, concordance, share_found
from screener.likelihood.step import assess_likelihood
from screener.likelihood.years import likelihood_over_years

NOW, HORIZON = 2026, 10
PSI, FOOT_POUND = 6894.757, 1.3558179


def true_table(count, generator):
    """The complete inventory. Mains share installation year, crew, pressure and surge."""
    main = generator.integers(0, max(count // 60, 1), count)
    mains = main.max() + 1

    def of_main(values):
        return np.asarray(values)[main]

    size = of_main(generator.choice([6, 8, 10, 12, 16, 18, 20, 24, 30, 36], mains))
    ring_class = np.where(generator.random(count) < 0.8, "D", generator.choice(["B", "E"], count))
    surge = of_main(generator.uniform(10, 60, mains))
    return pd.DataFrame(
        {
            "Joint ID": [f"J-{i:06d}" for i in range(count)],
            "Main": [f"M-{m}" for m in main],
            "Contractor": [f"crew {c}" for c in of_main(generator.integers(0, 25, mains))],
            "Size (in)": size,
            "DR": of_main(generator.choice([11, 13.5, 17], mains)),
            "Pipe material": "PE4710",
            "Ring standard": "AWWA C207",
            "Ring class": ring_class,
            "Ring material": "carbon steel",
            "Ring form": "flat plate",
            "Bolt grade": "B7",
            "Torque (ft-lb)": 0.0,
            "Lubrication": "greased",
            "Mating side": generator.choice(["PE", "valve"], count, p=[0.6, 0.4]),
            "Gasket": "none",
            "Setting": generator.choice(["buried", "chamber"], count, p=[0.7, 0.3]),
            "Temp (F)": np.round(of_main(generator.uniform(50, 70, mains)), 1),
            "Op pressure (psi)": np.round(of_main(generator.uniform(50, 125, mains)), 0),
            "Recurrent surge (psi)": np.round(0.5 * surge, 1),
            "Occasional surge (psi)": np.round(surge, 1),
            "Cycles per day": 4,
            "Year installed": of_main(generator.integers(1990, 2024, mains)),
        }
    )


def with_gaps(table, generator):
    """The inventory as the tool sees it."""
    seen = table.copy().astype(object)
    for name, share in (("Torque (ft-lb)", 0.7), ("Ring class", 0.35), ("Lubrication", 0.6), ("Occasional surge (psi)", 0.4), ("Recurrent surge (psi)", 0.4), ("Bolt grade", 0.3)):  # fmt: skip
        seen.loc[generator.random(len(seen)) < share, name] = None
    return seen


def fleet_of(table, folder, name):
    path = folder / f"{name}.csv"
    table.to_csv(path, index=False)
    return read_inventory(path, Settings(assessment_date=f"{NOW}-01-01"))


class World:
    """The true joints. Dimensions come from the complete inventory's fleet; everything else is drawn here."""

    def __init__(self, fleet, crew, generator):
        n, r, b = len(fleet), fleet.ring, fleet.bolts
        self.generator = generator

        def around(spread, count=n):
            return np.exp(generator.normal(0, spread, count))

        habit = around(0.35, 25)[crew]
        area = np.pi / 4 * (fleet.hub.outside_diameter**2 - fleet.pipe.bore_diameter**2)
        bolts = b.count.astype(int)
        # Each bolt by itself, then what the neighbours' tightening takes away again.
        each = np.where(np.arange(bolts.max()) < bolts[:, None], around(0.25, (n, bolts.max())), 0.0)
        self.wanted_stress = 1500 * PSI * habit * around(0.12)
        asked = self.wanted_stress * area * each.sum(axis=1) / bolts * 0.88
        outer, bore, circle = r.outside_diameter / 2, r.bore_diameter / 2, r.bolt_circle_diameter / 2
        rim = np.minimum(fleet.hub.outside_diameter / 2, outer)
        reaction = rim - 0.22 * (rim - bore)
        yield_strength = 290e6 * around(0.08)
        thickness = r.thickness * around(0.03)
        hinge = 2 * np.pi * yield_strength * thickness**2 / 4 * (outer - bore - r.hole_diameter) / (circle - reaction) * around(0.12)
        self.torque = habit * around(0.05) * 0.16 * b.diameter * 1500 * PSI * area / bolts
        self.assembly = np.minimum(np.minimum(asked, hinge), bolts * b.tensile_area * b.allowed_stress)
        self.capacity = hinge
        # A share lost with every tenfold of time since an hour, more for thick stiff rings and warm pipes.
        self.loss = np.clip(0.055 * around(0.25) * (1 + 0.02 * (fleet.pipe.temperature - 15)) * (thickness / 0.03) ** 0.25, 0.01, 0.14)
        self.sealing = 0.85 * around(0.35)
        self.area, self.bore = area, fleet.pipe.bore_diameter
        self.mean = (fleet.hub.outside_diameter + fleet.pipe.bore_diameter) / 2
        held = fleet.loads.restrained
        wall = np.pi / 4 * (fleet.pipe.outside_diameter**2 - self.bore**2)
        self.pull = np.where(held, 0.45 * (fleet.pipe.dimension_ratio - 1) / 2 * wall, np.pi / 4 * self.bore**2)
        self.cold_pull = np.where(held, 0.5e9 * 1.5e-4 * wall, 0.0)
        self.pressure = fleet.loads.operating_pressure * around(0.06)
        self.surge = fleet.loads.occasional_surge * around(0.2)
        self.rate = 0.8 * around(0.4)
        self.transmitted = generator.uniform(0.55, 0.75, n)

    def kept(self, years):
        return np.maximum(1 - self.loss * np.log10(np.maximum(years, 1e-3) * 8766), 0.02)

    def leaks_in_year(self, years_since_tightened):
        """Peak of the year's surge events (Poisson many, exponential heights above 0.4 of the stated surge) against the face."""
        g = self.generator
        events = g.poisson(self.rate)
        highest = np.where(events > 0, -np.log(1 - g.random(len(events)) ** (1 / np.maximum(events, 1))), 0.0)
        peak = self.pressure * (1 + 0.03 * g.normal(size=len(events))) + np.where(events > 0, self.surge * (0.4 + 0.35 * highest), 0.0)
        cold = np.maximum(4 + 2.5 * g.normal(size=len(events)), 0.0)
        parting = peak * (np.pi / 4 * (self.mean**2 - self.bore**2) + self.pull) + self.cold_pull * cold
        face = (self.assembly * self.kept(years_since_tightened) - self.transmitted * parting) / self.area
        return face < self.sealing * peak


def live(world, installed):
    """(leaks seen before now, years since last tightened or leaked, which joints leak within the horizon)."""
    tightened, past = installed.astype(float), np.zeros(len(installed), dtype=int)
    for year in range(int(installed.min()), NOW):
        there = installed < year
        leaking = there & world.leaks_in_year(year - tightened)
        past += leaking
        tightened = np.where(leaking, year, tightened)
        # After a leak the crew tightens harder; the hinge still caps.
        world.assembly = np.where(leaking, np.minimum(world.assembly * 1.25, world.capacity), world.assembly)
    ahead = np.zeros(len(installed), dtype=bool)
    for year in range(NOW, NOW + HORIZON):
        ahead |= world.leaks_in_year(year - tightened)
    return past, tightened, ahead


def main(count=20_000, seed=1):
    generator = np.random.default_rng(seed)
    table = true_table(count, generator)
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        whole = fleet_of(table, folder, "true").fleet
        crew = table["Contractor"].str.split().str[1].astype(int).to_numpy()[whole.position]
        world = World(whole, crew, generator)
        table.loc[whole.position, "Torque (ft-lb)"] = np.round(world.torque / FOOT_POUND)
        seen = fleet_of(with_gaps(table, generator), folder, "seen")
    installed = table["Year installed"].to_numpy()[whole.position]
    past, tightened, ahead = live(world, installed)
    start = time.perf_counter()
    screening = screen(seen)
    fleet, limits = screening.fleet, screening.limits
    both, a, b = np.intersect1d(whole.position, fleet.position, return_indices=True)
    found = assess_likelihood(fleet, limits, seed)
    at = np.searchsorted(whole.position, fleet.position)
    leaky = np.where(past > 0, tightened - installed, 0)[at]
    years = likelihood_over_years(found.joints, (NOW - tightened)[at], HORIZON, seed, leaky_years=leaky)
    took = time.perf_counter() - start
    leaked, records = ahead[a], past[a]
    print(f"{len(both):,} joints, {took:.0f} s; leaks before now {records.sum():,} at {np.sum(records > 0):,} joints; "
          f"{leaked.sum():,} joints leak in {HORIZON} years, {(leaked & (records == 0)).sum():,} of them for the first time")  # fmt: skip
    rankings = {
        "likelihood over years, own record": years.within,
        "annual likelihood": found.likelihood,
        "face utilization": limits.utilization[:, limits.names.index("face_occasional")],
        "largest utilization": np.nanmax(limits.utilization, axis=1),
        "leaks on record": past[at],
        "age": NOW - fleet.age.installed_year,
        "size": fleet.pipe.outside_diameter,
        "pressure with surge": fleet.loads.operating_pressure + fleet.loads.occasional_surge,
        "at random": generator.random(len(fleet)),
    }
    rankings = {name: np.where(np.isnan(score), -np.inf, score)[b] for name, score in rankings.items()}
    compare("all joints", rankings, leaked, np.ones(len(both), dtype=bool))
    compare("joints without a leak before now", rankings, leaked, records == 0)
    calibrated(years.within[b], leaked, generator.random(len(both)) < 0.5)


def compare(kind, rankings, leaked, chosen):
    print(f"\n{kind}: share of the coming leaks in the top 5 %, top 10 %, top 20 %; concordance")
    for name, score in rankings.items():
        shares = [share_found(score[chosen], leaked[chosen], top) for top in (0.05, 0.1, 0.2)]
        print(f"  {name:36s}" + "".join(f"{share:7.0%}" for share in shares) + f"{concordance(score[chosen], leaked[chosen]):8.3f}")


def calibrated(chance, leaked, held_out):
    fit = calibrate(chance[~held_out], leaked[~held_out])
    right = fit.apply(chance[held_out])
    known = np.isfinite(right)
    print(f"\nmean chance over {HORIZON} years {np.nanmean(chance):.3f}, seen {leaked.mean():.3f}; calibrated on half the joints: intercept {fit.intercept:.2f}, slope "
          f"{fit.slope:.2f}; on the other half mean {right[known].mean():.3f}, Brier {brier_score(right[known], leaked[held_out][known]):.4f} against "
          f"{leaked.mean() * (1 - leaked.mean()):.4f} for the same chance everywhere")  # fmt: skip


if __name__ == "__main__":
    main(*(int(word) for word in sys.argv[1:3]))
