"""All feature statements of one assessment, in parts that can be computed apart."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fits.engine.coordinates import OrthonormalFunctions
from fits.engine.data import FloatArray
from fits.engine.features.count import PeakCount, peak_count
from fits.engine.features.intervals import intervals_below
from fits.engine.features.narrow import refined_profile, top_of_fit
from fits.engine.features.peak import (
    HeightMap,
    Profile,
    height_map,
    highest,
    lowest_maximum,
    no_peak,
    peak_profile,
)
from fits.engine.features.points import compared_points
from fits.engine.features.programme import Look, no_look
from fits.engine.features.samples import samples
from fits.engine.features.space import (
    CurveSpace,
    Window,
    curve_space,
    interior_peaks,
    refuse_many_windows,
    window_between,
    windows_of_peaks,
)
from fits.engine.features.spacing import SpacingProfile, spacing_profile
from fits.engine.result import Result

# Standard errors by which a rise of the fit stands out of the noise, so that a window is opened for its peak. Whether
# the data demand that peak is for the ball to say.
STANDS_OUT = 2.0
MAP_COLUMNS, MAP_ROWS = 60, 40
# Beyond this multiple of the largest radius the map need not be exact.
_MAP_MARGIN = 1.15
SAMPLES, SAMPLES_SHOWN = 50_000, 400


@dataclass(frozen=True)
class Range:
    """From low to high."""

    low: float
    high: float


@dataclass(frozen=True, eq=False)
class PeakFeature:
    """What the ball says of one peak (or dip, sign = −1) in one window.

    location  one tuple of ranges for each level
    height    of the highest (lowest) point of the window, one range for each level
    no_peak   price of the cheapest curve without a peak in the window: inf where there is none, NaN where unsolved
    """

    window: Range
    sign: float
    profile: Profile
    location: tuple[tuple[Range, ...], ...]
    height: tuple[Range, ...]
    map: HeightMap | None
    no_peak: float


@dataclass(frozen=True, eq=False)
class SampleReach:
    """How far 50 000 curves drawn from the ball of a level reach, against the exact range of the height in a window.

    tops  x and height of the highest (lowest) point in the window of the first 400 of them, shape (400, 2)
    """

    level: float
    exact: Range
    sampled: Range
    tops: FloatArray

    @property
    def share(self) -> float:
        """Length of the sampled range over that of the exact one."""
        length = self.exact.high - self.exact.low
        return (self.sampled.high - self.sampled.low) / length if length > 0.0 else 1.0


@dataclass(frozen=True, eq=False)
class FeatureCase:
    """What every feature statement of one assessment is made with."""

    result: Result
    space: CurveSpace
    levels: tuple[float, ...]
    radii: tuple[float, ...]

    @property
    def largest_radius(self) -> float:
        """That of the highest level."""
        return max(self.radii)

    @property
    def least_rise(self) -> float:
        """The price of levelling a rise that is taken for more than a ripple of noise."""
        return STANDS_OUT * math.sqrt(self.result.fit.variance)


def feature_case(result: Result) -> FeatureCase:
    """Grid and calibrated radii of an assessment."""
    levels = tuple(radius.level for radius in result.ball.radii)
    radii = tuple(radius.calibrated for radius in result.ball.radii)
    return FeatureCase(result, curve_space(result.fit), levels, radii)


def windows_of(
    case: FeatureCase, given: Sequence[tuple[float, float]] = (), *, sign: float = 1.0
) -> tuple[Window, ...]:
    """The windows that are given, or those between the fit's neighbouring dips. Raises InputRefused for bad ones."""
    refuse_many_windows(len(given))
    if given:
        return tuple(window_between(case.space, low, high) for low, high in given)
    return windows_of_peaks(case.space, case.least_rise, sign=sign)


def find_peak(
    case: FeatureCase, window: Window, *, sign: float = 1.0, with_map: bool = True, look: Look = no_look
) -> PeakFeature:
    """Location, height, map and absence of the peak in one window."""
    space = case.space
    basis = case.result.fit.coordinates.basis
    profile = peak_profile(space, window, sign=sign, look=look)
    profile = refined_profile(profile, space, basis, window, radii=case.radii, sign=sign, look=look)
    location = tuple(
        tuple(Range(*interval) for interval in intervals_below(profile.x, profile.price, radius))
        for radius in case.radii
    )
    height = []
    for radius in case.radii:
        look()
        ends = lowest_maximum(space, window, radius, sign=sign), highest(space, window, radius, sign=sign)
        height.append(Range(min(ends), max(ends)))
    return PeakFeature(
        window=Range(float(space.grid[window.first]), float(space.grid[window.last])),
        sign=sign,
        profile=profile,
        location=location,
        height=tuple(height),
        map=_map(case, window, location[-1], height[-1], sign, look) if with_map else None,
        no_peak=no_peak(space, window, sign=sign, look=look).price,
    )


def count_peaks(case: FeatureCase, *, sign: float = 1.0) -> PeakCount:
    """Bounds on the price of at most 0, 1, 2, … peaks."""
    points = compared_points(case.result, case.space)
    return peak_count(case.space, points, radii=case.radii, sign=sign)


def find_spacing(case: FeatureCase, *, harmonic: bool = False, look: Look = no_look) -> SpacingProfile | None:
    """Even spacing of the fit's peaks that stand out of every ball; None for fewer than three."""
    space, basis = case.space, case.result.fit.coordinates.basis
    # A series has to have every peak that is asked of it: a rise of two standard errors, which may be noise, is not.
    windows = windows_of_peaks(space, case.largest_radius)
    # Precise data know their peaks to less than a step of the grid, and so must the series that is tried.
    tops = [_top(space, basis, window) for window in windows]
    return spacing_profile(
        space,
        basis,
        np.array(tops),
        radii=case.radii,
        exact_below=_MAP_MARGIN * case.largest_radius,
        harmonic=harmonic,
        look=look,
    )


def _top(space: CurveSpace, basis: OrthonormalFunctions, window: Window) -> float:
    top = top_of_fit(space, basis, window)
    if top is not None:
        return top
    return float(space.grid[window.first + int(np.argmax(space.fit[window.points]))])


def sample_reach(
    case: FeatureCase,
    window: Window,
    exact: Range,
    *,
    level: float,
    rng: np.random.Generator,
    sign: float = 1.0,
) -> SampleReach:
    """What a cloud of samples would have said of the height in a window. The same rng draws the same curves for every
    window, so that the tops of one can be set against those of another."""
    radius = case.radii[case.levels.index(level)]
    drawn = samples(case.result.fit.estimate, radius, count=SAMPLES, rng=rng)
    on_window = sign * case.space.values[window.points]
    shown = drawn[:SAMPLES_SHOWN] @ on_window.T
    tops = np.column_stack([case.space.grid[window.points][shown.argmax(axis=1)], sign * shown.max(axis=1)])
    # A thousand curves at a time: all of them on a wide window would take hundreds of megabytes.
    heights = sign * np.concatenate([(some @ on_window.T).max(axis=1) for some in np.array_split(drawn, 50)])
    return SampleReach(level, exact, Range(float(heights.min()), float(heights.max())), tops)


def peaks_of_curve(case: FeatureCase, values: FloatArray, *, sign: float = 1.0) -> FloatArray:
    """x of the interior peaks of a curve given on the grid."""
    return case.space.grid[interior_peaks(sign * values)]


def _map(
    case: FeatureCase, window: Window, location: tuple[Range, ...], height: Range, sign: float, look: Look
) -> HeightMap | None:
    """Over all that the highest level allows."""
    if not location or not np.isfinite([height.low, height.high]).all():
        return None
    basis = case.result.fit.coordinates.basis
    x = np.linspace(location[0].low, location[-1].high, MAP_COLUMNS)
    return height_map(
        case.space,
        window,
        x=x,
        slopes=basis.slopes_at(x),
        values=basis.at(x),
        heights=np.linspace(height.low, height.high, MAP_ROWS),
        exact_below=_MAP_MARGIN * case.largest_radius,
        sign=sign,
        look=look,
    )
