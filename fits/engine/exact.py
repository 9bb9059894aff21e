"""What is said of one curve with a law that is known exactly if the curve is true."""

from dataclasses import dataclass

import numpy as np

from fits.engine.ball import PValue, exact_p_value, statistic_at
from fits.engine.data import FloatArray
from fits.engine.draws import Noise
from fits.engine.result import Fit
from fits.engine.scales import ScaleMisfit, ScaleTable
from fits.engine.settings import Shrinkage


@dataclass(frozen=True, eq=False)
class ExactVerdict:
    """The exact p-value of the distance from the fit, and the misfit scale by scale."""

    p_value: PValue
    scales: ScaleMisfit


def exact_verdict(
    fit: Fit, curve: FloatArray, noise: Noise, table: ScaleTable, *, shrinkage: Shrinkage, one_size: bool
) -> ExactVerdict:
    """Judge the curve with these coordinates, shape (J,).

    fit       made with the errors as they are if the curve is true
    one_size  whether all errors scale with a σ taken from the leftover: the p-value is then conditional on the squares
    """
    squares = (fit.z - curve) ** 2 / fit.variance
    statistic = statistic_at(float(np.linalg.norm(curve - fit.estimate)), fit.shrunk)
    total = fit.freedom + float(squares.sum()) if one_size else None
    p_value = exact_p_value(curve, statistic, noise, shrinkage=shrinkage, total=total)
    return ExactVerdict(p_value, table.misfit(squares))
