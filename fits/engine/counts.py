"""Poisson counts through the transform that makes their errors 1.

2 sqrt(v + 3/8)  (F. Anscombe, Biometrika 35, 1948).
"""

import numpy as np

from fits.engine.data import FloatArray


def stabilised(values: FloatArray) -> FloatArray:
    """The transform of counts or of their expectation; values below −3/8 are for the caller to refuse."""
    return np.asarray(2.0 * np.sqrt(values + 0.375))
