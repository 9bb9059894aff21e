"""Orthonormal coordinates in which Z ~ N(β, I/n), whatever the errors and the spacing were."""

from dataclasses import dataclass

import numpy as np
import scipy.linalg

from fits.engine.basis import Interval, averaged_functions, interval_of, raw_functions
from fits.engine.data import Data, FloatArray
from fits.engine.whitening import Whitening

# A column whose part outside the span of those before it is smaller than this share of it adds nothing but
# rounding: half of the digits of float64.
DEPENDENT = 1.5e-8


@dataclass(frozen=True, eq=False)
class Coordinates:
    """The functions u_0 … u_{J−1}, ⟨u_j, u_k⟩ = δ_jk with ⟨f, g⟩ = f*ᵀ g*/n.

    orthonormal  shape (n, J): Q of the thin QR of L⁻¹Ψ; u* = sqrt(n) Q
    triangular   shape (J, J): R, diagonal positive
    kept         shape (J,): which raw functions are independent of those before them
    asked        the number of raw functions tried
    """

    orthonormal: FloatArray
    triangular: FloatArray
    kept: tuple[int, ...]
    asked: int
    interval: Interval

    @property
    def points(self) -> int:
        """n."""
        return int(self.orthonormal.shape[0])

    @property
    def functions(self) -> int:
        """J."""
        return len(self.kept)

    def of(self, whitened: FloatArray) -> FloatArray:
        """⟨f, u_j⟩ of whitened values, shape (n,) → (J,) or (n, k) → (J, k)."""
        return np.asarray(self.orthonormal.T @ whitened / np.sqrt(self.points))

    def remainder(self, whitened: FloatArray) -> float:
        """n (‖f*‖²/n − ‖⟨f, u⟩‖²): the squared length of what the J functions do not hold."""
        # Subtracting the projection before squaring keeps the digits that a difference of squares would lose.
        rest = whitened - self.orthonormal @ (self.orthonormal.T @ whitened)
        return float(rest @ rest)

    def functions_at(self, x: FloatArray) -> FloatArray:
        """u_j(x) = sqrt(n) R⁻ᵀ ψ(x), shape (len(x), J)."""
        raw = raw_functions(self.interval.fraction(x), self.asked)[:, self.kept]
        solved = scipy.linalg.solve_triangular(self.triangular, raw.T, trans="T", check_finite=False)
        return np.asarray(np.sqrt(self.points) * solved.T)


def coordinates_of(data: Data, whitening: Whitening, *, functions: int) -> Coordinates:
    """Orthonormalise the basis, in order, under the errors of the data; dependent columns are dropped."""
    interval = interval_of(data)
    if data.low is not None and data.high is not None:
        raw = averaged_functions(interval, data.low, data.high, functions)
    else:
        raw = raw_functions(interval.fraction(data.x), functions)
    whitened = whitening.apply(raw)
    kept = tuple(range(functions))
    orthonormal, triangular = _positive_qr(whitened)
    if _dependent(whitened, triangular).any():
        kept = _independent_columns(whitened)
        orthonormal, triangular = _positive_qr(whitened[:, kept])
    return Coordinates(orthonormal, triangular, kept, functions, interval)


def _positive_qr(columns: FloatArray) -> tuple[FloatArray, FloatArray]:
    q, r = scipy.linalg.qr(columns, mode="economic", check_finite=False)
    orthonormal, triangular = np.asarray(q, dtype=np.float64), np.asarray(r, dtype=np.float64)
    signs = np.where(np.diag(triangular) < 0.0, -1.0, 1.0)
    return orthonormal * signs, triangular * signs[:, None]


def _dependent(columns: FloatArray, triangular: FloatArray) -> FloatArray:
    return np.asarray(np.abs(np.diag(triangular)) <= DEPENDENT * np.linalg.norm(columns, axis=0))


def _independent_columns(columns: FloatArray) -> tuple[int, ...]:
    """Columns in order, leaving out each that depends on those kept before it.

    One QR does not tell: behind a dependent column its Q holds an arbitrary direction. So each column is
    projected, twice for the digits, on those that were kept.
    """
    basis = np.empty((columns.shape[0], min(columns.shape)))
    kept: list[int] = []
    for j in range(columns.shape[1]):
        if len(kept) == columns.shape[0]:
            break
        rest = columns[:, j].copy()
        length = float(np.linalg.norm(rest))
        for _ in range(2):
            known = basis[:, : len(kept)]
            rest -= known @ (known.T @ rest)
        remaining = float(np.linalg.norm(rest))
        if remaining > DEPENDENT * length:
            basis[:, len(kept)] = rest / remaining
            kept.append(j)
    return tuple(kept)
