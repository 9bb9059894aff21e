"""What a reader must know beside the numbers, each with a stable code."""

import math
from collections.abc import Iterator
from dataclasses import dataclass

from fits.engine.data import Axis
from fits.engine.resolution import feature_width
from fits.engine.result import Result

# A leftover p-value beyond these is worth a word.
LEFTOVER_TOO_LARGE = 0.01
LEFTOVER_TOO_SMALL = 0.99
# Error bars, root-mean-square.
GRID_TOO_COARSE = 0.05
FINER_THAN_RESOLUTION = 0.1
# … and only where it would show in the leftover: more than one standard deviation of its χ².


@dataclass(frozen=True)
class Note:
    """One remark."""

    code: str
    message: str


def notes_on(result: Result) -> tuple[Note, ...]:
    """All remarks on an assessment, those on the data first."""
    return (*_on_the_data(result), *_on_the_curves(result))


def narrowest(result: Result) -> str:
    """The width of the narrowest feature judged, in words."""
    fit = result.fit.coordinates
    return width_in_words(feature_width(fit.functions, fit.interval.span), fit.interval.axis)


def width_in_words(width: float, axis: Axis) -> str:
    """A feature width: in x, or as a width of ln x."""
    return f"{width:.3g} in ln x" if axis is Axis.LOG else f"{width:.3g} in x"


def _on_the_data(result: Result) -> Iterator[Note]:
    fit = result.fit
    if fit.coordinates.functions < result.asked_functions:
        yield Note(
            "resolution-reduced",
            f"Of {result.asked_functions} basis functions {fit.coordinates.functions} are independent at these x "
            "and were kept: the points are too few or too uneven for more.",
        )
    if result.settings.resolution is not None and result.asked_functions < result.settings.resolution:
        yield Note(
            "resolution-reduced",
            f"{result.settings.resolution} basis functions were asked for; {result.data.points} points allow "
            f"no more than {result.asked_functions}.",
        )
    yield from _on_the_leftover(result)
    empty = [f"{100 * r.level:g} %" for r in result.ball.radii if r.calibrated_squared <= 0.0]
    if empty:
        yield Note(
            "radius-zero",
            f"The data lie closer to the fit than their errors allow: the radius at {', '.join(empty)} is 0 and "
            "nothing is inside. Check the errors; they are probably overstated.",
        )


def _on_the_leftover(result: Result) -> Iterator[Note]:
    leftover = result.fit.leftover
    if leftover is None:
        if result.sigma is not None:
            yield Note(
                "errors-estimated",
                f"The errors are estimated from what the {result.fit.coordinates.functions} functions leave over "
                f"({result.fit.freedom:g} degrees of freedom). The leftover can then no longer check them, and "
                "structure finer than the resolution passes for error.",
            )
        else:
            yield Note(
                "no-leftover",
                "With as many functions as points nothing is left over to check the errors by, and errors that "
                "are 10 % off move the ball by its own size.",
            )
        return
    numbers = f"χ² = {leftover.chi2:.4g} on {leftover.dof} degrees of freedom, p = {leftover.p_value:.2g}"
    if leftover.p_value < LEFTOVER_TOO_LARGE:
        yield Note(
            "leftover-large",
            f"The data scatter more than their errors allow ({numbers}). Either there is structure narrower than "
            f"{narrowest(result)}, the resolution, or the errors are understated.",
        )
    elif leftover.p_value > LEFTOVER_TOO_SMALL:
        yield Note(
            "leftover-small",
            f"The data scatter less than their errors say ({numbers}). The errors are probably overstated, or "
            "correlated between points in a way that they do not say; verdicts are then too lenient.",
        )


def _on_the_curves(result: Result) -> Iterator[Note]:
    for index in result.ranking.order:
        verdict = result.verdicts[index]
        name = verdict.curve.name
        if verdict.leftover is not None:
            unjudged = verdict.leftover.root_mean_square(result.data.points)
            shows = verdict.leftover.chi2 > math.sqrt(2.0 * verdict.leftover.dof)
            if unjudged > FINER_THAN_RESOLUTION and shows:
                yield Note(
                    "curve-finer",
                    f"{name} has structure narrower than {narrowest(result)}: {unjudged:.2g} error bars of it "
                    "(root-mean-square) were not judged.",
                )
        if verdict.interpolation_error > GRID_TOO_COARSE:
            yield Note(
                "grid-coarse",
                f"The grid of {name} is too coarse: two ways of interpolating it differ by "
                f"{verdict.interpolation_error:.2g} error bars (root-mean-square). Give it on a finer grid.",
            )
