"""Polyethylene under lasting load: its apparent modulus by time and temperature.

PE creeps; for one duration of load it is treated as elastic with the apparent
modulus of that duration, which handbooks tabulate for constant load and, as
the handbook notes, for constant strain alike. SI throughout, temperatures in
deg C, NaN in, NaN out.
"""

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class ModulusLaw:
    """Apparent modulus by duration, E = modulus_at_one_second * tau**-exponent, fitted to a table.

    modulus_at_one_second [Pa]; exponent [-]; shortest, longest: durations the
    table covers [s]; largest_misfit: largest |fit/table - 1| over its rows [-].
    """

    modulus_at_one_second: float
    exponent: float
    shortest: float
    longest: float
    largest_misfit: float


def fit_modulus_law(duration, modulus) -> ModulusLaw:
    """Power law through a modulus table by least squares of logarithms.

    duration [s], modulus [Pa]: the table's rows. Source of the form: the
    table of PPI Handbook of PE Pipe ch. 3 App. B is straight within 2 % (PE4XXX) to 3.2 % (PE2XXX) on double logarithmic paper.
    """
    duration, modulus = np.asarray(duration, dtype=float), np.asarray(modulus, dtype=float)
    slope, intercept = np.polyfit(np.log(duration), np.log(modulus), 1)
    fitted = np.exp(intercept + slope * np.log(duration))
    return ModulusLaw(
        float(np.exp(intercept)),
        float(-slope),
        float(duration.min()),
        float(duration.max()),
        float(np.abs(fitted / modulus - 1.0).max()),
    )


def apparent_modulus(duration, temperature, law: ModulusLaw, table_temperature, table_multiplier):
    """Apparent modulus E(tau, T) of PE [Pa].

    duration tau [s]; temperature T [deg C]; law at the table's reference
    temperature; table_temperature [deg C], table_multiplier [-]: temperature
    multipliers, interpolated. NaN outside the multiplier table, and for
    durations beyond 3 times the table's longest; durations shorter than its
    shortest are extrapolated down to 1 s (the power law then stays within the
    scatter of published dynamic moduli).
    Source: PPI Handbook of PE Pipe, 2nd ed., ch. 3 App. B Tables B.1.1 and B.1.2 (multipliers from memory).
    """
    duration, temperature = np.broadcast_arrays(np.asarray(duration, dtype=float), np.asarray(temperature, dtype=float))
    order = np.argsort(table_temperature)
    warm, multiplier = np.asarray(table_temperature)[order], np.asarray(table_multiplier)[order]
    factor = np.interp(temperature, warm, multiplier)
    inside = (temperature >= warm[0]) & (temperature <= warm[-1]) & (duration >= 1.0) & (duration <= 3.0 * law.longest)
    safe = np.where(inside, duration, 1.0)
    return np.where(inside, law.modulus_at_one_second * safe**-law.exponent * factor, np.nan)
