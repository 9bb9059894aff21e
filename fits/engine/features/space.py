"""The curves of the J functions on a grid: what feature statements are made of."""

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.refusal import InputRefused
from fits.engine.resolution import feature_width
from fits.engine.result import Fit

GRID_POINTS = 201
GRID_POINTS_PER_WIDTH = 5
MOST_WINDOWS = 50
FEWEST_WINDOW_POINTS = 3


@dataclass(frozen=True, eq=False)
class CurveSpace:
    """grid: shape (G,), increasing; values, slopes: u_j and its derivative along t there, shape (G, J); centre: β̂."""

    grid: FloatArray
    values: FloatArray
    slopes: FloatArray
    centre: FloatArray

    @property
    def fit(self) -> FloatArray:
        """f̂ on the grid."""
        return np.asarray(self.values @ self.centre)


@dataclass(frozen=True)
class Window:
    """A stretch of the grid, by its first and last index, in which one feature is sought."""

    first: int
    last: int

    @property
    def points(self) -> slice:
        """Its grid points."""
        return slice(self.first, self.last + 1)


def curve_space(fit: Fit) -> CurveSpace:
    """201 points or 5 for each resolution width, whichever is finer."""
    basis = fit.coordinates.basis
    widths = basis.interval.span / feature_width(basis.functions, basis.interval.span)
    grid = basis.interval.grid(max(GRID_POINTS, math.ceil(GRID_POINTS_PER_WIDTH * widths) + 1))
    return CurveSpace(grid, basis.at(grid), basis.slopes_at(grid), fit.estimate)


def window_between(space: CurveSpace, low: float, high: float) -> Window:
    """The grid points in [low, high]. Raises InputRefused for windows that are reversed, outside or too narrow."""
    return window_on(space.grid, low, high)


def window_on(grid: FloatArray, low: float, high: float) -> Window:
    """As window_between, for a caller who has the grid alone."""
    name = f"window {low:g}:{high:g}"
    if not low < high:
        raise InputRefused(
            "window-reversed", name, "its ends are reversed or equal", "Give the lower end first"
        )
    if low < grid[0] or high > grid[-1]:
        raise InputRefused(
            "window-outside",
            name,
            f"reaches outside the data, {grid[0]:.6g} to {grid[-1]:.6g}",
            "Keep it inside",
        )
    inside = np.flatnonzero((grid >= low) & (grid <= high))
    if inside.size < FEWEST_WINDOW_POINTS:
        reason = f"holds {inside.size} grid points, {FEWEST_WINDOW_POINTS} are needed"
        raise InputRefused("window-narrow", name, reason, "Widen it or raise the resolution")
    return Window(int(inside[0]), int(inside[-1]))


def refuse_many_windows(count: int) -> None:
    """Raise InputRefused for more than 50 windows."""
    if count > MOST_WINDOWS:
        reason = f"{count} windows are more than {MOST_WINDOWS}"
        raise InputRefused("too-many-windows", "windows", reason, "Ask for fewer at a time")


def windows_of_peaks(space: CurveSpace, least: float, *, sign: float = 1.0) -> tuple[Window, ...]:
    """For each peak of the fit that stands out, the stretch between the neighbouring dips (or the ends).

    A fit has ripples that are only noise. To level a rise from a dip to a peak costs (f(p) − f(d))/‖u(p) − u(d)‖, of
    which noise alone makes sqrt(v); the cheapest rise or fall is taken out, with both its ends, until all that are left
    cost more than `least`.
    """
    turns = standing_turns(space, least, sign=sign)
    curve = sign * space.fit
    return tuple(
        Window(before, after)
        for before, turn, after in zip(turns, turns[1:], turns[2:], strict=False)
        if curve[turn] > curve[before]
        and curve[turn] > curve[after]
        and after - before + 1 >= FEWEST_WINDOW_POINTS
    )


def standing_turns(space: CurveSpace, least: float, *, sign: float = 1.0) -> list[int]:
    """Both ends of the grid and, between them, the turning points of the fit that stand out."""
    curve = sign * space.fit
    inner = sorted([*interior_peaks(curve).tolist(), *interior_peaks(-curve).tolist()])
    turns = [0, *inner, space.grid.size - 1]
    while len(turns) > 2:
        prices = [_levelling_price(space, first, second) for first, second in pairwise(turns)]
        cheapest = int(np.argmin(prices))
        if prices[cheapest] > least:
            break
        # An end of the grid stays where it is: only its neighbour goes.
        gone = [place for place in (cheapest, cheapest + 1) if 0 < place < len(turns) - 1]
        turns = [turn for place, turn in enumerate(turns) if place not in gone]
    return turns


def _levelling_price(space: CurveSpace, first: int, second: int) -> float:
    """Of a rise or fall between two turns. An end of the grid is no turn, and curves are least known there: a fall
    towards it may be dearest to level part of the way."""
    if second == space.grid.size - 1:
        turn, others = first, np.arange(first + 1, second + 1)
    elif first == 0:
        turn, others = second, np.arange(second)
    else:
        turn, others = first, np.array([second])
    differences = space.values[turn] - space.values[others]
    lengths = np.linalg.norm(differences, axis=1)
    return float((np.abs(differences @ space.centre) / np.where(lengths > 0.0, lengths, 1.0)).max())


def interior_peaks(curve: FloatArray) -> "np.ndarray[tuple[int], np.dtype[np.intp]]":
    """Indices of the interior local maxima; a flat top counts once, at its middle."""
    change = np.sign(np.diff(curve))
    moving = np.flatnonzero(change)
    turns = np.flatnonzero((change[moving][:-1] > 0) & (change[moving][1:] < 0))
    return np.asarray([(moving[turn] + 1 + moving[turn + 1]) // 2 for turn in turns], dtype=np.intp)
