"""A matrix of real numbers in a .npy file, whose header is believed only where the file bears it out."""

import io

import numpy as np
from numpy.typing import NDArray

from core.user_error import UserError

NPY_MAGIC = b"\x93NUMPY"
# That of an array of numbers takes about 120 characters.
MAXIMUM_NPY_HEADER = 1000
SAVE_AS_NPY = "Save it with numpy.save as a plain float64 array, or as text"


class NpyMatrix:
    """The header, read and checked; `values` builds the array, for a shape that has been accepted."""

    def __init__(self, content: bytes, file_name: str) -> None:
        self.shape, self._fortran_order, self._dtype, self._start = _header(content, file_name)
        self._content, self._file_name = content, file_name
        if self._dtype.hasobject:
            raise UserError("npy-pickle", "holds Python objects, not numbers", SAVE_AS_NPY, file_name)
        if self._dtype.kind not in "fiu" or self._dtype.itemsize > 8:
            reason = f"holds values of type {self._dtype.name}, not real numbers"
            raise UserError("npy-type", reason, SAVE_AS_NPY, file_name)

    def values(self) -> NDArray[np.float64]:
        """The numbers as float64, all finite."""
        expected = self._dtype.itemsize
        for length in self.shape:
            expected *= length
        found = len(self._content) - self._start
        if expected != found:
            reason = f"its header announces {expected} bytes of numbers and {found} follow"
            raise UserError(
                "npy-broken", reason, "Upload it again; it may have been cut off", self._file_name
            )
        numbers = np.frombuffer(self._content, dtype=self._dtype, offset=self._start)
        given = numbers.reshape(self.shape, order="F" if self._fortran_order else "C")
        matrix: NDArray[np.float64] = given.astype(np.float64, order="C")
        _refuse_not_finite(matrix, self._file_name)
        return matrix


def shape_in_words(shape: tuple[int, ...]) -> str:
    """3 × 4."""
    return " × ".join(str(length) for length in shape[:4]) or "nothing"


def _header(content: bytes, file_name: str) -> tuple[tuple[int, ...], bool, np.dtype, int]:
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
        if any(length < 0 for length in shape):
            raise ValueError("a negative length")
    # NumPy lets errors of several kinds through where a header is nonsense.
    except Exception as error:
        reason = "is no .npy file that can be read: its header is broken"
        raise UserError("npy-broken", reason, SAVE_AS_NPY, file_name) from error
    return shape, fortran_order, dtype, head.tell()


def _refuse_not_finite(matrix: NDArray[np.float64], file_name: str) -> None:
    for row, values in enumerate(matrix):
        wrong = np.flatnonzero(~np.isfinite(values))
        if wrong.size:
            column = int(wrong[0])
            code, kind = ("not-a-number", "not a number") if np.isnan(values[column]) else ("infinite",) * 2
            reason = f"row {row + 1} of the matrix holds a value that is {kind}"
            raise UserError(code, reason, "Give finite numbers", file_name, column=column + 1)
