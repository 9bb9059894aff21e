"""The result of an assessment as plain JSON: the document that `rank --json` writes."""

import math
from collections.abc import Mapping
from typing import Any

from fits.assessments.notes import notes_on
from fits.engine import VERSION
from fits.engine.ball import is_above, is_inside
from fits.engine.basis import Interval
from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.leftover import Leftover
from fits.engine.resolution import feature_width
from fits.engine.result import CurveVerdict, Result

SCHEMA = "inradius/1"
GRID_POINTS = 201
GRID_POINTS_PER_WIDTH = 5


def result_document(result: Result, *, seed: int) -> dict[str, Any]:
    """Everything that is found, curves in rank order."""
    fit, settings = result.fit, result.settings
    grid = drawing_grid(fit.coordinates.interval, fit.coordinates.functions)
    return {
        "schema": SCHEMA,
        "engine": VERSION,
        "seed": seed,
        "draws": settings.draws,
        "release": {
            "points": result.data.points,
            "x_min": float(result.data.x.min()),
            "x_max": float(result.data.x.max()),
            "errors": error_model(result.data),
            "sigma": result.sigma,
        },
        "fit": {
            "resolution": fit.coordinates.functions,
            "shrinkage": settings.shrinkage.value,
            "effective_parameters": fit.shrunk.effective_parameters,
            "risk": fit.shrunk.risk,
            "tau": fit.shrunk.tau,
            "x": grid.tolist(),
            "y": fit.at(grid).tolist(),
        },
        "leftover": _leftover(fit.leftover),
        "radii": radii_document(result),
        "curves": [_curve(result, index, rank) for rank, index in enumerate(result.ranking.order, start=1)],
        "notes": [{"code": note.code.value, "message": note.message} for note in notes_on(result)],
    }


def radii_document(result: Result) -> list[dict[str, float]]:
    """Every radius at every level."""
    return [
        {
            "level": radius.level,
            "published": radius.published,
            "calibrated": radius.calibrated,
            "cautious": radius.cautious,
        }
        for radius in result.ball.radii
    ]


def level_key(level: float) -> str:
    """A level as a key: 0.95 → "0.95"."""
    return repr(float(level))


def error_model(data: Data) -> str:
    """Where the errors come from, in one word."""
    if data.source is ErrorSource.GIVEN and data.covariance is not None:
        return "covariance"
    return data.source.value


def drawing_grid(interval: Interval, functions: int) -> FloatArray:
    """201 points or 5 for each resolution width, whichever is finer."""
    widths = interval.span / feature_width(functions, interval.span)
    return interval.grid(max(GRID_POINTS, math.ceil(GRID_POINTS_PER_WIDTH * widths) + 1))


def _curve(result: Result, index: int, rank: int) -> dict[str, Any]:
    verdict = result.verdicts[index]
    worst = verdict.scales.worst
    functions = verdict.scales.functions[worst]
    return {
        "name": verdict.curve.name,
        "rank": rank,
        "order_settled": result.ranking.is_settled(index),
        "distance": verdict.distance,
        "entry_level": {
            "published": verdict.published_entry_level,
            "calibrated": verdict.calibrated_entry_level,
        },
        "p_value": verdict.p_value.value,
        "p_value_error": verdict.p_value.error,
        "leftover": _leftover(verdict.leftover),
        "interpolation_error": verdict.interpolation_error,
        "scales": {
            "p_value": verdict.scales.p_value,
            "worst": {
                "functions": functions,
                "wider_than": feature_width(functions, result.fit.coordinates.interval.span),
                "p_value": float(verdict.scales.p_values[worst]),
            },
        },
        "inside": _inside(result, verdict),
    }


def _inside(result: Result, verdict: CurveVerdict) -> Mapping[str, Mapping[str, bool]]:
    """Which of the four sets hold the curve, level by level."""
    sets: dict[str, dict[str, bool]] = {"published": {}, "calibrated": {}, "exact": {}, "scales": {}}
    for radius in result.ball.radii:
        key = level_key(radius.level)
        sets["published"][key] = is_inside(verdict.distance, radius.published_squared)
        sets["calibrated"][key] = is_inside(verdict.distance, radius.calibrated_squared)
        sets["exact"][key] = is_above(verdict.p_value.value, radius.level)
        sets["scales"][key] = is_above(verdict.scales.p_value, radius.level)
    return sets


def _leftover(leftover: Leftover | None) -> dict[str, Any] | None:
    if leftover is None:
        return None
    return {"chi2": leftover.chi2, "dof": leftover.dof, "p_value": leftover.p_value}
