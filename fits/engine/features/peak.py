"""Where a peak may be, and how high: prices of its location, of location and height together, and of its absence.

A dip is a peak of the curve upside down: sign = −1.
"""

from dataclasses import dataclass

import numpy as np

from fits.engine.data import FloatArray
from fits.engine.features.programme import Look, Nearest, Outcome, Programme, no_look
from fits.engine.features.space import CurveSpace, Window

_HEIGHT_STEPS = 60


@dataclass(frozen=True, eq=False)
class Profile:
    """price of a peak at each x, shape (k,); inf where impossible, NaN where unsolved."""

    x: FloatArray
    price: FloatArray


@dataclass(frozen=True, eq=False)
class HeightMap:
    """price of a peak at x with height h, shape (heights, x).

    Beyond `exact_below` the value is a lower bound of the price: enough to know that it is too dear.
    """

    x: FloatArray
    height: FloatArray
    price: FloatArray
    exact_below: float


def peak_profile(space: CurveSpace, window: Window, *, sign: float = 1.0, look: Look = no_look) -> Profile:
    """The price of a peak at each inner grid point x0 of the window: f'(x0) = 0 and f(x0) ≥ f on the window's grid."""
    inner = range(window.first + 1, window.last)
    prices = []
    for index in inner:
        look()
        prices.append(_peak_programme(space, window, index, sign).price)
    return Profile(space.grid[window.first + 1 : window.last], np.array(prices))


def _peak_programme(space: CurveSpace, window: Window, index: int, sign: float) -> Nearest:
    below = sign * (_others(space.values, window, index) - space.values[index])
    slope = space.slopes[index : index + 1]
    programme = Programme(slope, below)
    return programme.solve(-(slope @ space.centre), -(below @ space.centre))


def _others(rows: FloatArray, window: Window, index: int) -> FloatArray:
    """The window's rows without the one at index, which cannot be above itself."""
    return np.concatenate((rows[window.first : index], rows[index + 1 : window.last + 1]))


def height_map(
    space: CurveSpace,
    window: Window,
    *,
    x: FloatArray,
    slopes: FloatArray,
    values: FloatArray,
    heights: FloatArray,
    exact_below: float,
    sign: float = 1.0,
    look: Look = no_look,
) -> HeightMap:
    """price(x0, h): a peak at x0 with f(x0) = h.

    x        where, shape (k,); values, slopes: u_j and its derivative there, shape (k, J)
    heights  shape (m,)
    Most of the map is too dear by the equalities alone, whose price has a closed form; only where that is below
    `exact_below` is the whole programme solved.
    """
    prices = np.empty((heights.size, x.size))
    on_window = space.values[window.points]
    for column in range(x.size):
        look()
        equal = np.vstack([slopes[column], values[column]])
        below = sign * (on_window - values[column])
        # A grid point at x0 itself would be a row of zeros.
        below = below[np.linalg.norm(below, axis=1) > 1e-9 * np.linalg.norm(values[column])]
        centre = equal @ space.centre
        targets = np.column_stack([np.full(heights.size, -centre[0]), heights - centre[1]])
        bounds = np.sqrt(
            np.maximum(0.0, np.einsum("ij,ij->i", targets, np.linalg.solve(equal @ equal.T, targets.T).T))
        )
        prices[:, column] = bounds
        programme = Programme(equal, below)
        limits = -(below @ space.centre)
        _fill_column(prices[:, column], programme, targets, limits, exact_below)
    return HeightMap(x, heights, prices, exact_below)


def _fill_column(
    prices: FloatArray, programme: Programme, targets: FloatArray, limits: FloatArray, exact_below: float
) -> None:
    """From the most promising height upwards and downwards, over bounds that stand in `prices`.

    The price is convex in the height: once it is too dear and rising, it stays so, and bounds everything beyond.
    """
    start = int(np.argmin(prices))
    if prices[start] > exact_below:
        return
    first = programme.solve(targets[start], limits).price
    prices[start] = first
    for rows in (range(start + 1, prices.size), range(start - 1, -1, -1)):
        before, too_dear = first, False
        for row in rows:
            if too_dear:
                prices[row] = max(prices[row], before)
            elif prices[row] <= exact_below:
                prices[row] = programme.solve(targets[row], limits).price
                too_dear = bool(prices[row] > exact_below and prices[row] >= before)
                before = float(prices[row])


def highest(space: CurveSpace, window: Window, radius: float, *, sign: float = 1.0) -> float:
    """The largest value that any curve in the ball takes in the window: max of f̂ + s ‖u‖."""
    reach = sign * space.fit[window.points] + radius * np.linalg.norm(space.values[window.points], axis=1)
    return sign * float(reach.max())


def lowest_maximum(space: CurveSpace, window: Window, radius: float, *, sign: float = 1.0) -> float:
    """The smallest maximum over the window of any curve in the ball: the least h with f ≤ h on the window affordable.

    The price of "f ≤ h on the window" falls as h rises and is 0 at the fit's own maximum; bisection finds where it
    passes the radius. NaN where a programme on the way is unsolved.
    """
    below = sign * space.values[window.points]
    fit = sign * space.fit[window.points]
    programme = Programme(np.empty((0, below.shape[1])), below)
    high = float(fit.max())
    if radius == 0.0:
        return sign * high
    # Below this the fit's own maximum point alone is too dear.
    low = high - radius * float(np.linalg.norm(below[int(fit.argmax())]))
    for _ in range(_HEIGHT_STEPS):
        middle = (low + high) / 2.0
        found = programme.solve(np.empty(0), middle - fit)
        if found.outcome is Outcome.UNSOLVED:
            return float("nan")
        if found.price <= radius:
            high = middle
        else:
            low = middle
        if high - low <= 1e-7 * max(abs(high), abs(low), 1e-300):
            break
    return sign * high


def no_peak(space: CurveSpace, window: Window, *, sign: float = 1.0, look: Look = no_look) -> Nearest:
    """The cheapest curve without a peak inside the window: falling up to some point and rising after it.

    Monotone curves are those that turn at an end. A fall followed by a rise has no peak either, and is often cheaper:
    to leave it out would make peaks look more demanded than they are.
    """
    steps = sign * np.diff(space.values[window.points], axis=0)
    drops = steps @ space.centre
    best = Nearest(Outcome.IMPOSSIBLE, np.inf, np.zeros(steps.shape[1]))
    for turn in _turns_by_promise(drops, steps):
        look()
        # Steps before the turn must not rise, steps after it must not fall.
        direction = np.where(np.arange(steps.shape[0]) < turn, 1.0, -1.0)
        if _least_price(direction * drops, steps) >= best.price:
            continue
        below = direction[:, None] * steps
        found = Programme(np.empty((0, steps.shape[1])), below).solve(np.empty(0), -(direction * drops))
        if found.outcome is Outcome.UNSOLVED:
            return found
        if found.price < best.price:
            best = found
    return best


def _turns_by_promise(drops: FloatArray, steps: FloatArray) -> list[int]:
    """All turning points, those with the smallest lower bound first, so that the rest need not be solved."""
    places = np.arange(drops.size)
    bounds = [
        _least_price(np.where(places < turn, 1.0, -1.0) * drops, steps) for turn in range(drops.size + 1)
    ]
    return [int(turn) for turn in np.argsort(bounds, kind="stable")]


def _least_price(wrong: FloatArray, steps: FloatArray) -> float:
    """A lower bound: the dearest single step that goes the wrong way."""
    lengths = np.linalg.norm(steps, axis=1)
    return float((np.maximum(wrong, 0.0) / np.where(lengths > 0.0, lengths, 1.0)).max(initial=0.0))
