"""Poisson counts through the transform that makes their errors 1.

2 sqrt(v + 3/8)  (F. Anscombe, Biometrika 35, 1948).
"""

import numpy as np

from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.refusal import InputRefused


def stabilised(values: FloatArray) -> FloatArray:
    """The transform of counts or of their expectation; values below −3/8 are for the caller to refuse."""
    return np.asarray(2.0 * np.sqrt(values + 0.375))


def on_scale(values: FloatArray, data: Data) -> FloatArray:
    """A curve's values on the scale on which the data are judged. Raises InputRefused for expected counts below 0."""
    if data.source is not ErrorSource.COUNTS:
        return values
    wrong = np.flatnonzero(values < 0.0)
    if wrong.size:
        at = data.x[int(wrong[0])]
        reason = f"expects {values[wrong[0]]:g} counts at x = {at:g}"
        raise InputRefused("negative-expectation", "y", reason, "Give counts from 0")
    return stabilised(values)


def relative_change(values: FloatArray, data: Data) -> FloatArray:
    """What a relative change of the curve does on the scale of the data, per unit of change.

    values  the curve on that scale. For counts, with s = 2 sqrt(v + 3/8): v ds/dv = (s² − 3/2)/(2 s).
    """
    if data.source is not ErrorSource.COUNTS:
        return values
    return np.asarray(
        np.where(values > 0.0, (values**2 - 1.5) / (2.0 * np.where(values > 0.0, values, 1.0)), 0.0)
    )
