"""The whole assessment: data, curves and settings in; fit, balls and verdicts out."""

from collections.abc import Callable, Sequence
from enum import StrEnum

import numpy as np

from fits.engine.ball import Ball, ball_of, exact_p_value
from fits.engine.basis import interval_of
from fits.engine.coordinates import coordinates_of
from fits.engine.counts import stabilised
from fits.engine.data import CurveTable, Data, ErrorSource, FloatArray
from fits.engine.draws import Noise, draw_noise
from fits.engine.error_size import error_size_from_leftover
from fits.engine.interpolation import curve_at_data
from fits.engine.leftover import leftover_of
from fits.engine.ranking import ranking_of
from fits.engine.refusal import InputRefused
from fits.engine.resolution import functions_for
from fits.engine.result import CurveVerdict, Fit, Result
from fits.engine.scales import ScaleTable, scale_table
from fits.engine.settings import Settings
from fits.engine.shrinkage import shrink
from fits.engine.whitening import Whitening, whitening_of


class Stage(StrEnum):
    """Where an assessment is."""

    FITTING = "fitting"
    CALIBRATING = "calibrating"
    JUDGING = "judging"


Progress = Callable[[Stage, float], None]


def no_progress(stage: Stage, fraction: float) -> None:
    """For callers who need no word in between."""


def assess(
    data: Data,
    curves: Sequence[CurveTable],
    settings: Settings,
    *,
    rng: np.random.Generator,
    progress: Progress = no_progress,
) -> Result:
    """Fit, calibrate and judge.

    `progress` is told the stage and the share of it that is done; what it raises ends the work (a cancelled job).
    All curves are judged with the same noise. Raises InputRefused for a covariance that is not positive definite,
    for a curve that does not cover the data (field "x", the curve's name in the reason), and for a resolution that
    does not go with the data.
    """
    progress(Stage.FITTING, 0.0)
    whitening = whitening_of(data)
    asked = functions_for(settings, points=data.points, span=interval_of(data).span)
    fit, whitening = fit_of(data, whitening, functions=asked, settings=settings)
    progress(Stage.CALIBRATING, 0.0)
    noise = draw_noise(
        rng,
        draws=settings.draws,
        functions=fit.coordinates.functions,
        variance=fit.variance,
        freedom=fit.freedom,
    )
    ball = ball_of(fit.z, fit.shrunk, noise, levels=settings.levels, shrinkage=settings.shrinkage)
    table = scale_table(fit.coordinates.functions, fit.freedom)
    verdicts = []
    for done, curve in enumerate(curves):
        progress(Stage.JUDGING, done / len(curves))
        verdicts.append(judge(curve, data, whitening, fit, ball, table, noise, settings))
    ranking = ranking_of(
        [verdict.coordinates for verdict in verdicts],
        [verdict.distance for verdict in verdicts],
        fit.shrunk.factors,
        fit.variance,
    )
    return Result(data, settings, asked, fit, ball, table, tuple(verdicts), ranking)


def fit_of(data: Data, whitening: Whitening, *, functions: int, settings: Settings) -> tuple[Fit, Whitening]:
    """The shrinkage fit, and the whitening in units of the (where need be estimated) errors."""
    observed = stabilised(data.y) if data.source is ErrorSource.COUNTS else data.y
    coordinates = coordinates_of(data, whitening, functions=functions)
    freedom, sigma = np.inf, None
    if data.source is ErrorSource.ESTIMATE:
        size = error_size_from_leftover(coordinates, whitening.apply(observed))
        freedom, sigma = float(size.freedom), size.sigma
        whitening = whitening.scaled(sigma)
        coordinates = coordinates_of(data, whitening, functions=functions)
    whitened = whitening.apply(observed)
    z = coordinates.of(whitened)
    variance = 1.0 / data.points
    shrunk = shrink(z, variance=variance, freedom=freedom, shrinkage=settings.shrinkage)
    fit = Fit(
        coordinates=coordinates,
        z=z,
        shrunk=shrunk,
        estimate=shrunk.factors * z,
        variance=variance,
        freedom=freedom,
        sigma=sigma,
        whitened=whitened,
        standard_errors=whitening.standard_errors,
        observed=observed,
        # With σ taken from the leftover itself the check is met by construction and says nothing.
        leftover=None if sigma is not None else leftover_of(coordinates, whitened),
    )
    return fit, whitening


def judge(
    curve: CurveTable,
    data: Data,
    whitening: Whitening,
    fit: Fit,
    ball: Ball,
    table: ScaleTable,
    noise: Noise,
    settings: Settings,
) -> CurveVerdict:
    """One curve against the fit, the balls and the scale set."""
    try:
        interpolated = curve_at_data(curve, data)
        at_data = _on_scale(interpolated.cubic, data)
        monotone = _on_scale(interpolated.monotone, data)
    except InputRefused as refusal:
        refusal.field = f"curve {curve.name}"
        raise
    whitened = whitening.apply(at_data)
    coordinates = fit.coordinates.of(whitened)
    distance = float(np.linalg.norm(coordinates - fit.estimate))
    difference = whitened - whitening.apply(monotone)
    return CurveVerdict(
        curve=curve,
        at_data=at_data,
        coordinates=coordinates,
        distance=distance,
        published_entry_level=ball.published_entry_level(distance),
        calibrated_entry_level=ball.calibrated_entry_level(distance),
        p_value=exact_p_value(coordinates, ball, distance, noise, shrinkage=settings.shrinkage),
        scales=table.misfit((fit.z - coordinates) ** 2 / fit.variance),
        leftover=leftover_of(fit.coordinates, whitened),
        interpolation_error=float(np.sqrt(np.mean(difference**2))),
    )


def _on_scale(values: FloatArray, data: Data) -> FloatArray:
    """Values on the scale on which the data are judged."""
    if data.source is not ErrorSource.COUNTS:
        return values
    wrong = np.flatnonzero(values < 0.0)
    if wrong.size:
        at = data.x[int(wrong[0])]
        raise InputRefused(
            "negative-expectation",
            "y",
            f"expects {values[wrong[0]]:g} counts at x = {at:g}",
            "Give counts from 0",
        )
    return stabilised(values)
