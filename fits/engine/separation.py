"""How far curves are apart from each other, in error bars.

Two curves that are farther apart than twice the radius of a ball cannot both be in it:
‖β_a − β_b‖ ≤ ‖β_a − β̂‖ + ‖β̂ − β_b‖.
"""

from collections.abc import Sequence

import numpy as np
import scipy.spatial.distance

from fits.engine.data import FloatArray

# Pairs grow with the square of the curves: of so many there are 125 000.
MOST_CURVES = 500


def separations_of(coordinates: Sequence[FloatArray]) -> FloatArray:
    """‖β_a − β_b‖ of each pair of k curves: (0, 1), (0, 2) … (1, 2) …, shape (k (k − 1)/2,).

    coordinates  β of each curve, of shape (J,)
    """
    if len(coordinates) < 2:
        return np.empty(0)
    return np.asarray(scipy.spatial.distance.pdist(np.asarray(coordinates)))
