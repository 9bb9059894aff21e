"""What an assessment finds, as frozen values; words and charts are made from these elsewhere."""

from dataclasses import dataclass

from fits.engine.ball import Ball, PValue
from fits.engine.coordinates import Coordinates, OrthonormalFunctions
from fits.engine.data import CurveTable, Data, FloatArray
from fits.engine.error_size import ErrorSize
from fits.engine.leftover import Leftover
from fits.engine.ranking import Ranking
from fits.engine.scales import ScaleMisfit, ScaleTable
from fits.engine.settings import Settings
from fits.engine.shrinkage import Shrunk
from fits.engine.whitening import Whitening


@dataclass(frozen=True, eq=False)
class Fit:
    """The shrinkage fit in coordinates, under one whitening.

    whitened    L⁻¹ y, shape (n,)
    z           Z, shape (J,)
    estimate    β̂ = λ Z, shape (J,)
    variance    v = 1/n, in units of the errors
    freedom     ν, inf where the errors are known
    leftover    None with J = n, and where σ is taken from the leftover itself: the check is then met by construction
    """

    whitening: Whitening
    coordinates: Coordinates
    whitened: FloatArray
    z: FloatArray
    shrunk: Shrunk
    estimate: FloatArray
    variance: float
    freedom: float
    leftover: Leftover | None

    def at(self, x: FloatArray) -> FloatArray:
        """f̂(x) = Σ λ_j Z_j u_j(x)."""
        return self.coordinates.basis.at(x) @ self.estimate


@dataclass(frozen=True, eq=False)
class CurveVerdict:
    """What is said of one curve.

    coordinates  β_m, shape (J,)
    at_data      what the points see of it, on the scale on which the data are judged, shape (n,)
    own_basis, own_misfit  the functions, and Z − β_m in them, with the errors as they are if the curve is true; p-value
                 and scales are made of these, which differ from the common ones only with a calibration
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
    own_basis: OrthonormalFunctions
    own_misfit: FloatArray
    leftover: Leftover | None
    interpolation_error: float


@dataclass(frozen=True, eq=False)
class Result:
    """One assessment. `verdicts` stand in the order in which the curves came; `ranking` orders them.

    observed     y on the scale on which it is judged (stabilised for counts), shape (n,)
    seen         what the points see of the fit, on the same scale, shape (n,)
    sigma        the error size that was estimated and used, None where errors are known
    error_sizes  all estimates of it, empty where errors are known
    """

    data: Data
    settings: Settings
    asked_functions: int
    observed: FloatArray
    seen: FloatArray
    fit: Fit
    sigma: float | None
    error_sizes: tuple[ErrorSize, ...]
    ball: Ball
    scale_table: ScaleTable
    verdicts: tuple[CurveVerdict, ...]
    ranking: Ranking
