"""The rules that a covariance matrix must keep before it is factorised."""

import numpy as np
from numpy.typing import NDArray

from fits.engine.refusal import InputRefused

MAXIMUM_COVARIANCE_POINTS = 5000
# Rounding may differ between a matrix and its mirror image by this share of the largest entry.
SYMMETRY_TOLERANCE = 1e-9
_ROWS_AT_A_TIME = 256


def validated_covariance(covariance: NDArray[np.float64], n: int) -> NDArray[np.float64]:
    """A read-only symmetric copy, shape (n, n); positive definiteness shows when it is factorised."""
    matrix = np.asarray(covariance, dtype=np.float64)
    if matrix.shape != (n, n):
        reason = f"has shape {' × '.join(map(str, matrix.shape))} for {n} points"
        raise InputRefused("covariance-shape", "covariance", reason, f"Give {n} × {n} numbers")
    if n > MAXIMUM_COVARIANCE_POINTS:
        reason = f"{n} points are more than the {MAXIMUM_COVARIANCE_POINTS} that a covariance may have"
        raise InputRefused(
            "covariance-too-large", "covariance", reason, "Thin the data or give an error column"
        )
    if not np.isfinite(matrix).all():
        index = int(np.flatnonzero(~np.isfinite(matrix).all(axis=1))[0])
        raise InputRefused("not-finite", "covariance", f"row {index + 1} holds a value that is not finite")
    matrix = matrix.copy()
    asymmetry = _symmetrise(matrix)
    if asymmetry > SYMMETRY_TOLERANCE * max(float(matrix.max()), -float(matrix.min())):
        reason = f"not symmetric: entries differ from their mirror image by up to {asymmetry:.3g}"
        raise InputRefused("covariance-asymmetric", "covariance", reason, "Give a symmetric matrix")
    matrix.flags.writeable = False
    return matrix


def _symmetrise(matrix: NDArray[np.float64]) -> float:
    """Replace the matrix by its symmetric part; returns the largest asymmetry that it had.

    A block of rows at a time, so that a large matrix is not held several times over.
    """
    largest = 0.0
    for start in range(0, len(matrix), _ROWS_AT_A_TIME):
        rows, columns = (
            matrix[start : start + _ROWS_AT_A_TIME, start:],
            matrix[start:, start : start + _ROWS_AT_A_TIME],
        )
        mirrored = columns.T.copy()
        largest = max(largest, float(np.abs(rows - mirrored).max()))
        mean = (rows + mirrored) / 2.0
        rows[:] = mean
        columns[:] = mean.T
    return largest
