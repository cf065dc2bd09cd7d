"""Loss of metal by corrosion over the years. SI (m), ages in years; arrays broadcast; NaN in, NaN out."""

import numpy as np

POWER_LAW_YEARS = 20.0
"""Years of exposure for which ISO 9224 gives the power law; beyond them it goes on along its tangent (from memory)."""


def exposed_years(age, coating_life):
    """Years without a coating, t - t_c, at least none [years]; an age below zero is unknown.

    age t, coating_life t_c, zero where uncoated [years]. Source: own; a coating is taken to protect wholly and then not at all.
    """
    exposed = np.maximum(np.asarray(age, dtype=float) - coating_life, 0.0)
    return np.where(np.asarray(age) >= 0, exposed, np.nan)


def power_law_loss(first_year_rate, exponent, age, coating_life):
    """Thickness lost in air on one face, r t^b up to 20 years of exposure, then r (20^b + b 20^(b - 1) (t - 20)) [m].

    first_year_rate r [m]; exponent b [-], 0.523 for carbon steel; t from `exposed_years`. Source: ISO 9223 (rates by category) and
    ISO 9224 (exponents, long exposure), from memory.
    """
    exposed = exposed_years(age, coating_life)
    within = np.minimum(exposed, POWER_LAW_YEARS)
    beyond = exposed - within
    law = first_year_rate * within**exponent
    tangent = first_year_rate * exponent * POWER_LAW_YEARS ** (np.asarray(exponent, dtype=float) - 1.0) * beyond
    # A power of zero exposure is one for b = 0, and loses nothing.
    return np.where(exposed == 0, 0.0 * (law + tangent), law + tangent)


def tabled_loss(table_age, table_loss, age, coating_life):
    """Thickness lost in soil on one face, on straight lines between tabled ages [m].

    table_age [years] rising and table_loss [m]: one soil's row, starting from nothing at age 0; t from `exposed_years`; NaN beyond the last
    tabled age. Source of the form: EN 1993-5, 4.4, whose Table 4-1 gives losses by soil class for 5 to 100 years.
    """
    ages = np.concatenate([[0.0], np.asarray(table_age, dtype=float)])
    losses = np.concatenate([[0.0], np.asarray(table_loss, dtype=float)])
    exposed = exposed_years(age, coating_life)
    return np.interp(exposed, ages, losses, right=np.nan)
