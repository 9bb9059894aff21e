"""Σ = L Lᵀ, and L⁻¹ applied to data, curves and basis functions.

Any square root of Σ will do for L: inner products, and with them everything that is computed, are the same.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
import scipy.linalg

from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.refusal import InputRefused


class Whitening(Protocol):
    """Turns values with covariance Σ into values with covariance I."""

    @property
    def standard_errors(self) -> FloatArray:
        """sqrt(diag Σ), shape (n,)."""

    def apply(self, values: FloatArray) -> FloatArray:
        """L⁻¹ values, for shape (n,) or (n, k)."""

    def apply_transposed(self, values: FloatArray) -> FloatArray:
        """L⁻ᵀ values, for shape (n,) or (n, k)."""

    def scaled(self, factor: float) -> "Whitening":
        """The whitening of factor² Σ."""

    def with_shared(self, columns: FloatArray) -> "Whitening":
        """The whitening of Σ + S Sᵀ, S of shape (n, m)."""


@dataclass(frozen=True, eq=False)
class IndependentErrors:
    """Σ = diag(σ²)."""

    standard_errors: FloatArray

    def apply(self, values: FloatArray) -> FloatArray:
        sigma = self.standard_errors
        return np.asarray(values / (sigma if values.ndim == 1 else sigma[:, None]))

    def apply_transposed(self, values: FloatArray) -> FloatArray:
        return self.apply(values)

    def scaled(self, factor: float) -> "IndependentErrors":
        return IndependentErrors(self.standard_errors * factor)

    def with_shared(self, columns: FloatArray) -> "Whitening":
        return with_shared_errors(self, columns)


@dataclass(frozen=True, eq=False)
class CorrelatedErrors:
    """Σ by its lower Cholesky factor."""

    lower: FloatArray

    @property
    def standard_errors(self) -> FloatArray:
        return np.asarray(np.sqrt(np.einsum("ij,ij->i", self.lower, self.lower)))

    def apply(self, values: FloatArray) -> FloatArray:
        solved = scipy.linalg.solve_triangular(self.lower, values, lower=True, check_finite=False)
        return np.asarray(solved, dtype=np.float64)

    def apply_transposed(self, values: FloatArray) -> FloatArray:
        solved = scipy.linalg.solve_triangular(self.lower, values, trans="T", lower=True, check_finite=False)
        return np.asarray(solved, dtype=np.float64)

    def scaled(self, factor: float) -> "CorrelatedErrors":
        return CorrelatedErrors(self.lower * factor)

    def with_shared(self, columns: FloatArray) -> "Whitening":
        return with_shared_errors(self, columns)


@dataclass(frozen=True, eq=False)
class SharedErrors:
    """Σ = L₀ (I + A Aᵀ) L₀ᵀ with A = L₀⁻¹ S = U diag(a) Vᵀ.

    The symmetric root of I + A Aᵀ changes nothing outside the span of U:
    (I + A Aᵀ)^(−1/2) = I − U diag(1 − (1 + a²)^(−1/2)) Uᵀ; so m columns cost m products and no n × n matrix.
    """

    own: Whitening
    directions: FloatArray  # U, shape (n, m)
    strengths: FloatArray  # a, shape (m,)
    columns: FloatArray  # S, shape (n, m)

    @property
    def standard_errors(self) -> FloatArray:
        shared = np.einsum("ij,ij->i", self.columns, self.columns)
        return np.asarray(np.sqrt(self.own.standard_errors**2 + shared))

    def apply(self, values: FloatArray) -> FloatArray:
        return self.correct(self.own.apply(values))

    def apply_transposed(self, values: FloatArray) -> FloatArray:
        return self.own.apply_transposed(self.correct(values))

    def correct(self, values: FloatArray) -> FloatArray:
        """(I + A Aᵀ)^(−1/2) values; the matrix is symmetric."""
        inner = self.directions.T @ values
        return np.asarray(values - self.directions @ (inner.T * self.lost).T)

    @property
    def lost(self) -> FloatArray:
        """1 − (1 + a²)^(−1/2), shape (m,)."""
        return np.asarray(-np.expm1(-0.5 * np.log1p(self.strengths**2)))

    def scaled(self, factor: float) -> "SharedErrors":
        return SharedErrors(self.own.scaled(factor), self.directions, self.strengths, self.columns * factor)

    def with_shared(self, columns: FloatArray) -> "Whitening":
        return with_shared_errors(self.own, np.hstack([self.columns, columns]))


def with_shared_errors(own: Whitening, columns: FloatArray) -> Whitening:
    """Add errors that are fully correlated across the points; columns of zeros add nothing."""
    columns = columns[:, columns.any(axis=0)]
    if columns.shape[1] == 0:
        return own
    directions, strengths, _ = np.linalg.svd(own.apply(columns), full_matrices=False)
    return SharedErrors(own, directions, strengths, columns)


def whitening_of(data: Data, *, profile: FloatArray | None = None) -> Whitening:
    """The whitening of validated data; where σ is unknown, that of Σ₀ = diag(r²) (σ = 1).

    profile  standard errors that were estimated elsewhere, shape (n,)
    Raises InputRefused, field "covariance", where Σ is not positive definite. The calibration is not in it: it
    multiplies a curve, which the data do not name.
    """
    own: Whitening
    if data.covariance is not None and data.source is not ErrorSource.COUNTS:
        own = CorrelatedErrors(cholesky(data.covariance))
    elif profile is not None:
        own = IndependentErrors(profile)
    elif data.errors is not None and data.source is not ErrorSource.COUNTS:
        own = IndependentErrors(data.errors)
    else:
        own = IndependentErrors(np.ones(data.points))
    if not data.shared:
        return own
    return own.with_shared(np.column_stack(list(data.shared.values())))


def cholesky(matrix: FloatArray) -> FloatArray:
    """The lower factor of a symmetric matrix, or a refusal that names its smallest eigenvalue."""
    try:
        lower = scipy.linalg.cholesky(matrix, lower=True, check_finite=False)
    except np.linalg.LinAlgError:
        smallest = float(scipy.linalg.eigvalsh(matrix, subset_by_index=[0, 0])[0])
        raise InputRefused(
            "covariance-not-positive-definite",
            "covariance",
            f"not positive definite: its smallest eigenvalue is {smallest:.3g}",
            "A covariance has only positive eigenvalues; check units, signs and the order of rows",
        ) from None
    return np.asarray(lower, dtype=np.float64)
