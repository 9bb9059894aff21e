"""One part of a search for features, computed from rows.

Each part computes fit and ball again instead of reading them from a store. That takes milliseconds (0.6 s for a million
points) where a part takes seconds, whereas what a part needs, the whitened data, the functions and the draws, may be
hundreds of megabytes; and the same rows and seed give the same bits, so that all parts speak of one ball.
"""

from collections.abc import Callable
from typing import Any

import numpy as np
from threadpoolctl import threadpool_limits

from core.theories.stored_curve import table_of
from core.user_error import UserError
from fits.assessments.context import curve_names
from fits.assessments.features_document import (
    drawn_count_document,
    drawn_peak_document,
    drawn_spacing_document,
)
from fits.assessments.models import Assessment, FeaturePart
from fits.assessments.pipeline import fit_and_ball, user_error
from fits.engine import VERSION
from fits.engine.data import FloatArray
from fits.engine.features.find import (
    FeatureCase,
    count_peaks,
    feature_case,
    find_peak,
    find_spacing,
    sample_reach,
    windows_of,
)
from fits.engine.features.programme import Look
from fits.engine.features.space import Window, interior_peaks, window_between
from fits.engine.interpolation import curve_on_grid
from fits.engine.refusal import InputRefused

Kind = FeaturePart.Kind

# Beyond so many functions one window takes minutes.
MOST_FUNCTIONS = 200
SAMPLES_LEVEL = 0.95
# A branch of the assessment's seed. All windows share it: the samples of one are the same curves as those of another.
_SAMPLES_BRANCH = 1
# A theory's peaks are placed between the points of the grid, as location intervals may be narrower than its steps.
_FINER = 10


@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def compute(part: FeaturePart, look: Look) -> Any:
    """The part's result as JSON. Raises UserError for what its asker can mend."""
    assessment = part.search.assessment
    refuse_other_engine(assessment)
    try:
        return part_result(feature_case_of(assessment), part, look)
    except InputRefused as refusal:
        raise user_error(refusal) from refusal


def refuse_other_engine(assessment: Assessment) -> None:
    """Features must be those of the fit that stands on the page. Raises UserError where this engine makes another."""
    if assessment.engine_version != VERSION:
        reason = f"engine {assessment.engine_version} made this assessment, and this is engine {VERSION}"
        raise UserError("other-engine", reason, "Assess the release again")


@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def feature_case_of(assessment: Assessment) -> FeatureCase:
    """What all feature statements of an assessment are made with."""
    case = feature_case(fit_and_ball(assessment))
    functions = case.space.centre.size
    if functions > MOST_FUNCTIONS:
        reason = f"features are found with up to {MOST_FUNCTIONS} functions, and these are {functions}"
        raise UserError("too-many-functions", reason, "Assess the release at a lower resolution")
    return case


@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def part_result(case: FeatureCase, part: FeaturePart, look: Look) -> Any:
    """As `compute`, for a caller who has the case already."""
    look()
    return _COMPUTED_BY[Kind(part.kind)](case, part, look)


def _plan(case: FeatureCase, part: FeaturePart, look: Look) -> dict[str, Any]:
    """The windows of all peaks and dips, and where each theory has its own."""
    given = [(low, high) for low, high in part.search.windows]
    peaks, dips = windows_of(case, given), windows_of(case, (), sign=-1.0)
    if given:
        # Most windows are drawn around a peak: a dip is sought only where the fit is lowest inside.
        dips = tuple(window for window in peaks if _is_lowest_inside(case, window))
    return {
        "windows": {Kind.PEAK.value: _ends(case, peaks), Kind.DIP.value: _ends(case, dips)},
        "theories": _theories(case, part.search.assessment),
    }


def _is_lowest_inside(case: FeatureCase, window: Window) -> bool:
    lowest = window.first + int(np.argmin(case.space.fit[window.points]))
    return window.first < lowest < window.last


def _ends(case: FeatureCase, windows: tuple[Window, ...]) -> list[list[float]]:
    grid = case.space.grid
    return [[float(grid[window.first]), float(grid[window.last])] for window in windows]


def _theories(case: FeatureCase, assessment: Assessment) -> list[dict[str, Any]]:
    data = case.result.data
    interval = case.result.fit.coordinates.interval
    grid = interval.grid(_FINER * (case.space.grid.size - 1) + 1)
    names = curve_names(assessment)
    found = []
    for curve in assessment.curves.order_by("pk"):
        values = curve_on_grid(table_of(curve), grid, data.axis)
        found.append({"name": names[curve.pk], "peaks": _tops(grid, values), "dips": _tops(grid, -values)})
    return found


def _tops(grid: FloatArray, values: FloatArray) -> list[float]:
    reached = np.isfinite(values)
    return [float(x) for x in grid[reached][interior_peaks(values[reached])]]


def _peak(case: FeatureCase, part: FeaturePart, look: Look) -> dict[str, Any]:
    sign = -1.0 if part.kind == Kind.DIP else 1.0
    assert part.window is not None
    window = window_between(case.space, *part.window)
    peak = find_peak(case, window, sign=sign, look=look)
    look()
    nearest = int(np.argmin(np.abs(np.array(case.levels) - SAMPLES_LEVEL)))
    rng = np.random.default_rng([part.search.assessment.seed, _SAMPLES_BRANCH])
    reach = sample_reach(case, window, peak.height[nearest], level=case.levels[nearest], rng=rng, sign=sign)
    return drawn_peak_document(case, peak, reach)


def _count(case: FeatureCase, part: FeaturePart, look: Look) -> dict[str, Any]:
    sign = -1.0 if part.kind == Kind.DIP_COUNT else 1.0
    return drawn_count_document(case, count_peaks(case, sign=sign))


def _spacing(case: FeatureCase, part: FeaturePart, look: Look) -> dict[str, Any] | None:
    found = find_spacing(case, harmonic=part.kind == Kind.HARMONIC, look=look)
    return drawn_spacing_document(case, found)


_COMPUTED_BY: dict[Kind, Callable[[FeatureCase, FeaturePart, Look], Any]] = {
    Kind.PLAN: _plan,
    Kind.PEAK: _peak,
    Kind.DIP: _peak,
    Kind.COUNT: _count,
    Kind.DIP_COUNT: _count,
    Kind.SPACING: _spacing,
    Kind.HARMONIC: _spacing,
}
