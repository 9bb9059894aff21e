"""The shrinkage fit under one whitening."""

import numpy as np

from fits.engine.coordinates import Coordinates, coordinates_of
from fits.engine.data import Data, FloatArray
from fits.engine.leftover import leftover_of
from fits.engine.result import Fit
from fits.engine.settings import Settings
from fits.engine.shrinkage import shrink
from fits.engine.whitening import Whitening


def fit_of(
    data: Data,
    observed: FloatArray,
    whitening: Whitening,
    freedom: float,
    *,
    functions: int,
    settings: Settings,
) -> Fit:
    """Coordinates, shrinkage factors and fit of values observed with these errors, shape (n,)."""
    coordinates = coordinates_of(data, whitening, functions=functions)
    return fit_in(coordinates, whitening, whitening.apply(observed), freedom, settings=settings)


def fit_in(
    coordinates: Coordinates,
    whitening: Whitening,
    whitened: FloatArray,
    freedom: float,
    *,
    settings: Settings,
) -> Fit:
    """The fit of whitened values, shape (n,), in coordinates that are there already."""
    z = coordinates.of(whitened)
    variance = 1.0 / coordinates.points
    shrunk = shrink(z, variance=variance, freedom=freedom, shrinkage=settings.shrinkage)
    return Fit(
        whitening=whitening,
        coordinates=coordinates,
        whitened=whitened,
        z=z,
        shrunk=shrunk,
        estimate=np.asarray(shrunk.factors * z),
        variance=variance,
        freedom=freedom,
        leftover=leftover_of(coordinates, whitened, z),
    )
