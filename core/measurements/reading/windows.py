"""Window matrices, from .npy or from text: the first row holds the grid of x, each further row one point's weights."""

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.limits import MAXIMUM_WINDOW_GRID, MAXIMUM_WINDOW_WEIGHTS, WINDOWS_TABLE
from core.measurements.reading.names import safe_name
from core.measurements.reading.npy import NPY_MAGIC, NpyMatrix, shape_in_words
from core.measurements.reading.table import read_table
from core.measurements.reading.text import refuse_oversize
from core.user_error import UserError
from fits.engine.refusal import InputRefused
from fits.engine.windows import Windows, validated_windows


def read_windows(content: bytes, file_name: str, points: int) -> NDArray[np.float64]:
    """The numbers of the file, shape (points + 1, grid), or a UserError that names the first place at fault."""
    file_name = safe_name(file_name)
    refuse_oversize(content, file_name)
    if content.startswith(NPY_MAGIC):
        given = NpyMatrix(content, file_name)
        _refuse_shape(given.shape, file_name, points)
        matrix, lines = given.values(), None
    else:
        table = read_table(content, file_name, limits=WINDOWS_TABLE, may_have_header=False)
        _refuse_shape(table.values.shape, file_name, points)
        matrix, lines = table.values, table.lines
    try:
        validated_windows(windows_of(matrix), points)
    except InputRefused as refusal:
        raise _placed(refusal, file_name, lines) from refusal
    return matrix


def windows_of(matrix: NDArray[np.float64]) -> Windows:
    """Grid and weights, as the engine takes them."""
    return Windows(grid=matrix[0], weights=matrix[1:])


def _placed(refusal: InputRefused, file_name: str, lines: NDArray[np.int64] | None) -> UserError:
    """The engine's refusal with the line and column that it stems from."""
    fault = UserError(refusal.code, refusal.reason, refusal.remedy, file_name)
    assert refusal.index is not None
    in_grid = refusal.field == "windows:grid"
    if lines is not None:
        fault.line = int(lines[0 if in_grid else refusal.index + 1])
    if in_grid:
        fault.column = refusal.index + 1
    return fault


def _refuse_shape(shape: tuple[int, ...], file_name: str, points: int) -> None:
    if len(shape) != 2 or shape[0] != points + 1 or shape[1] < 2:
        reason = f"has shape {shape_in_words(shape)} for {points} points"
        remedy = (
            f"Give a first row with the x of the grid and then {points} rows of weights, one for each point"
        )
        raise UserError("windows-shape", reason, remedy, file_name)
    if shape[1] > MAXIMUM_WINDOW_GRID or shape[0] * shape[1] > MAXIMUM_WINDOW_WEIGHTS:
        reason = (
            f"has shape {shape_in_words(shape)}; at most {MAXIMUM_WINDOW_GRID} columns and "
            f"{MAXIMUM_WINDOW_WEIGHTS} numbers are allowed"
        )
        raise UserError("windows-too-large", reason, "Give the windows on a coarser grid", file_name)
