"""Are the peaks evenly spaced? The price of "peaks at x1 + kΔ, k = 0 … K − 1" for each Δ, at the best x1; for a
harmonic series x1 = Δ."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fits.engine.coordinates import OrthonormalFunctions
from fits.engine.data import FloatArray
from fits.engine.features.programme import Look, Programme, no_look
from fits.engine.features.space import CurveSpace

SPACINGS = 61
STARTS = 13
# Around the fit's own mean spacing and first peak.
_SPACING_SPREAD = 0.3
_START_SPREAD = 0.35
_REFINEMENTS = 6
# Finer spacings on either side of the fit's own.
_FINER = 12
FEWEST_PEAKS = 3


@dataclass(frozen=True, eq=False)
class SpacingProfile:
    """price: least price over x1 of evenly spaced peaks, for each spacing; first: that x1."""

    spacing: FloatArray
    price: FloatArray
    first: FloatArray


def spacing_profile(
    space: CurveSpace,
    basis: OrthonormalFunctions,
    peaks: FloatArray,
    *,
    radii: Sequence[float],
    exact_below: float,
    harmonic: bool = False,
    look: Look = no_look,
) -> SpacingProfile | None:
    """Over spacings around that of the fit's peaks, shape (K,), increasing; None for fewer than three peaks.

    Precise data leave less than a step of the spacings: where the smallest of the radii (above 0) does, finer ones are
    looked at around the fit's own. Beyond `exact_below` a price is only a lower bound: that of the stationary points
    alone, which has a closed form.
    """
    count = peaks.size
    if count < FEWEST_PEAKS:
        return None
    search = _Search(space, basis, count, exact_below, look)
    own = _own_spacing(peaks, harmonic=harmonic)
    coarse = own * np.linspace(1.0 - _SPACING_SPREAD, 1.0 + _SPACING_SPREAD, SPACINGS)
    found = _prices(search, peaks, coarse, harmonic=harmonic)
    finer = _finer(found, [radius for radius in radii if radius > 0.0])
    if not finer.size:
        return found
    more = _prices(search, peaks, finer, harmonic=harmonic)
    spacings = np.concatenate((found.spacing, more.spacing))
    order = np.argsort(spacings, kind="stable")
    return SpacingProfile(
        spacings[order],
        np.concatenate((found.price, more.price))[order],
        np.concatenate((found.first, more.first))[order],
    )


def _own_spacing(peaks: FloatArray, *, harmonic: bool) -> float:
    """The spacing whose series lies nearest to the fit's peaks, by least squares."""
    numbers = np.arange(1.0, peaks.size + 1.0)
    even = numbers - numbers.mean()
    multiple = float(numbers @ peaks / (numbers @ numbers))
    # Peaks at negative x are no whole multiples of any spacing.
    return multiple if harmonic and multiple > 0.0 else float(even @ peaks / (even @ even))


def _prices(search: "_Search", peaks: FloatArray, spacings: FloatArray, *, harmonic: bool) -> SpacingProfile:
    if harmonic:
        prices = np.array([search.price(float(spacing), float(spacing)) for spacing in spacings])
        return SpacingProfile(spacings, prices, spacings)
    # For each spacing the series that lies best over the fit's peaks is where the search for x1 starts.
    centred = peaks.mean() - spacings * (peaks.size - 1) / 2.0
    pairs = zip(centred, spacings, strict=True)
    best = np.array([_best_first(search, float(first), float(spacing)) for first, spacing in pairs])
    return SpacingProfile(spacings, best[:, 0], best[:, 1])


def _finer(found: SpacingProfile, radii: Sequence[float]) -> FloatArray:
    """Spacings on either side of the fit's own, as far as the largest radius reaches and half as far again."""
    own = SPACINGS // 2
    step = float(found.spacing[own + 1] - found.spacing[own])
    beside = float(np.min(found.price[[own - 1, own + 1]]))
    if not radii or not np.isfinite(beside) or beside <= min(radii):
        return np.empty(0)
    # The price grows about in proportion to the way from the fit's own spacing.
    reach = min(1.0, 1.5 * max(radii) / beside) * step
    offsets = reach * np.arange(1, _FINER + 1) / (_FINER + 1)
    return np.asarray(found.spacing[own] + np.concatenate((-offsets[::-1], offsets)))


def _best_first(search: "_Search", centre: float, spacing: float) -> tuple[float, float]:
    """Coarse starts, then ever smaller steps around the best."""
    step = 2.0 * _START_SPREAD * spacing / (STARTS - 1)
    starts = centre + step * (np.arange(STARTS) - STARTS // 2)
    prices = [search.price(float(first), spacing) for first in starts]
    if np.isnan(prices).any():
        return float("nan"), centre
    best = int(np.argmin(prices))
    price, first = prices[best], float(starts[best])
    for _ in range(_REFINEMENTS):
        step /= 2.0
        for candidate in (first - step, first + step):
            found = search.price(candidate, spacing)
            if found < price:
                price, first = found, candidate
    return price, first


@dataclass(frozen=True, eq=False)
class _Search:
    """The price of a series of `count` peaks."""

    space: CurveSpace
    basis: OrthonormalFunctions
    count: int
    exact_below: float
    look: Look

    def price(self, first: float, spacing: float) -> float:
        """Each x_k is a stationary point and no lower than the grid within half a spacing of it."""
        self.look()
        space = self.space
        places: FloatArray = first + spacing * np.arange(self.count, dtype=np.float64)
        if places[0] <= space.grid[0] or places[-1] >= space.grid[-1]:
            return float("inf")
        equal = self.basis.slopes_at(places)
        targets = -(equal @ space.centre)
        bound = float(np.sqrt(np.abs(targets @ np.linalg.solve(equal @ equal.T, targets))))
        if bound > self.exact_below:
            return bound
        tops = self.basis.at(places)
        rows = []
        for place, top in zip(places, tops, strict=True):
            differences = space.values[np.abs(space.grid - place) <= spacing / 2.0] - top
            # A grid point at x_k itself would be a row of zeros.
            rows.append(differences[np.linalg.norm(differences, axis=1) > 1e-9 * np.linalg.norm(top)])
        below = np.concatenate(rows)
        return Programme(equal, below).solve(targets, -(below @ space.centre)).price
