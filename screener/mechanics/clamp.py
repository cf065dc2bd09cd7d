"""The clamped joint: from torque at assembly to the force between the faces today.

Bolts pull, the ring bends and turns, the hub's collar is squeezed. As the PE
creeps the stretch stored in bolts and ring is given up and the clamp falls:
a springy ring keeps more of it. SI; arrays broadcast; NaN in, NaN out.
"""

from dataclasses import dataclass
from enum import IntEnum

import numpy as np


class Cap(IntEnum):
    """What set the clamp force at assembly."""

    TORQUE = 0
    RING_COLLAPSE = 1
    BOLT_PROOF = 2


CAP_WORDS = {Cap.TORQUE: "", Cap.RING_COLLAPSE: "ring collapse", Cap.BOLT_PROOF: "bolt proof"}


@dataclass(frozen=True, eq=False)
class Assembly:
    """clamp_force: total clamp at tightening [N]; cap: `Cap` per joint, -1 where unknown."""

    clamp_force: np.ndarray
    cap: np.ndarray


def assembly_clamp(torque, nut_factor, bolt_diameter, number, ring_collapse_load, bolt_proof_load) -> Assembly:
    """Clamp force at tightening, n T / (K d), held down by what ring and bolts can take [N].

    torque T per bolt [N m]; nut factor K [-]; diameter d [m]; number n; loads are totals [N].
    Source: own (caps); torque form as PPI TN-38.
    """
    asked = number * torque / (nut_factor * bolt_diameter)
    force = np.minimum(np.minimum(asked, ring_collapse_load), bolt_proof_load)
    cap = np.where(force >= asked, Cap.TORQUE, np.where(ring_collapse_load <= bolt_proof_load, Cap.RING_COLLAPSE, Cap.BOLT_PROOF))
    return Assembly(force, np.where(np.isnan(force), -1, cap))


def collar_compliance(thickness, modulus, area, collars):
    """Squeeze of the PE collars for unit clamp force, n_c h / (E A_f) [m/N].

    thickness h of one collar [m]; apparent modulus E for the duration [Pa]; face contact area A_f [m2]; collars 1 or 2.
    """
    return collars * thickness / (modulus * area)


def gasket_compliance(thickness, modulus, area):
    """Squeeze of a gasket for unit clamp force, t_g / (E_g A_g) [m/N]; zero where there is none.

    thickness t_g [m]; modulus in compression E_g at the load's duration [Pa]; area under load A_g [m2]. Source: elementary.
    """
    return thickness / (modulus * area)


def retained_force(force, elastic_compliance, collar_compliance_then, collar_compliance_now):
    """Clamp force after the collars have crept at constant total stretch, F (C_e + C_0) / (C_e + C) [N].

    force when the bolts were set [N]; elastic_compliance of bolts, ring and gasket; collar compliance at the
    time scale of tightening and at the age of the clamp [m/N].
    Source: linear viscoelasticity, series of an elastic and a creeping part, by the effective-modulus method;
    own check against the hereditary integral (within 4 % for the PE power law).
    """
    return force * (elastic_compliance + collar_compliance_then) / (elastic_compliance + collar_compliance_now)


def load_factor(elastic_compliance, collar_compliance_fast):
    """Share of an added separating load that the bolts feel while the face stays closed, C_pe / (C_e + C_pe) [-].

    Compliances in m/N, the collar's at the speed of the load. Source: bolted-joint diagram, as VDI 2230; with
    soft PE faces it is far above the 0.25 of metal joints.
    """
    return collar_compliance_fast / (elastic_compliance + collar_compliance_fast)


def separating_load(pressure, pressure_diameter, bore_diameter, axial_force, bending_moment):
    """Load that parts the faces, P pi/4 (G^2 - D_b^2) + N + 4 M_b / G [N].

    pressure P [Pa]; G effective pressure diameter, D_b bore of the pipe [m]; N axial pull of the pipe wall [N];
    bending moment at the joint M_b [N m]. Source: free body of stub end and ring (own); bending as ASME VIII-1 practice.
    """
    return pressure * np.pi / 4 * (pressure_diameter**2 - bore_diameter**2) + axial_force + 4 * bending_moment / pressure_diameter


def face_force(clamp_force, separating, factor):
    """Force left between the faces, F - (1 - phi) H while positive, else 0 [N]."""
    return np.maximum(clamp_force - (1 - factor) * separating, 0.0)


def bolt_load(clamp_force, separating, factor):
    """Total bolt force at a separating load H, F + phi H while the face is closed, H once it has opened [N]."""
    return np.maximum(clamp_force + factor * separating, separating)


def opening_separating_load(clamp_force, factor):
    """Separating load at which the face force falls to zero, F / (1 - phi) [N]."""
    return clamp_force / (1 - factor)


def relaxation(elastic_compliance, collar_compliance_then, collar_compliance_now):
    """Share of the clamp force kept at constant stretch, (C_e + C_0) / (C_e + C) [-]; as `retained_force` for unit force."""
    return retained_force(1.0, elastic_compliance, collar_compliance_then, collar_compliance_now)


def clamp_after_retightening(first_force, second_force, kept_of_first_now, kept_of_first_then, kept_of_second_now):
    """Clamp force today of a joint tightened twice, F_1 R(t) + (F_2 - F_1 R(t_r)) R(t - t_r) [N].

    F_1 at assembly, F_2 at re-tightening [N]; kept shares R since assembly today, since assembly at the
    re-tightening, and since the re-tightening [-]. A wrench does not slacken: F_2 below what was left adds nothing.
    Source: Boltzmann superposition of stretch increments (linear viscoelasticity).
    """
    added = np.maximum(second_force - first_force * kept_of_first_then, 0.0)
    return first_force * kept_of_first_now + added * kept_of_second_now


def clamp_after_tightenings(forces, kept):
    """Clamp force today of a joint tightened any number of times, sum of d_j R(today - t_j) [N].

    forces (m, ...): clamp asked for at assembly and at each later tightening [N]; kept (m + 1, m, ...): share kept R of what was added at
    tightening j, at the time of tightening k (rows 0 to m - 1, only j < k is read) and today (row m) [-]. What is added at k is the force
    asked for less what is left of the earlier ones, never less than nothing. Source: as `clamp_after_retightening`, its case of two.
    """
    added = []
    for k, force in enumerate(forces):
        left = sum(kept[k][j] * part for j, part in enumerate(added))
        added.append(np.maximum(force - left, 0.0))
    return sum(kept[len(added)][j] * part for j, part in enumerate(added))
