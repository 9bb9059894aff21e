"""The whole assessment: data, curves and settings in; fit, balls and verdicts out."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np

from fits.engine.ball import Ball, ball_of
from fits.engine.counts import on_scale, relative_change, stabilised
from fits.engine.data import CurveTable, Data, ErrorSource, FloatArray
from fits.engine.draws import Noise, draw_noise
from fits.engine.errors import ErrorModel, error_model_of
from fits.engine.exact import exact_verdict
from fits.engine.fit import fit_of
from fits.engine.interpolation import curve_at_data
from fits.engine.leftover import leftover_of
from fits.engine.observation import Observation, interval_of, observation_of
from fits.engine.ranking import ranking_of
from fits.engine.refusal import InputRefused
from fits.engine.resolution import functions_for
from fits.engine.result import CurveVerdict, Fit, Result
from fits.engine.scales import ScaleTable, scale_table
from fits.engine.settings import Settings, refuse_too_many_draws
from fits.engine.whitening import Whitening


class Stage(StrEnum):
    """Where an assessment is."""

    FITTING = "fitting"
    CALIBRATING = "calibrating"
    JUDGING = "judging"


Progress = Callable[[Stage, float], None]


def no_progress(stage: Stage, fraction: float) -> None:
    """For callers who need no word in between."""


@dataclass(frozen=True, eq=False)
class _Court:
    """What every curve is judged with."""

    data: Data
    observation: Observation
    observed: FloatArray
    settings: Settings
    errors: ErrorModel
    fit: Fit
    ball: Ball
    table: ScaleTable
    noise: Noise


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
    for a curve that does not cover the data (the curve's name as field), for errors that cannot be estimated, and for
    a resolution that does not go with the data.
    """
    progress(Stage.FITTING, 0.0)
    observation = observation_of(data)
    observed = stabilised(data.y) if data.source is ErrorSource.COUNTS else data.y
    asked = functions_for(settings, points=data.points, span=interval_of(data).span)
    refuse_too_many_draws(settings, functions=asked)
    errors = error_model_of(data, observed, functions=asked)
    fit = fit_of(data, observed, errors.whitening, errors.freedom, functions=asked, settings=settings)
    if data.calibration:
        # The column is a fraction of a curve, never of the data, whose noise would pull the fit down.
        first = fit.coordinates.basis.seen_by(observation, fit.estimate)
        whitening = _calibrated(errors, first, data)
        fit = fit_of(data, observed, whitening, errors.freedom, functions=asked, settings=settings)
    if errors.sigma is not None:
        # With σ taken from the leftover the check is met by construction and says nothing.
        fit = replace(fit, leftover=None)
    progress(Stage.CALIBRATING, 0.0)
    noise = draw_noise(rng, draws=settings.draws, functions=asked, variance=fit.variance, freedom=fit.freedom)
    ball = ball_of(fit.z, fit.shrunk, noise, levels=settings.levels, shrinkage=settings.shrinkage)
    table = scale_table(fit.coordinates.functions, fit.freedom)
    court = _Court(data, observation, observed, settings, errors, fit, ball, table, noise)
    verdicts = []
    for done, curve in enumerate(curves):
        progress(Stage.JUDGING, done / len(curves))
        verdicts.append(_judge(curve, court))
    ranking = ranking_of(
        [verdict.coordinates for verdict in verdicts],
        [verdict.distance for verdict in verdicts],
        fit.shrunk.factors,
        fit.variance,
    )
    return Result(
        data=data,
        settings=settings,
        asked_functions=asked,
        observed=observed,
        seen=fit.coordinates.basis.seen_by(observation, fit.estimate),
        fit=fit,
        sigma=errors.sigma,
        error_sizes=errors.sizes,
        ball=ball,
        scale_table=table,
        verdicts=tuple(verdicts),
        ranking=ranking,
    )


def _judge(curve: CurveTable, court: _Court) -> CurveVerdict:
    """One curve against the fit, the balls and the scale set."""
    data, fit, ball = court.data, court.fit, court.ball
    try:
        seen = curve_at_data(curve, court.observation, data.axis)
        at_data, monotone = on_scale(seen.cubic, data), on_scale(seen.monotone, data)
    except InputRefused as refusal:
        refusal.field = f"curve {curve.name}"
        raise
    whitened = fit.whitening.apply(at_data)
    coordinates = fit.coordinates.of(whitened)
    distance = float(np.linalg.norm(coordinates - fit.estimate))
    difference = whitened - fit.whitening.apply(monotone)
    own = fit
    if data.calibration:
        # If this curve is true its own scale error is known exactly, and so is the law of everything that follows.
        whitening = _calibrated(court.errors, at_data, data)
        own = fit_of(
            data,
            court.observed,
            whitening,
            fit.freedom,
            functions=fit.coordinates.basis.asked,
            settings=court.settings,
        )
    own_coordinates = coordinates if own is fit else own.coordinates.of(own.whitening.apply(at_data))
    exact = exact_verdict(
        own,
        own_coordinates,
        court.noise,
        court.table if own is fit else scale_table(own.coordinates.functions, own.freedom),
        shrinkage=court.settings.shrinkage,
        one_size=court.errors.is_one_size and not data.calibration,
    )
    return CurveVerdict(
        curve=curve,
        at_data=at_data,
        coordinates=coordinates,
        distance=distance,
        published_entry_level=ball.published_entry_level(distance),
        calibrated_entry_level=ball.calibrated_entry_level(distance),
        p_value=exact.p_value,
        scales=exact.scales,
        own_basis=own.coordinates.basis,
        own_misfit=own.z - own_coordinates,
        leftover=leftover_of(fit.coordinates, whitened, coordinates),
        interpolation_error=float(np.sqrt(np.mean(difference**2))),
    )


def _calibrated(errors: ErrorModel, curve: FloatArray, data: Data) -> Whitening:
    column = data.calibration * relative_change(curve, data)
    return errors.whitening.with_shared(column[:, None])
