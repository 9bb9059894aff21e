"""What an assessment finds, as frozen values; words and charts are made from these elsewhere."""

from dataclasses import dataclass

from fits.engine.ball import Ball, PValue
from fits.engine.coordinates import Coordinates
from fits.engine.data import CurveTable, Data, FloatArray
from fits.engine.leftover import Leftover
from fits.engine.ranking import Ranking
from fits.engine.scales import ScaleMisfit, ScaleTable
from fits.engine.settings import Settings
from fits.engine.shrinkage import Shrunk


@dataclass(frozen=True, eq=False)
class Fit:
    """The shrinkage fit in coordinates.

    z           Z, shape (J,)
    estimate    β̂ = λ Z, shape (J,)
    variance    v = 1/n, in units of the errors
    freedom     ν, inf where the errors are known
    sigma       the estimated error size, None where it is known
    """

    coordinates: Coordinates
    z: FloatArray
    shrunk: Shrunk
    estimate: FloatArray
    variance: float
    freedom: float
    sigma: float | None
    whitened: FloatArray
    standard_errors: FloatArray
    observed: FloatArray
    leftover: Leftover | None

    def at(self, x: FloatArray) -> FloatArray:
        """f̂(x) = Σ λ_j Z_j u_j(x)."""
        return self.coordinates.functions_at(x) @ self.estimate


@dataclass(frozen=True, eq=False)
class CurveVerdict:
    """What is said of one curve.

    coordinates  β_m, shape (J,)
    at_data      its values at the data, on the scale on which the data are judged, shape (n,)
    leftover     the part of the curve that is finer than the resolution, None with J = n
    interpolation_error  root-mean-square difference of cubic and monotone interpolation, in error bars
    """

    curve: CurveTable
    at_data: FloatArray
    coordinates: FloatArray
    distance: float
    published_entry_level: float
    calibrated_entry_level: float
    p_value: PValue
    scales: ScaleMisfit
    leftover: Leftover | None
    interpolation_error: float


@dataclass(frozen=True, eq=False)
class Result:
    """One assessment. `verdicts` stand in the order in which the curves came; `ranking` orders them."""

    data: Data
    settings: Settings
    asked_functions: int
    fit: Fit
    ball: Ball
    scale_table: ScaleTable
    verdicts: tuple[CurveVerdict, ...]
    ranking: Ranking
