"""What a reader must know beside the numbers, each with a stable code.

Every code is explained under its own anchor on the page "reports:explained".
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from enum import StrEnum

from core.measurements.error_doubts import doubt_of_estimates, doubt_of_shared
from fits.engine.counts import relative_change
from fits.engine.data import Axis, ErrorSource, FloatArray
from fits.engine.error_checks import root_mean_square
from fits.engine.error_size import ErrorSize
from fits.engine.resolution import feature_width
from fits.engine.result import CurveVerdict, Result
from fits.engine.settings import RadiusKind
from fits.engine.whitening import SharedErrors

# A leftover p-value beyond these is worth a word.
LEFTOVER_TOO_LARGE = 0.01
LEFTOVER_TOO_SMALL = 0.99
# Error bars, root-mean-square.
GRID_TOO_COARSE = 0.05
FINER_THAN_RESOLUTION = 0.1
# … and only where it would show in the leftover: more than one standard deviation of its χ².


class NoteCode(StrEnum):
    """Stable names of the notes."""

    RESOLUTION_REDUCED = "resolution-reduced"
    LEFTOVER_LARGE = "leftover-large"
    LEFTOVER_SMALL = "leftover-small"
    NO_LEFTOVER = "no-leftover"
    ERRORS_ESTIMATED = "errors-estimated"
    ESTIMATES_DISAGREE = "estimates-disagree"
    PROFILE_ESTIMATED = "profile-estimated"
    COUNTS_TRANSFORMED = "counts-transformed"
    SHARED_LARGER = "shared-larger"
    RADIUS_ZERO = "radius-zero"
    CURVE_FINER = "curve-finer"
    GRID_COARSE = "grid-coarse"


@dataclass(frozen=True)
class Note:
    """One remark."""

    code: NoteCode
    message: str


def notes_on(result: Result) -> tuple[Note, ...]:
    """All remarks on an assessment, those on the data first."""
    return (
        *_on_the_resolution(result),
        *_on_the_leftover(result),
        *_on_the_errors(result),
        *_on_the_radii(result),
        *_on_the_curves(result),
    )


def narrowest(result: Result) -> str:
    """The width of the narrowest feature judged, in words."""
    fit = result.fit.coordinates
    return width_in_words(feature_width(fit.functions, fit.interval.span), fit.interval.axis)


def width_in_words(width: float, axis: Axis) -> str:
    """A feature width: in x, or as a width of ln x."""
    return f"{width:.3g} in ln x" if axis is Axis.LOG else f"{width:.3g} in x"


def _on_the_resolution(result: Result) -> Iterator[Note]:
    fit = result.fit
    if fit.coordinates.functions < result.asked_functions:
        yield Note(
            NoteCode.RESOLUTION_REDUCED,
            f"Of {result.asked_functions} basis functions {fit.coordinates.functions} are independent at these x "
            "and were kept: the points are too few or too uneven for more.",
        )
    if result.settings.resolution is not None and result.asked_functions < result.settings.resolution:
        yield Note(
            NoteCode.RESOLUTION_REDUCED,
            f"{result.settings.resolution} basis functions were asked for; {result.data.points} points allow "
            f"no more than {result.asked_functions}.",
        )


def _on_the_leftover(result: Result) -> Iterator[Note]:
    leftover = result.fit.leftover
    if leftover is None:
        if result.sigma is None:
            yield Note(
                NoteCode.NO_LEFTOVER,
                "With as many functions as points nothing is left over to check the errors by, and errors that "
                "are 10 % off move the ball by its own size.",
            )
        return
    numbers = f"χ² = {leftover.chi2:.4g} on {leftover.dof} degrees of freedom, p = {leftover.p_value:.2g}"
    if leftover.p_value < LEFTOVER_TOO_LARGE:
        yield Note(
            NoteCode.LEFTOVER_LARGE,
            f"The data scatter more than their errors allow ({numbers}). Either there is structure narrower than "
            f"{narrowest(result)}, the resolution, or the errors are understated.",
        )
    elif leftover.p_value > LEFTOVER_TOO_SMALL:
        yield Note(
            NoteCode.LEFTOVER_SMALL,
            f"The data scatter less than their errors say ({numbers}). Either the errors are overstated, or "
            "they are correlated between points in a way that they do not say. Overstated errors let wrong curves in.",
        )


def _on_the_errors(result: Result) -> Iterator[Note]:
    if result.sigma is not None:
        yield Note(
            NoteCode.ERRORS_ESTIMATED,
            f"The errors are estimated from what the {result.fit.coordinates.functions} functions leave over "
            f"({result.fit.freedom:g} degrees of freedom). The leftover can then no longer check them, and "
            "structure finer than the resolution passes for error.",
        )
    if result.data.source is ErrorSource.PROFILE:
        smallest, largest = _ends(result.fit.whitening.standard_errors)
        yield Note(
            NoteCode.PROFILE_ESTIMATED,
            f"The errors are estimated along x, from {smallest:.3g} to {largest:.3g}, by how neighbouring points "
            f"differ ({result.fit.freedom:.3g} degrees of freedom). A profile this smooth misses errors that change "
            "abruptly, and errors that neighbours share do not show in it.",
        )
    if result.data.source is ErrorSource.COUNTS:
        yield Note(
            NoteCode.COUNTS_TRANSFORMED,
            "The counts v are judged as 2√(v + 3/8), whose error is 1, or a little less below 4 expected counts; each "
            "curve by the mean of that over the counts that it expects.",
        )
    yield from _on_the_estimates(result.error_sizes)
    yield from _on_shared_errors(result)


def _on_the_estimates(sizes: tuple[ErrorSize, ...]) -> Iterator[Note]:
    """Estimates of one σ that look at different things."""
    if said := doubt_of_estimates(sizes):
        yield Note(NoteCode.ESTIMATES_DISAGREE, said)


def _on_shared_errors(result: Result) -> Iterator[Note]:
    whitening = result.fit.whitening
    if not isinstance(whitening, SharedErrors):
        return
    own = root_mean_square(whitening.own.standard_errors)
    columns = {f"The shared error {name}": column for name, column in result.data.shared.items()}
    if result.data.calibration:
        fraction = result.data.calibration
        columns[f"The calibration, known to {100 * fraction:g} %,"] = fraction * relative_change(
            result.seen, result.data
        )
    for name, column in columns.items():
        if said := doubt_of_shared(name, root_mean_square(column), own):
            yield Note(NoteCode.SHARED_LARGER, said)


def _on_the_radii(result: Result) -> Iterator[Note]:
    cautious = result.settings.radius is RadiusKind.CAUTIOUS
    squares = {r.level: r.cautious_squared if cautious else r.calibrated_squared for r in result.ball.radii}
    empty = [level for level, squared in squares.items() if squared <= 0.0]
    if empty:
        levels = ", ".join(f"{100 * level:g} %" for level in empty)
        share = f"{100 * (1 - max(empty)):.2g} %"
        yield Note(
            NoteCode.RADIUS_ZERO,
            f"The data lie closer to the fit than their errors allow: the radius at {levels} is 0 and that ball "
            f"holds nothing. With right errors that happens in about {share} of repeats at most; "
            "otherwise the errors are overstated.",
        )


def _on_the_curves(result: Result) -> Iterator[Note]:
    verdicts = [result.verdicts[index] for index in result.ranking.order]
    finer = {verdict.curve.name: size for verdict in verdicts if (size := _unjudged(verdict, result))}
    if finer:
        yield Note(
            NoteCode.CURVE_FINER,
            f"Structure narrower than {narrowest(result)} was not judged. In error bars (root-mean-square) there is of "
            f"it: {_each(finer)}.",
        )
    coarse = {
        verdict.curve.name: verdict.interpolation_error
        for verdict in verdicts
        if verdict.interpolation_error > GRID_TOO_COARSE
    }
    if coarse:
        yield Note(
            NoteCode.GRID_COARSE,
            "The grid of a curve is too coarse where two ways of interpolating it differ. In error bars "
            f"(root-mean-square) they do by: {_each(coarse)}. Give it on a finer grid.",
        )


def _unjudged(verdict: CurveVerdict, result: Result) -> float:
    """A curve's structure finer than the resolution, in error bars; 0 where it does not matter."""
    leftover = verdict.leftover
    if leftover is None or leftover.chi2 <= math.sqrt(2.0 * leftover.dof):
        return 0.0
    size = leftover.root_mean_square(result.data.points)
    return size if size > FINER_THAN_RESOLUTION else 0.0


def _each(sizes: dict[str, float]) -> str:
    return "; ".join(f"{name}, {size:.2g}" for name, size in sizes.items())


def _ends(values: FloatArray) -> tuple[float, float]:
    return float(values.min()), float(values.max())
