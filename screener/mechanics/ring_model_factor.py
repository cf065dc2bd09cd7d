"""How far the ring estimates may be from the truth: mean and coefficient of variation of (true / estimate), with where each comes from.

The numbers from finite elements are held to the stored studies by the tests. What finite elements leave out is a judgement and says so.
Bolt holes have their own factor elsewhere.
"""

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True, eq=False)
class ModelFactor:
    """mean of true / estimate [-]; variation: its coefficient of variation [-]; source: what it rests on"""

    mean: float | np.ndarray
    variation: float | np.ndarray
    source: str


FLAT_RING_STRESS = ModelFactor(1.01, 0.01, "162 flat rings of AWWA C207, ASME B16.5, EN 1092-1 against axisymmetric finite elements")
FLAT_RING_ROTATION = ModelFactor(1.00, 0.01, "the same 162 rings")
PLASTIC_COUPLE = ModelFactor(0.99, 0.01, "six rings against elastic-plastic finite elements at eight times first-yield rotation")
SOLVED_SECTION_STRESS = ModelFactor(1.00, 0.02, "five outlines against a finer scikit-fem mesh; a sharp inner corner is not covered")
SECTION_INTEGRALS_STRESS = ModelFactor(1.00, 0.04, "four compact outlines against finite elements; not for convoluted rings, which distort")
HUB_BED_ARM_AT_BOLT_UP = ModelFactor(1.04, 0.06, "hub as a bed against ring, collar and pipe as elastic bodies, 50 joints without pipe pull")
STUB_END_ARM = ModelFactor(1.00, 0.04, "turning collar on beds against ring, collar and pipe as elastic bodies, 30 joints not used in setting it, pull share 0 to 0.7")
STATED_RATING = ModelFactor(1.0, 0.15, "judgement, no source: how the stated rating was found is not known")
BEYOND_FINITE_ELEMENTS = ModelFactor(1.0, 0.10, "judgement, no source: friction, bolts pulling unevenly, fillets, misfit, uneven creep of the collar")


def combined(*factors):
    """Product of independent factors: `ModelFactor`; means multiply, squared coefficients of variation add."""
    mean = np.prod([f.mean for f in factors], axis=0)
    variation = np.sqrt(np.sum([np.square(f.variation) for f in factors], axis=0))
    return ModelFactor(mean, variation, "; ".join(f.source for f in factors))


def hub_bed_arm_factor(pipe_pull_share):
    """True lever arm over `ring.hub_contact`'s when the pipe wall carries a share of the bolt load: `ModelFactor` of arrays.

    pipe_pull_share: axial tension in the pipe wall over total bolt load, 0 to 0.7 [-], NaN outside. Fitted to the study of `STUB_END_ARM`; use
    `ring_on_stub_end.stub_end_contact` where the pipe's dimensions are known.
    """
    share = np.where((np.asarray(pipe_pull_share) >= 0) & (np.asarray(pipe_pull_share) <= 0.7), pipe_pull_share, np.nan)
    return ModelFactor(1.035 + 0.17 * share + 0.52 * share**2, 0.055 + 0.05 * share, "finite elements of ring, collar and pipe, 50 joints")


RING_KIND_FACTOR = {
    "flat plate": combined(FLAT_RING_STRESS, HUB_BED_ARM_AT_BOLT_UP, BEYOND_FINITE_ELEMENTS),
    "solved section": combined(SOLVED_SECTION_STRESS, HUB_BED_ARM_AT_BOLT_UP, BEYOND_FINITE_ELEMENTS),
    "section integrals": combined(SECTION_INTEGRALS_STRESS, HUB_BED_ARM_AT_BOLT_UP, BEYOND_FINITE_ELEMENTS),
    "stated rating": STATED_RATING,
}
"""Ring stress at bolt-up, true / estimate, by how the ring was described. Under pressure replace the arm's factor by `STUB_END_ARM` or `hub_bed_arm_factor`."""
