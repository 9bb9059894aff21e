"""Errors that change along x and are not given: a smooth positive profile from squared local differences.

Second differences e_i (T. Gasser, L. Sroka, C. Jennen-Steinmetz, Biometrika 73, 1986) are nearly free of the curve and
have the variance σ²(x_i). ln σ² is fitted as a quadratic on the axis by Fisher scoring for squares that are gamma
distributed with a log link: β ← β + (XᵀX)⁻¹ Xᵀ (e²/σ² − 1). The squares of all n points amount to n · 18/35 independent
ones (neighbouring differences are correlated); shared over the parameters of the profile, ν = (18/35) n/3 of them tell
the variance at a typical point.
"""

from dataclasses import dataclass

import numpy as np

from fits.engine.basis import Interval
from fits.engine.data import FloatArray
from fits.engine.error_size import SECOND_DIFFERENCES_FACTOR, second_differences
from fits.engine.refusal import InputRefused

PARAMETERS = 3
_STEPS = 100
_TOLERANCE = 1e-10
# A step changes σ by no more than this factor's logarithm, so that scoring cannot run away.
_LARGEST_STEP = 1.0


@dataclass(frozen=True, eq=False)
class ErrorProfile:
    """standard_errors at the data, shape (n,), and ν."""

    standard_errors: FloatArray
    freedom: float


def error_profile(x: FloatArray, y: FloatArray, interval: Interval) -> ErrorProfile:
    """Estimate σ(x). Raises InputRefused for data without scatter."""
    differences = second_differences(x, y)
    squares = differences.residuals**2
    mean = float(squares.mean())
    if mean <= 1e-24 * float(np.max(np.abs(y))) ** 2 or mean == 0.0:
        raise InputRefused(
            "no-scatter", "y", "the data leave no scatter to estimate errors from", "Give the errors"
        )
    design = _quadratic(interval.fraction(differences.x))
    coefficients = np.array([np.log(mean), 0.0, 0.0])
    projector = np.linalg.pinv(design)
    for _ in range(_STEPS):
        step = projector @ (squares * np.exp(-design @ coefficients) - 1.0)
        step *= min(1.0, _LARGEST_STEP / max(float(np.abs(design @ step).max()), 1e-300))
        coefficients = coefficients + step
        if float(np.abs(step).max()) < _TOLERANCE:
            break
    at_data = _quadratic(interval.fraction(x)) @ coefficients
    return ErrorProfile(np.exp(at_data / 2.0), x.size / SECOND_DIFFERENCES_FACTOR / PARAMETERS)


def _quadratic(t: FloatArray) -> FloatArray:
    centred = 2.0 * t - 1.0
    return np.column_stack([np.ones_like(t), centred, centred**2])
