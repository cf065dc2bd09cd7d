"""First-order reliability of our own leak limit state, joint by joint, against OpenTURNS with its own distributions, transformation and solver.

OpenTURNS gets the margin in newtons as a formula, our routine its logarithm with analytic gradients: two routes to the same design point.
"""

import numpy as np
import openturns as ot
import pytest
from scipy.stats import norm

from screener.likelihood import tightness
from screener.likelihood.form import first_order
from screener.likelihood.sampling import sample_around
from screener.likelihood.tightness import Doubt, HeldBy, JointDoubts, limit_state

ot.Log.Show(ot.Log.NONE)

FORMULAS = {
    HeldBy.TORQUE: "F * c",
    HeldBy.RING_COLLAPSE: "F * y * r",
    HeldBy.BOLT_PROOF: "F",
}
QUANTITIES = ["c", "q", "y", "r", "m", "p", "s", "t"]


def invented_joints(count, seed):
    """Joints of our own invention over a wide range of every input."""
    generator = np.random.default_rng(seed)

    def between(low, high):
        return generator.uniform(low, high, count)

    area = 10 ** between(-2.3, -0.3)
    pressure = between(0.4e6, 1.2e6)
    need = 1.5 * pressure * area
    return JointDoubts(
        torque_clamp=need * between(1.5, 7),
        collapse_load=need * between(1.5, 7),
        proof_load=need * between(3, 9),
        kept=between(0.35, 0.8),
        load_factor=between(0.2, 0.6),
        thrust_per_pressure=area * between(0.3, 1.2),
        pull_per_cooling=np.where(between(0, 1) < 0.5, 0.0, 2e4 * area),
        contact_area=area,
        required_stress_factor=between(0.8, 1.5),
        operating_pressure=pressure,
        surge_peak=pressure * between(0.05, 0.6),
        cooling=between(0, 12),
        preload_variation=between(0.1, 0.5),
        creep_variation=between(0.15, 0.4),
        ring_yield_variation=between(0.05, 0.12),
        ring_model_variation=between(0.1, 0.3),
        required_stress_variation=between(0.2, 0.4),
        operating_variation=between(0.03, 0.15),
        surge_variation=between(0.2, 0.5),
        cooling_deviation=between(2, 6),
    )


def formula(joints, i, held_by):
    a = {name: repr(float(value[i])) for name, value in vars(joints).items()}
    clamp = {HeldBy.TORQUE: a["torque_clamp"], HeldBy.RING_COLLAPSE: a["collapse_load"], HeldBy.BOLT_PROOF: a["proof_load"]}[held_by]
    left = f"({FORMULAS[held_by].replace('F', clamp)}) / (1 + q * (1 / {a['kept']} - 1))"
    needed = f"(1 - {a['load_factor']}) * ({a['thrust_per_pressure']} * (p + s) + {a['pull_per_cooling']} * t) + m * (p + s) * {a['contact_area']}"
    return f"({left} - ({needed})) / {a['contact_area']} / 1e6"


def distributions(joints, i):
    def lognormal(mean, variation):
        return ot.ParametrizedDistribution(ot.LogNormalMuSigma(mean, mean * variation, 0.0))

    j = {name: float(value[i]) for name, value in vars(joints).items()}
    peak = ot.ParametrizedDistribution(ot.GumbelMuSigma(j["surge_peak"], j["surge_variation"] * j["surge_peak"]))
    return [
        lognormal(1.0, j["preload_variation"]),
        lognormal(1.0, j["creep_variation"]),
        lognormal(tightness.RING_YIELD_OVER_MINIMUM, j["ring_yield_variation"]),
        lognormal(tightness.RING_MODEL_MEAN, j["ring_model_variation"]),
        lognormal(j["required_stress_factor"], j["required_stress_variation"]),
        lognormal(j["operating_pressure"], j["operating_variation"]),
        peak,
        ot.Normal(j["cooling"], j["cooling_deviation"]),
    ]


def reference(joints, i, held_by):
    """(beta, design point) by OpenTURNS."""
    marginals = distributions(joints, i)
    event = ot.ThresholdEvent(
        ot.CompositeRandomVector(ot.SymbolicFunction(QUANTITIES, [formula(joints, i, held_by)]), ot.RandomVector(ot.JointDistribution(marginals))),
        ot.Less(),
        0.0,
    )
    solver = ot.AbdoRackwitz()
    solver.setStartingPoint([m.computeQuantile(0.5)[0] for m in marginals])
    solver.setMaximumAbsoluteError(1e-10)
    solver.setMaximumRelativeError(1e-10)
    solver.setMaximumResidualError(1e-10)
    solver.setMaximumConstraintError(1e-10)
    solver.setMaximumIterationNumber(500)
    solver.setMaximumCallsNumber(5000)
    algorithm = ot.FORM(solver, event)
    algorithm.run()
    result = algorithm.getResult()
    sign = -1.0 if result.getIsStandardPointOriginInFailureSpace() else 1.0
    return sign * result.getHasoferReliabilityIndex(), np.array(result.getPhysicalSpaceDesignPoint())


def test_thousand_joints_of_our_limit_state_against_openturns():
    joints = invented_joints(1000, 20)
    worst, places = 0.0, 0
    for held_by in HeldBy:
        found = first_order(limit_state(joints, held_by), len(joints), len(Doubt))
        assert found.converged.all()
        points = joints.space().physical(found.point)[0]
        for i in range(int(held_by), len(joints), 3):
            beta, point = reference(joints, i, held_by)
            worst = max(worst, abs(found.beta[i] - beta))
            places += 1
            if abs(beta) > 0.5:
                np.testing.assert_allclose(points[i], point, rtol=5e-3, atol=0.05)
    assert places == 1000
    assert worst <= 1e-4


@pytest.mark.parametrize("i", range(6))
def test_smallest_clamp_fails_when_one_of_three_does(i):
    """OpenTURNS samples the corner min(torque, collapse, proof) itself; our series of three smooth limit states holds it."""
    joints = invented_joints(60, 4)
    parts = [first_order(limit_state(joints, held_by), len(joints), len(Doubt)) for held_by in HeldBy]
    total = np.sum([part.probability for part in parts], axis=0)
    chosen = np.argsort(np.abs(total - 0.05))[i]
    one = np.array([chosen])
    text = [f"({formula(joints, chosen, held_by)})" for held_by in HeldBy]
    function = ot.SymbolicFunction(QUANTITIES, [f"min(min({text[0]}, {text[1]}), {text[2]})"])
    ot.RandomGenerator.SetSeed(1)
    sample = ot.JointDistribution(distributions(joints, chosen)).getSample(200_000)
    crude = float((np.array(function(sample))[:, 0] < 0).mean())
    error = np.sqrt(crude * (1 - crude) / 200_000)
    centres = np.stack([part.point[one] for part in parts], axis=1)
    found = sample_around(tightness.leaks(joints), centres, one, 7, 40_000)
    assert found.probability[0] == pytest.approx(crude, abs=4 * np.hypot(error, found.standard_error[0]))
    assert norm.cdf(-min(part.beta[chosen] for part in parts)) < 1.3 * crude
