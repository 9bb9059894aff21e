"""The one quadratic programme: the curve nearest to the fit among those that satisfy linear statements.

min ‖δ‖ with A δ = b and G δ ≤ h, δ = β − β̂. Solved by an interior-point method (piqp); every answer is checked, and one
that fails the check is reported as unsolved, never as impossible.
"""

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
import piqp

from fits.engine.data import FloatArray

_TOLERANCE = 1e-9
# An answer may break a constraint by this much of the constraint's own size.
_MOST_VIOLATION = 1e-6

# Called again and again during long work; what it raises ends the work (a cancelled job).
Look = Callable[[], None]


def no_look() -> None:
    """For callers who need no word in between."""


class Outcome(StrEnum):
    """How a programme ended."""

    SOLVED = "solved"
    IMPOSSIBLE = "impossible"  # no curve of the J functions satisfies the statement
    UNSOLVED = "unsolved"  # the solver gave no answer that passes the check


@dataclass(frozen=True, eq=False)
class Nearest:
    """price: ‖δ‖, inf where impossible, NaN where unsolved; difference: δ, shape (J,)."""

    outcome: Outcome
    price: float
    difference: FloatArray


class Programme:
    """A family of programmes with the same left-hand sides, solved one after another for other right-hand sides."""

    def __init__(self, equal: FloatArray, below: FloatArray) -> None:
        """equal: A, shape (e, J); below: G, shape (g, J). Rows are scaled to length 1 for the solver's sake."""
        self._equal_scale, self._equal = _scaled(equal)
        self._below_scale, self._below = _scaled(below)
        self._solver: piqp.DenseSolver | None = None

    def solve(self, equals: FloatArray, limits: FloatArray) -> Nearest:
        """min ‖δ‖ with A δ = equals and G δ ≤ limits."""
        b, h = equals / self._equal_scale, limits / self._below_scale
        functions = self._below.shape[1]
        nothing = np.zeros(functions)
        if (h >= 0.0).all() and not b.any():
            return Nearest(Outcome.SOLVED, 0.0, nothing)
        # In units of the largest right-hand side, so that the solver's tolerances mean the same for every curve.
        unit = max(float(np.abs(b).max(initial=0.0)), float(np.maximum(-h, 0.0).max(initial=0.0)))
        status, x = self._run(b / unit, h / unit)
        difference = unit * x
        price = float(np.linalg.norm(difference))
        if status == piqp.PIQP_PRIMAL_INFEASIBLE:
            return Nearest(Outcome.IMPOSSIBLE, np.inf, nothing)
        slack = _MOST_VIOLATION * max(unit, price)
        broken = float(np.abs(self._equal @ difference - b).max(initial=0.0))
        broken = max(broken, float((self._below @ difference - h).max(initial=0.0)))
        if status != piqp.PIQP_SOLVED or not broken <= slack:
            return Nearest(Outcome.UNSOLVED, np.nan, nothing)
        return Nearest(Outcome.SOLVED, price, difference)

    def _run(self, b: FloatArray, h: FloatArray) -> tuple[object, FloatArray]:
        if self._solver is None:
            self._solver = self._set_up(b, h)
        else:
            self._solver.update(b=b if b.size else None, h_u=h if h.size else None)
        status = self._solver.solve()
        return status, np.array(self._solver.result.x)

    def _set_up(self, b: FloatArray, h: FloatArray) -> piqp.DenseSolver:
        solver = piqp.DenseSolver()
        solver.settings.eps_abs = solver.settings.eps_rel = _TOLERANCE
        solver.settings.eps_duality_gap_abs = solver.settings.eps_duality_gap_rel = _TOLERANCE
        functions = self._below.shape[1]
        solver.setup(
            np.eye(functions, order="F"),
            np.zeros(functions),
            self._equal if b.size else None,
            b if b.size else None,
            self._below if h.size else None,
            np.full(h.size, -1e30) if h.size else None,
            h if h.size else None,
            None,
            None,
        )
        return solver


def _scaled(rows: FloatArray) -> tuple[FloatArray, FloatArray]:
    lengths = np.linalg.norm(rows, axis=1)
    lengths = np.where(lengths > 0.0, lengths, 1.0)
    return lengths, np.asfortranarray(rows / lengths[:, None])
