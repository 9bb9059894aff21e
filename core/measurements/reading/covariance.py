"""A covariance matrix read from .npy or from text."""

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.limits import COVARIANCE_TABLE, MAXIMUM_COVARIANCE_POINTS
from core.measurements.reading.names import safe_name
from core.measurements.reading.npy import NPY_MAGIC, NpyMatrix, shape_in_words
from core.measurements.reading.table import read_table
from core.measurements.reading.text import refuse_oversize
from core.user_error import UserError
from fits.engine.refusal import InputRefused

# Rounding may differ between a matrix and its mirror image by this share of the largest entry.
SYMMETRY_TOLERANCE = 1e-9
ROWS_AT_A_TIME = 500


def read_covariance(content: bytes, file_name: str, points: int) -> NDArray[np.float64]:
    """The symmetric n × n matrix in the file, or a UserError that names the first cell at fault.

    Whether it is positive definite is for `check_positive_definite` to say.
    """
    file_name = safe_name(file_name)
    if points > MAXIMUM_COVARIANCE_POINTS:
        reason = f"{points} points are more than the {MAXIMUM_COVARIANCE_POINTS} that a covariance may have"
        raise UserError("covariance-too-large", reason, "Thin the data or give an error column", file_name)
    refuse_oversize(content, file_name)
    if content.startswith(NPY_MAGIC):
        given = NpyMatrix(content, file_name)
        _refuse_shape(given.shape, file_name, points)
        matrix = given.values()
        _refuse_asymmetry(matrix, file_name, None)
        return matrix
    table = read_table(content, file_name, limits=COVARIANCE_TABLE, may_have_header=False)
    _refuse_shape(table.values.shape, file_name, points)
    _refuse_asymmetry(table.values, file_name, table.lines)
    return table.values


def check_positive_definite(matrix: NDArray[np.float64], file_name: str) -> None:
    """Refuse a symmetric matrix that is no covariance, quoting its smallest eigenvalue."""
    # SciPy is slow to load and most readings do without it.
    from fits.engine.whitening import cholesky

    try:
        cholesky(matrix)
    except InputRefused as refusal:
        raise UserError(refusal.code, refusal.reason, refusal.remedy, safe_name(file_name)) from refusal


def _refuse_shape(shape: tuple[int, ...], file_name: str, points: int) -> None:
    if shape != (points, points):
        reason = f"has shape {shape_in_words(shape)} for {points} points"
        raise UserError("covariance-shape", reason, f"Give {points} × {points} numbers", file_name)


def _refuse_asymmetry(matrix: NDArray[np.float64], file_name: str, lines: NDArray[np.int64] | None) -> None:
    """Compare with the mirror image some rows at a time, so that no second matrix is built."""
    largest = max(float(matrix.max()), -float(matrix.min()))
    worst, row, column = 0.0, 0, 0
    for start in range(0, len(matrix), ROWS_AT_A_TIME):
        stop = start + ROWS_AT_A_TIME
        with np.errstate(over="ignore"):
            difference = np.abs(matrix[start:stop] - matrix[:, start:stop].T)
        place = int(difference.argmax())
        if difference.flat[place] > worst:
            worst = float(difference.flat[place])
            row, column = start + place // len(matrix), place % len(matrix)
    if worst > SYMMETRY_TOLERANCE * largest:
        reason = (
            f"not symmetric: row {row + 1}, column {column + 1} holds {matrix[row, column]:.6g} and "
            f"its mirror image {matrix[column, row]:.6g}"
        )
        line = None if lines is None else int(lines[row])
        remedy = "Give a symmetric matrix"
        raise UserError("covariance-asymmetric", reason, remedy, file_name, line, column + 1)
