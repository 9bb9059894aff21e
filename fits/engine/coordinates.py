"""Orthonormal coordinates in which Z ~ N(β, I/n), whatever the errors and the spacing were."""

from dataclasses import dataclass, replace

import numpy as np
import scipy.linalg

from fits.engine.basis import Interval, raw_functions, raw_slopes
from fits.engine.data import Data, FloatArray
from fits.engine.design import BLOCK_ROWS, Design, StoredDesign, StreamedDesign, can_stream
from fits.engine.observation import Observation, interval_of, observation_of
from fits.engine.whitening import IndependentErrors, SharedErrors, Whitening

# A column whose part outside the span of those before it is smaller than this share of it adds nothing but
# rounding: half of the digits of float64.
DEPENDENT = 1.5e-8
# Above this many points the functions are computed in blocks whenever they are needed.
STREAMED_POINTS = 50_000
# R from the Gram matrix loses twice the digits of the condition number: with this one, it is good to 1e-8.
_MOST_CONDITION = 1e4


@dataclass(frozen=True, eq=False)
class OrthonormalFunctions:
    """The functions u_0 … u_{J−1}, ⟨u_j, u_k⟩ = δ_jk with ⟨f, g⟩ = f*ᵀ g*/n, at any x.

    triangular  shape (J, J): R of the thin QR of L⁻¹Ψ, diagonal positive
    kept        shape (J,): which raw functions are independent of those before them
    asked       the number of raw functions tried
    points      n
    """

    triangular: FloatArray
    kept: tuple[int, ...]
    asked: int
    interval: Interval
    points: int

    @property
    def functions(self) -> int:
        """J."""
        return len(self.kept)

    def at(self, x: FloatArray) -> FloatArray:
        """u_j(x) = sqrt(n) R⁻ᵀ ψ(x), shape (len(x), J)."""
        return self._orthonormalised(raw_functions(self.interval.fraction(x), self.asked))

    def slopes_at(self, x: FloatArray) -> FloatArray:
        """du_j/dt at x, shape (len(x), J)."""
        return self._orthonormalised(raw_slopes(self.interval.fraction(x), self.asked))

    def _orthonormalised(self, raw: FloatArray) -> FloatArray:
        kept = raw[:, self.kept]
        solved = scipy.linalg.solve_triangular(self.triangular, kept.T, trans="T", check_finite=False)
        return np.asarray(np.sqrt(self.points) * solved.T)

    def seen_by(self, observation: Observation, coordinates: FloatArray) -> FloatArray:
        """What the data's points see of the curve with these coordinates, shape (n,)."""
        weights = np.zeros(self.asked)
        raw = scipy.linalg.solve_triangular(self.triangular, coordinates, check_finite=False)
        weights[list(self.kept)] = np.sqrt(self.points) * raw
        found = np.empty(self.points)
        for start in range(0, self.points, BLOCK_ROWS):
            rows = slice(start, min(start + BLOCK_ROWS, self.points))
            found[rows] = observation.functions(self.interval, self.asked, rows) @ weights
        return found


@dataclass(frozen=True, eq=False)
class Coordinates:
    """Coordinates of whitened values in `basis`; design: Q, shape (n, J), u* = sqrt(n) Q."""

    basis: OrthonormalFunctions
    design: Design

    @property
    def functions(self) -> int:
        """J."""
        return self.basis.functions

    @property
    def points(self) -> int:
        """n."""
        return self.basis.points

    @property
    def interval(self) -> Interval:
        """The stretch of x that t = 0 … 1 runs over."""
        return self.basis.interval

    def of(self, whitened: FloatArray) -> FloatArray:
        """⟨f, u_j⟩ of whitened values, shape (n,) → (J,) or (n, k) → (J, k)."""
        return np.asarray(self.design.inner(whitened) / np.sqrt(self.points))

    def residuals(self, whitened: FloatArray, coordinates: FloatArray) -> FloatArray:
        """What the J functions do not hold of whitened values with these coordinates, shape (n,)."""
        return np.asarray(whitened - self.design.combine(np.sqrt(self.points) * coordinates))


def coordinates_of(data: Data, whitening: Whitening, *, functions: int) -> Coordinates:
    """Orthonormalise the basis, in order, under the errors of the data; dependent columns are dropped."""
    if data.points > STREAMED_POINTS and can_stream(whitening):
        streamed = _streamed(data, whitening, functions)
        if streamed is not None:
            return streamed
    interval = interval_of(data)
    raw = observation_of(data).functions(interval, functions, slice(None))
    whitened = whitening.apply(raw)
    kept = tuple(range(functions))
    orthonormal, triangular = _positive_qr(whitened)
    if _dependent(whitened, triangular).any():
        kept = _independent_columns(whitened)
        orthonormal, triangular = _positive_qr(whitened[:, kept])
    basis = OrthonormalFunctions(triangular, kept, functions, interval, data.points)
    return Coordinates(basis, StoredDesign(orthonormal))


def _streamed(data: Data, whitening: Whitening, functions: int) -> Coordinates | None:
    """By the Gram matrix; None where that is too ill-conditioned to be trusted."""
    assert isinstance(whitening, (IndependentErrors, SharedErrors))
    interval = interval_of(data)
    design = StreamedDesign(observation_of(data), interval, functions, whitening, np.eye(functions))
    try:
        triangular = np.asarray(scipy.linalg.cholesky(design.gram(), check_finite=False))
    except np.linalg.LinAlgError:
        return None
    if np.linalg.cond(triangular) > _MOST_CONDITION:
        return None
    basis = OrthonormalFunctions(triangular, tuple(range(functions)), functions, interval, data.points)
    return Coordinates(basis, replace(design, triangular=triangular))


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
