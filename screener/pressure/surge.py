"""Water hammer by single equations: celerity in a plastic pipe, rise, slow closure, junctions, attenuation.

SI throughout, arguments are floats or arrays that broadcast, NaN in gives NaN out. One liquid, no cavity, no free gas: a little
undissolved air lowers every celerity here. Screening: a main with pumps, air valves or a vapour pressure in sight needs a transient study.
"""

import numpy as np

from screener.pressure.water import GRAVITY

POUND_PER_SQUARE_INCH = 0.45359237 * GRAVITY / 0.0254**2
FOOT = 0.3048

ASSOCIATION_LIQUID_CELERITY = 4660 * FOOT
ASSOCIATION_BULK_MODULUS = 300_000 * POUND_PER_SQUARE_INCH
ASSOCIATION_DYNAMIC_MODULUS = 150_000 * POUND_PER_SQUARE_INCH
"""The three constants printed with the association's celerity [m/s, Pa, Pa]; water and PE at 73 F (23 C)."""

DYNAMIC_MODULUS_BAND = (1.034e9, 1.43e9)
"""PE modulus that a front sees [Pa] at 20 to 23 C: the association's 150 000 psi (about the 1 s modulus) and a laboratory
main's instantaneous modulus (Covas et al. 2004). Both from memory; the upper end rests on one resin and one laboratory."""

RESTRAINTS = ("anchored", "anchored upstream", "expansion joints")


def association_celerity(dimension_ratio):
    """Celerity a [m/s] = 4660 ft/s / sqrt(1 + (K/E_d)(DR - 2)), K = 300 000 psi, E_d = 150 000 psi; dimension_ratio DR [-] > 2.

    PPI Handbook of PE Pipe, 2nd ed., ch. 6; AWWA M55 (from memory; agrees with the read value 11.3 psi per ft/s at DR 17).
    23 C only. It takes the wall as thin with expansion joints, which happens to come near a thick anchored wall of the same modulus:
    +5 % at DR 9, -6 % at DR 26. A sharp first front may be 8 to 26 % faster, see `DYNAMIC_MODULUS_BAND`.
    """
    ratio = np.asarray(dimension_ratio, dtype=float)
    ratio = np.where(ratio > 2, ratio, np.nan)
    return ASSOCIATION_LIQUID_CELERITY / np.sqrt(1 + ASSOCIATION_BULK_MODULUS / ASSOCIATION_DYNAMIC_MODULUS * (ratio - 2))


def axial_restraint(poisson, restraint):
    """Share k [-] of the hoop strain that axial support leaves: 1 - nu^2, 1 - nu/2 or 1.

    poisson nu [-]; restraint: text or array of texts out of `RESTRAINTS` (anywhere else NaN). Wylie and Streeter (1993), as quoted by
    Ghidaoui et al. (2005). Some texts print 5/4 - nu for a main anchored upstream only: 3 % more at nu = 0.45.
    """
    nu, held = np.broadcast_arrays(np.asarray(poisson, dtype=float), np.asarray(restraint))
    chosen = [held == name for name in RESTRAINTS]
    return np.select(chosen, [1 - nu**2, 1 - nu / 2, np.ones_like(nu)], default=np.nan) + 0 * nu


def thick_wall_factor(diameter_to_wall, poisson, axial_share):
    """Factor c [-] of a thick wall: c = (2 e/D)(1 + nu) + D/(D + e) k; for D/e below 25, so for all common PE.

    diameter_to_wall D/e [-] with D the bore; poisson nu [-]; axial_share k from `axial_restraint`. Wylie and Streeter (from memory).
    For D/e to infinity c = k, the thin wall.
    """
    slenderness = np.asarray(diameter_to_wall, dtype=float)
    return 2 / slenderness * (1 + poisson) + slenderness / (slenderness + 1) * axial_share


def celerity(density, bulk_modulus, wall_modulus, diameter_to_wall, wall_factor):
    """Celerity a [m/s] = sqrt(K/rho) / sqrt(1 + c (K/E)(D/e)).

    density rho [kg/m3], bulk_modulus K of the liquid [Pa], wall_modulus E for fast loading [Pa], diameter_to_wall D/e [-] with D the bore
    (= DR - 2 in a pipe made to an outside diameter), wall_factor c [-]. Wylie and Streeter (1993).
    """
    liquid = np.sqrt(np.asarray(bulk_modulus, dtype=float) / density)
    return liquid / np.sqrt(1 + wall_factor * np.asarray(bulk_modulus, dtype=float) / wall_modulus * diameter_to_wall)


def joukowsky(density, celerity, velocity_change):
    """Rise dP [Pa] = rho a dV of a change of velocity quicker than 2 L/a; rho [kg/m3], a [m/s], dV [m/s]. Joukowsky (1898)."""
    return np.asarray(density, dtype=float) * celerity * velocity_change


def reflection_time(length, celerity):
    """Time 2 L/a [s] until the reflection returns; length L to the next reservoir [m], a [m/s]."""
    return 2 * np.asarray(length, dtype=float) / celerity


def slow_closure(density, celerity, distance, velocity_change, closure_time):
    """Largest rise [Pa] at a point while the flow at the valve falls linearly in time: rho a dV min(1, 2 x/(a T)).

    distance x [m] from the reservoir that reflects (x = L at the valve gives Michaud's 2 rho L dV/T), velocity_change dV [m/s],
    closure_time T [s]. Michaud (1878) (from memory); frictionless, the *velocity* falls linearly: a valve shut at an even pace does
    most of its work at the end, so use the time of that last part. T = 0 is a sudden stop.
    """
    time = np.asarray(closure_time, dtype=float)
    time = np.where(time >= 0, time, np.nan)
    back = reflection_time(distance, celerity)
    share = np.where(time > back, back / np.where(time > 0, time, np.nan), 1.0) + 0 * time + 0 * back
    return joukowsky(density, celerity, velocity_change) * share


def trapped_rise(density, celerity, trapped_volume, pipe_volume):
    """Rise [Pa] when a volume is pressed slowly into a length shut at both ends: rho a^2 dVol/Vol (derived from continuity).

    celerity a [m/s] with the modulus of the time it takes, so lower than a wave's; volumes [m3]. The waves of a closure that can't leave
    through a reservoir settle at this level: dVol = A dV T/2 for a linear closure of T.
    """
    return np.asarray(density, dtype=float) * np.asarray(celerity, dtype=float) ** 2 * trapped_volume / pipe_volume


def junction_transmission(area, celerity, incoming):
    """Share T [-] of a wave that passes a junction, the same into every other pipe; T - 1 is reflected.

    T = 2 (A_1/a_1) / sum(A_i/a_i). area A and celerity a of all pipes that meet, last axis = pipe [m2, m/s]; incoming: index of the pipe
    in which the wave comes. Read in the problems to a text on the wave plan method, ch. 1. One pipe alone is a dead end (T = 2); a
    reservoir is a pipe of endless area (T = 0). A surge that comes out of PE into iron of the same bore rises by half.
    """
    admittance = np.asarray(area, dtype=float) / np.asarray(celerity, dtype=float)
    return 2 * admittance[..., incoming] / admittance.sum(axis=-1)


def junction_reflection(area, celerity, incoming):
    """Share R [-] of a wave that a junction sends back: T - 1, see `junction_transmission`."""
    return junction_transmission(area, celerity, incoming) - 1


def front_attenuation(friction_factor, velocity, distance, bore, celerity):
    """What steady friction leaves [-] of a full-stop front after a distance: 1 - tanh(f V x / (4 D a)).

    friction_factor f (Darcy) [-], velocity V before the stop [m/s], distance x travelled [m], bore D [m], celerity a [m/s]. Derived;
    same form in Leslie and Tijsseling (2000) (from memory). Line packing goes on behind the front: not an envelope of the maximum.
    """
    return 1 - np.tanh(np.asarray(friction_factor, dtype=float) * velocity * distance / (4 * np.asarray(bore, dtype=float) * celerity))


def margin_to_vapour(pressure, fall, vapour_pressure, atmospheric_pressure):
    """Pressure left above vapour [Pa] after a fall: P - dP - (p_v - p_atm); negative: the column may separate.

    pressure P gauge [Pa], fall dP [Pa], vapour_pressure p_v and atmospheric_pressure p_atm absolute [Pa]. After separation the rise can
    exceed Joukowsky's (Bergant, Simpson and Tijsseling 2006), without a confirmed simple bound: such a main needs a transient study.
    """
    return np.asarray(pressure, dtype=float) - fall - (np.asarray(vapour_pressure, dtype=float) - atmospheric_pressure)
