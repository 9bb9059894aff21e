"""Precise data know the place of a peak to less than a step of the grid: prices between its points.

The fit has its top between two points of the grid. A peak there costs nothing, while at the points themselves it may
cost more than any radius, so that the grid alone would find a peak that is demanded to be nowhere.
"""

from collections.abc import Sequence

import numpy as np
from scipy.optimize import brentq

from fits.engine.coordinates import OrthonormalFunctions
from fits.engine.features.peak import Profile
from fits.engine.features.programme import Look, Programme, no_look
from fits.engine.features.space import CurveSpace, Window

# Prices are found up to this multiple of the largest radius, at so many places on either side of the top.
_REACH, _PLACES = 1.5, 12


def top_of_fit(
    space: CurveSpace, basis: OrthonormalFunctions, window: Window, *, sign: float = 1.0
) -> float | None:
    """x of the fit's highest point of the window, between the points of the grid; None where that is an end."""
    highest = window.first + int(np.argmax(sign * space.fit[window.points]))
    if not window.first < highest < window.last:
        return None

    def slope(x: float) -> float:
        return sign * float((basis.slopes_at(np.array([x])) @ space.centre)[0])

    before, after = float(space.grid[highest - 1]), float(space.grid[highest + 1])
    if not slope(before) > 0.0 > slope(after):
        return None
    return float(brentq(slope, before, after, xtol=1e-12 * (after - before), rtol=1e-14))


def refined_profile(
    profile: Profile,
    space: CurveSpace,
    basis: OrthonormalFunctions,
    window: Window,
    *,
    radii: Sequence[float],
    sign: float = 1.0,
    look: Look = no_look,
) -> Profile:
    """The profile with places around the fit's top, where a radius allows less than a step of the grid there."""
    top = top_of_fit(space, basis, window, sign=sign)
    allowed = [radius for radius in radii if radius > 0.0]
    if top is None or not allowed:
        return profile
    after = int(np.searchsorted(space.grid, top, side="right"))
    step = float(space.grid[after] - space.grid[after - 1])
    # A level slope at a place costs |f'|/‖u'‖ at least, which grows in proportion to the way from the top.
    aside = top + 0.5 * step * np.array([-1.0, 1.0])
    slopes = basis.slopes_at(aside)
    dear = float((np.abs(slopes @ space.centre) / np.linalg.norm(slopes, axis=1)).min())
    if min(allowed) * 0.5 * step >= dear * step:
        return profile
    reach = _REACH * max(allowed) * 0.5 * step / dear
    offsets = reach * np.arange(1, _PLACES + 1) / _PLACES
    places = np.concatenate((top - offsets[::-1], [top], top + offsets))
    places = places[(places > profile.x[0]) & (places < profile.x[-1])]
    prices = []
    for place in places:
        look()
        prices.append(0.0 if place == top else _price(space, basis, window, float(place), sign))
    x = np.concatenate((profile.x, places))
    order = np.argsort(x, kind="stable")
    return Profile(x[order], np.concatenate((profile.price, prices))[order])


def _price(space: CurveSpace, basis: OrthonormalFunctions, window: Window, x: float, sign: float) -> float:
    """Of a peak at x: f'(x) = 0 and f(x) ≥ f on the window's grid."""
    place = np.array([x])
    slope, value = basis.slopes_at(place), basis.at(place)[0]
    below = sign * (space.values[window.points] - value)
    # A grid point at x itself would be a row of zeros.
    below = below[np.linalg.norm(below, axis=1) > 1e-9 * np.linalg.norm(value)]
    return Programme(slope, below).solve(-(slope @ space.centre), -(below @ space.centre)).price
