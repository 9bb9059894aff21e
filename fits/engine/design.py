"""The whitened functions at the data as a matrix with orthonormal columns: kept whole, or made anew in blocks."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Protocol

import numpy as np
import scipy.linalg

from fits.engine.basis import Interval
from fits.engine.data import FloatArray
from fits.engine.observation import Observation
from fits.engine.whitening import IndependentErrors, SharedErrors, Whitening

BLOCK_ROWS = 4096


class Design(Protocol):
    """Q, shape (n, J), columns orthonormal."""

    def inner(self, whitened: FloatArray) -> FloatArray:
        """Qᵀ w, for shape (n,) or (n, k)."""

    def combine(self, coefficients: FloatArray) -> FloatArray:
        """Q c, shape (n,)."""

    def leverage(self) -> FloatArray:
        """Row sums of squares of Q: the share of each point's error that the J functions take up."""


@dataclass(frozen=True, eq=False)
class StoredDesign:
    """Q itself."""

    orthonormal: FloatArray

    def inner(self, whitened: FloatArray) -> FloatArray:
        return np.asarray(self.orthonormal.T @ whitened)

    def combine(self, coefficients: FloatArray) -> FloatArray:
        return np.asarray(self.orthonormal @ coefficients)

    def leverage(self) -> FloatArray:
        return np.asarray(np.einsum("ij,ij->i", self.orthonormal, self.orthonormal))


@dataclass(frozen=True, eq=False)
class StreamedDesign:
    """Q = L⁻¹ Ψ R⁻¹ with Ψ computed block by block whenever it is asked for: a million points need no n × J matrix.

    With shared errors L⁻¹ = C D⁻¹, C symmetric; C acts on whole vectors, D on each row.
    """

    observation: Observation
    interval: Interval
    functions: int
    whitening: IndependentErrors | SharedErrors
    triangular: FloatArray

    def inner(self, whitened: FloatArray) -> FloatArray:
        vector = self._correct(whitened)
        total = np.zeros((self.functions, *whitened.shape[1:]))
        for rows, block in self._blocks():
            total += block.T @ vector[rows]
        solved = scipy.linalg.solve_triangular(self.triangular, total, trans="T", check_finite=False)
        return np.asarray(solved)

    def combine(self, coefficients: FloatArray) -> FloatArray:
        raw = scipy.linalg.solve_triangular(self.triangular, coefficients, check_finite=False)
        values = np.empty(self._errors().size)
        for rows, block in self._blocks():
            values[rows] = block @ raw
        return self._correct(values)

    def leverage(self) -> FloatArray:
        inverse = scipy.linalg.solve_triangular(self.triangular, np.eye(self.functions), check_finite=False)
        shared = self.whitening if isinstance(self.whitening, SharedErrors) else None
        lost = np.empty((0, self.functions))
        if shared is not None:
            lost = shared.lost[:, None] * (self._along(shared) @ inverse)
        found = np.empty(self._errors().size)
        for rows, block in self._blocks():
            orthonormal = block @ inverse
            if shared is not None:
                orthonormal -= shared.directions[rows] @ lost
            found[rows] = np.einsum("ij,ij->i", orthonormal, orthonormal)
        return found

    def gram(self) -> FloatArray:
        """(L⁻¹Ψ)ᵀ (L⁻¹Ψ), shape (J, J)."""
        total = np.zeros((self.functions, self.functions))
        shared = self.whitening if isinstance(self.whitening, SharedErrors) else None
        for _, block in self._blocks():
            total += block.T @ block
        if shared is not None:
            along = self._along(shared)
            squares = shared.strengths**2
            total -= along.T @ (along * (squares / (1.0 + squares))[:, None])
        return total

    def _along(self, shared: SharedErrors) -> FloatArray:
        """Uᵀ D⁻¹ Ψ, shape (m, J)."""
        total = np.zeros((shared.strengths.size, self.functions))
        for rows, block in self._blocks():
            total += shared.directions[rows].T @ block
        return total

    def _blocks(self) -> Iterator[tuple[slice, FloatArray]]:
        errors = self._errors()
        for start in range(0, errors.size, BLOCK_ROWS):
            rows = slice(start, min(start + BLOCK_ROWS, errors.size))
            block = self.observation.functions(self.interval, self.functions, rows)
            block /= errors[rows, None]
            yield rows, block

    def _errors(self) -> FloatArray:
        own = self.whitening.own if isinstance(self.whitening, SharedErrors) else self.whitening
        return own.standard_errors

    def _correct(self, values: FloatArray) -> FloatArray:
        return self.whitening.correct(values) if isinstance(self.whitening, SharedErrors) else values


def can_stream(whitening: Whitening) -> bool:
    """Whether the errors act on each row alone, but for shared ones."""
    own = whitening.own if isinstance(whitening, SharedErrors) else whitening
    return isinstance(own, IndependentErrors)
