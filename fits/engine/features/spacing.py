"""Are the peaks evenly spaced? The price of "peaks at x1 + kΔ, k = 0 … K − 1" for each Δ, at the best x1; for a
harmonic series x1 = Δ."""

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
    exact_below: float,
    harmonic: bool = False,
    look: Look = no_look,
) -> SpacingProfile | None:
    """Over spacings around that of the fit's peaks, shape (K,), increasing; None for fewer than three peaks.

    Beyond `exact_below` a price is only a lower bound: that of the stationary points alone, which has a closed form.
    """
    search = _Search(space, basis, peaks.size, exact_below, look)
    count = peaks.size
    if count < FEWEST_PEAKS:
        return None
    mean = float(peaks[-1] - peaks[0]) / (count - 1)
    spacings = mean * np.linspace(1.0 - _SPACING_SPREAD, 1.0 + _SPACING_SPREAD, SPACINGS)
    if harmonic:
        firsts = spacings
        prices = np.array([search.price(first, first) for first in firsts])
        return SpacingProfile(spacings, prices, firsts)
    # For each spacing the series that lies best over the fit's peaks is where the search for x1 starts.
    centred = peaks.mean() - spacings * (count - 1) / 2.0
    prices, firsts = np.empty(SPACINGS), np.empty(SPACINGS)
    for place, spacing in enumerate(spacings):
        prices[place], firsts[place] = _best_first(search, float(centred[place]), float(spacing))
    return SpacingProfile(spacings, prices, firsts)


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
