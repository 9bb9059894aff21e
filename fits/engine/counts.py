"""Poisson counts through the transform that makes their errors 1.

2 sqrt(v + 3/8)  (F. Anscombe, Biometrika 35, 1948). Its mean is not the transform of the mean, but lower by
1/(4 sqrt(μ)) − 1/(32 μ^{3/2}) and so on: 0.08 of an error at 10 counts, the same way at every point, which a thousand
points together resolve. So a curve that expects μ is judged by the mean of the transform over the counts of μ.
"""

from functools import lru_cache

import numpy as np
import scipy.special
from scipy.interpolate import CubicSpline

from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.refusal import InputRefused


def stabilised(values: FloatArray) -> FloatArray:
    """The transform of counts or of their expectation; values below −3/8 are for the caller to refuse."""
    return np.asarray(2.0 * np.sqrt(values + 0.375))


# Up to this expectation the mean is summed over all counts; above, the next term of the series is below 1e-6.
_MOST_SUMMED = 100.0
_KNOTS = 801


def mean_stabilised(expected: FloatArray) -> FloatArray:
    """The mean of the transform of Poisson counts, to 1e-6; expectations are at least 0."""
    large = np.maximum(expected, _MOST_SUMMED)
    shortfall = 0.25 / np.sqrt(large) - 0.03125 / large**1.5
    small = expected < _MOST_SUMMED
    if small.any():
        shortfall = np.where(small, _shortfall()(np.sqrt(np.minimum(expected, _MOST_SUMMED))), shortfall)
    return np.asarray(stabilised(expected) - shortfall)


@lru_cache(maxsize=1)
def _shortfall() -> "CubicSpline[np.float64]":
    """By how much the mean of the transform is below the transform of the mean, as a function of sqrt(μ)."""
    roots = np.linspace(0.0, np.sqrt(_MOST_SUMMED), _KNOTS)
    expected = roots[:, None] ** 2
    counts = np.arange(260.0)
    logarithms = scipy.special.xlogy(counts, expected) - expected - scipy.special.gammaln(counts + 1.0)
    return CubicSpline(roots, stabilised(roots**2) - np.exp(logarithms) @ stabilised(counts))


def on_scale(values: FloatArray, data: Data) -> FloatArray:
    """A curve's values on the scale on which the data are judged. Raises InputRefused for expected counts below 0."""
    if data.source is not ErrorSource.COUNTS:
        return values
    wrong = np.flatnonzero(values < 0.0)
    if wrong.size:
        at = data.x[int(wrong[0])]
        reason = f"expects {values[wrong[0]]:g} counts at x = {at:g}"
        raise InputRefused("negative-expectation", "y", reason, "Give counts from 0")
    return mean_stabilised(values)


def relative_change(values: FloatArray, data: Data) -> FloatArray:
    """What a relative change of the curve does on the scale of the data, per unit of change.

    values  the curve on that scale. For counts, with s = 2 sqrt(v + 3/8): v ds/dv = (s² − 3/2)/(2 s).
    """
    if data.source is not ErrorSource.COUNTS:
        return values
    return np.asarray(
        np.where(values > 0.0, (values**2 - 1.5) / (2.0 * np.where(values > 0.0, values, 1.0)), 0.0)
    )
