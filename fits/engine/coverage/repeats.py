"""Repeats of one cell: new errors each time, judged as an assessment judges them."""

import math
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from fits.engine.ball import Radius, ball_of, is_above, is_inside
from fits.engine.coverage.cells import Cell, ErrorKind, PreparedCell, prepared
from fits.engine.data import FloatArray
from fits.engine.draws import draw_noise
from fits.engine.error_size import error_size_from_leftover
from fits.engine.exact import exact_verdict
from fits.engine.fit import fit_in
from fits.engine.scales import scale_table
from fits.engine.settings import Settings

IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


class ConfidenceSet(StrEnum):
    """The sets whose claims are tried."""

    PUBLISHED = "published"
    CALIBRATED = "calibrated"
    CAUTIOUS = "cautious"
    EXACT = "exact"
    SCALES = "scales"


@dataclass(frozen=True, eq=False)
class CellCoverage:
    """held: how many repeats had each curve in each set at each level, shape (1 or 9 curves, 5 sets, levels);
    the truth comes first, then the wrong curves."""

    cell: Cell
    repeats: int
    held: IntArray

    @property
    def shares(self) -> FloatArray:
        """How often each set held the truth, shape (5, levels)."""
        return np.asarray(self.held[0] / self.repeats)

    @property
    def rejections(self) -> FloatArray:
        """How often each set rejected the wrong curves, shape (0 or 8, 5, levels)."""
        return np.asarray(1.0 - self.held[1:] / self.repeats)


def simulation_error(share: float, repeats: int) -> float:
    """sqrt(p (1 − p)/repeats)."""
    return math.sqrt(share * (1.0 - share) / repeats)


def run_cell(cell: Cell, *, index: int, seed: int, repeats: int, settings: Settings) -> CellCoverage:
    """Repeat one cell. Its numbers hang on the seed and its index alone, not on what else runs or where."""
    rng = np.random.default_rng(np.random.SeedSequence([seed, index]))
    setting = prepared(cell)
    held = np.zeros((len(setting.curves), len(ConfidenceSet), len(settings.levels)), dtype=np.int64)
    for _ in range(repeats):
        observed = setting.whitened + rng.standard_normal(cell.points)
        held += sets_holding(setting, observed, rng=rng, settings=settings)
    return CellCoverage(cell, repeats, held)


def sets_holding(
    setting: PreparedCell, observed: FloatArray, *, rng: np.random.Generator, settings: Settings
) -> BoolArray:
    """Which sets hold each curve at each level, shape (curves, 5, levels), from whitened data, shape (n,).

    The same steps as in an assessment, in coordinates that were made once: the error size scales them and no more.
    """
    sigma, freedom, whitening = 1.0, math.inf, setting.whitening
    if setting.cell.errors is ErrorKind.ESTIMATED:
        size = error_size_from_leftover(setting.coordinates, observed)
        sigma, freedom, whitening = size.sigma, size.freedom, whitening.scaled(size.sigma)
    fit = fit_in(setting.coordinates, whitening, observed / sigma, freedom, settings=settings)
    functions = setting.coordinates.functions
    noise = draw_noise(rng, draws=settings.draws, functions=functions, variance=fit.variance, freedom=freedom)
    ball = ball_of(fit.z, fit.shrunk, noise, levels=settings.levels, shrinkage=settings.shrinkage)
    table = scale_table(functions, freedom)
    found = []
    for curve in setting.curves / sigma:
        distance = float(np.linalg.norm(curve - fit.estimate))
        verdict = exact_verdict(
            fit, curve, noise, table, shrinkage=settings.shrinkage, one_size=not math.isinf(freedom)
        )
        p_values = (verdict.p_value.value, verdict.scales.p_value)
        found.append([_held(radius, distance, p_values) for radius in ball.radii])
    return np.array(found).transpose(0, 2, 1)


def _held(radius: Radius, distance: float, p_values: tuple[float, float]) -> list[bool]:
    """In the order of ConfidenceSet."""
    squares = (radius.published_squared, radius.calibrated_squared, radius.cautious_squared)
    balls = [is_inside(distance, square) for square in squares]
    return balls + [is_above(p_value, radius.level) for p_value in p_values]
