"""What the charts need beside the result, as plain JSON."""

import math
from typing import Any

import numpy as np
import scipy.special
from numpy.typing import NDArray

from fits.assessments.document import drawing_grid
from fits.engine.counts import stabilised
from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.interpolation import curve_on_grid
from fits.engine.leftover import leftover_residuals
from fits.engine.ranking import positions
from fits.engine.resolution import feature_width
from fits.engine.result import CurveVerdict, Result
from fits.engine.shrinkage import nested_risks

IndexArray = NDArray[np.int64]

MOST_DRAWN_POINTS = 4000
MOST_QUANTILES = 400
# The level of the band around the misfit of a curve.
MISFIT_LEVEL = 0.95


def detail_document(result: Result) -> dict[str, Any]:
    """Arrays for drawing; curves in rank order."""
    fit = result.fit
    grid = drawing_grid(fit.coordinates.interval, fit.coordinates.functions)
    functions_on_grid = fit.coordinates.basis.at(grid)
    drawn = _evenly(result.data.points, MOST_DRAWN_POINTS)
    differences = np.array([verdict.coordinates - fit.estimate for verdict in result.verdicts])
    places = positions(differences) if len(differences) else np.empty((0, 2))
    return {
        "data": {
            "x": result.data.x[drawn].tolist(),
            "y": result.observed[drawn].tolist(),
            "error": fit.whitening.standard_errors[drawn].tolist(),
            "fit": result.seen[drawn].tolist(),
            "thinned": drawn.size < result.data.points,
            "scale": scale_of(result.data),
        },
        "error_sizes": error_sizes(result),
        "grid": {
            "x": grid.tolist(),
            "fit": (functions_on_grid @ fit.estimate).tolist(),
            "unit_band": np.linalg.norm(functions_on_grid, axis=1).tolist(),
        },
        "coordinates": {"z": fit.z.tolist(), "shrinkage": fit.shrunk.factors.tolist()},
        "risk_curve": {
            "functions": list(range(fit.z.size + 1)),
            "risk": nested_risks(fit.z, fit.variance).tolist(),
        },
        "leftover_quantiles": _leftover_quantiles(result),
        "curves": [
            _curve(result, result.verdicts[index], grid, functions_on_grid, drawn, places[index])
            for index in result.ranking.order
        ],
        "neighbours": [
            {
                "first": result.verdicts[pair.nearer].curve.name,
                "second": result.verdicts[pair.farther].curve.name,
                "settled": pair.settled,
            }
            for pair in result.ranking.neighbours
        ],
    }


def scale_of(data: Data) -> str:
    """The scale on which data, fit and curves are judged and drawn."""
    return "stabilised counts" if data.source is ErrorSource.COUNTS else "given"


def error_sizes(result: Result) -> list[dict[str, Any]]:
    """Every estimate of σ, that which is used first; empty where the errors are known."""
    return [
        {
            "source": size.source.value,
            "sigma": size.sigma,
            "standard_error": size.standard_error,
            "freedom": size.freedom,
        }
        for size in result.error_sizes
    ]


def _curve(
    result: Result,
    verdict: CurveVerdict,
    grid: FloatArray,
    functions_on_grid: FloatArray,
    drawn: IndexArray,
    place: FloatArray,
) -> dict[str, Any]:
    fit = result.fit
    span = fit.coordinates.interval.span
    worst = verdict.scales.functions[verdict.scales.worst]
    up_to_worst = (
        functions_on_grid if verdict.own_basis is fit.coordinates.basis else verdict.own_basis.at(grid)
    )[:, :worst]
    values = curve_on_grid(verdict.curve, grid, result.data.axis)
    reached = np.isfinite(values)
    if result.data.source is ErrorSource.COUNTS:
        # Between its own points the interpolated line may dip below 0 where nothing was judged.
        values = stabilised(np.maximum(values, 0.0))
    return {
        "name": verdict.curve.name,
        "at_data": verdict.at_data[drawn].tolist(),
        "on_grid": {"x": grid[reached].tolist(), "y": values[reached].tolist()},
        "scales": {
            "functions": list(verdict.scales.functions),
            "wider_than": [feature_width(k, span) for k in verdict.scales.functions],
            "p_value": verdict.scales.p_values.tolist(),
        },
        "misfit": {
            "x": grid.tolist(),
            "y": (up_to_worst @ verdict.own_misfit[:worst]).tolist(),
            "band": (_misfit_radius(result, worst) * np.linalg.norm(up_to_worst, axis=1)).tolist(),
            "functions": worst,
            "wider_than": feature_width(worst, span),
        },
        "position": place.tolist(),
    }


def _misfit_radius(result: Result, functions: int) -> float:
    """The radius, around Z, of the ball of the scale set that judges the first k coordinates."""
    threshold = result.scale_table.threshold(MISFIT_LEVEL)
    freedom = result.scale_table.freedom
    if math.isinf(freedom):
        squared = float(scipy.special.chdtri(functions, threshold))
    else:
        squared = functions * float(scipy.special.fdtri(functions, freedom, 1.0 - threshold))
    return math.sqrt(squared * result.fit.variance)


def _leftover_quantiles(result: Result) -> dict[str, list[float]] | None:
    """The quantile plot of the leftover against the normal distribution."""
    if result.fit.leftover is None:
        return None
    observed = leftover_residuals(result.fit.coordinates, result.fit.whitened, result.fit.z)
    expected = scipy.special.ndtri((np.arange(observed.size) + 0.5) / observed.size)
    shown = _evenly(observed.size, MOST_QUANTILES)
    return {"expected": expected[shown].tolist(), "observed": observed[shown].tolist()}


def _evenly(size: int, most: int) -> IndexArray:
    """Indices of all, or of `most` evenly strewn over them with both ends."""
    if size <= most:
        return np.arange(size, dtype=np.int64)
    return np.unique(np.linspace(0, size - 1, most).round().astype(np.int64))
