"""Arrays as the bytes that the database keeps: one .npy each, never a pickle."""

import io
from typing import Any

import numpy as np
from numpy.typing import NDArray


def to_bytes(array: NDArray[Any]) -> bytes:
    """The array as a .npy file."""
    buffer = io.BytesIO()
    np.save(buffer, array, allow_pickle=False)
    return buffer.getvalue()


def from_bytes(stored: bytes | memoryview) -> NDArray[Any]:
    """The array of a .npy file that `to_bytes` wrote; for bytes of our own only."""
    array: NDArray[Any] = np.load(io.BytesIO(stored), allow_pickle=False)
    return array
