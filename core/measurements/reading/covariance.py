"""A covariance matrix read from .npy or from text."""

import io

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.limits import COVARIANCE_TABLE, MAXIMUM_COVARIANCE_POINTS
from core.measurements.reading.names import safe_name
from core.measurements.reading.table import read_table
from core.measurements.reading.text import refuse_oversize
from core.user_error import UserError
from fits.engine.refusal import InputRefused

NPY_MAGIC = b"\x93NUMPY"
# That of an array of numbers takes about 120 characters.
MAXIMUM_NPY_HEADER = 1000
# Rounding may differ between a matrix and its mirror image by this share of the largest entry.
SYMMETRY_TOLERANCE = 1e-9
ROWS_AT_A_TIME = 500
SAVE_AS_NPY = "Save it with numpy.save as a plain float64 array, or as text"


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
        matrix = _from_npy(content, file_name, points)
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


def _from_npy(content: bytes, file_name: str, points: int) -> NDArray[np.float64]:
    """The matrix of a .npy file, whose header is believed only where the file bears it out."""
    shape, fortran_order, dtype, start = _npy_header(content, file_name)
    if dtype.hasobject:
        raise UserError("npy-pickle", "holds Python objects, not numbers", SAVE_AS_NPY, file_name)
    if dtype.kind not in "fiu" or dtype.itemsize > 8:
        reason = f"holds values of type {dtype.name}, not real numbers"
        raise UserError("npy-type", reason, SAVE_AS_NPY, file_name)
    _refuse_shape(shape, file_name, points)
    expected, found = points * points * dtype.itemsize, len(content) - start
    if expected != found:
        reason = f"its header announces {expected} bytes of numbers and {found} follow"
        raise UserError("npy-broken", reason, "Upload it again; it may have been cut off", file_name)
    numbers = np.frombuffer(content, dtype=dtype, offset=start)
    matrix = numbers.reshape(shape, order="F" if fortran_order else "C").astype(np.float64, order="C")
    _refuse_not_finite(matrix, file_name)
    return matrix


def _npy_header(content: bytes, file_name: str) -> tuple[tuple[int, ...], bool, np.dtype, int]:
    """Shape, whether in Fortran order, type, and where the numbers start."""
    head = io.BytesIO(content[: MAXIMUM_NPY_HEADER + 12])
    try:
        version = np.lib.format.read_magic(head)
        if version == (1, 0):
            read_header = np.lib.format.read_array_header_1_0
        elif version == (2, 0):
            read_header = np.lib.format.read_array_header_2_0
        else:
            raise ValueError(f"version {version}")
        shape, fortran_order, dtype = read_header(head, max_header_size=MAXIMUM_NPY_HEADER)
    # NumPy lets errors of several kinds through where a header is nonsense.
    except Exception as error:
        reason = "is no .npy file that can be read: its header is broken"
        raise UserError("npy-broken", reason, SAVE_AS_NPY, file_name) from error
    return shape, fortran_order, dtype, head.tell()


def _refuse_shape(shape: tuple[int, ...], file_name: str, points: int) -> None:
    if shape != (points, points):
        size = " × ".join(str(length) for length in shape[:4]) or "nothing"
        reason = f"has shape {size} for {points} points"
        raise UserError("covariance-shape", reason, f"Give {points} × {points} numbers", file_name)


def _refuse_not_finite(matrix: NDArray[np.float64], file_name: str) -> None:
    for row, values in enumerate(matrix):
        wrong = np.flatnonzero(~np.isfinite(values))
        if wrong.size:
            column = int(wrong[0])
            code, kind = ("not-a-number", "not a number") if np.isnan(values[column]) else ("infinite",) * 2
            reason = f"row {row + 1} of the matrix holds a value that is {kind}"
            raise UserError(code, reason, "Give finite numbers", file_name, column=column + 1)


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
