"""Compilation of kernels, with one set of options so that the same seed gives the same bits."""

from collections.abc import Callable
from typing import TypeVar, cast

import numba

Kernel = TypeVar("Kernel", bound=Callable[..., object])


def compiled(kernel: Kernel) -> Kernel:
    """Compile to machine code, kept on disk. No fast-math: it would let the order of sums change."""
    return cast(Kernel, numba.njit(cache=True, nogil=True, error_model="numpy")(kernel))
