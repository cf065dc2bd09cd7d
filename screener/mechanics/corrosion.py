"""Loss of metal by corrosion over the years. SI (m), ages in years; arrays broadcast; NaN in, NaN out."""

import numpy as np


def power_law_loss(first_year_rate, exponent, age, coating_life):
    """Thickness lost on one face after `age` years, r (t - t_c)^b [m], none while the coating lives.

    first_year_rate r [m]; exponent b [-]; age t, coating_life t_c [years].
    Source: ISO 9224, d = r_corr t^b, with the coating's life taken off the exposed time (own).
    """
    exposed = np.maximum(np.asarray(age) - coating_life, 0.0)
    return first_year_rate * exposed**exponent
