"""From what is said of the errors to a whitening, with σ or a profile of it estimated where it is not known."""

import math
from dataclasses import dataclass, replace

import numpy as np

from fits.engine.coordinates import coordinates_of
from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.error_profile import error_profile
from fits.engine.error_size import (
    ErrorSize,
    error_size_from_first_differences,
    error_size_from_leftover,
    error_size_from_second_differences,
)
from fits.engine.observation import interval_of
from fits.engine.whitening import SharedErrors, Whitening, whitening_of


@dataclass(frozen=True, eq=False)
class ErrorModel:
    """whitening: of the full Σ but for a calibration; freedom: ν; sigma and sizes: what was estimated."""

    whitening: Whitening
    freedom: float = math.inf
    sigma: float | None = None
    sizes: tuple[ErrorSize, ...] = ()

    @property
    def is_one_size(self) -> bool:
        """Whether all errors scale with a σ from the leftover, which makes p-values exact given the data's squares."""
        return self.sigma is not None and not isinstance(self.whitening, SharedErrors)


def error_model_of(data: Data, observed: FloatArray, *, functions: int) -> ErrorModel:
    """The errors of validated data. Raises InputRefused where they cannot be estimated or are no errors."""
    if data.source is ErrorSource.PROFILE:
        profile = error_profile(data.x, observed, interval_of(data))
        return ErrorModel(whitening_of(data, profile=profile.standard_errors), profile.freedom)
    if data.source is not ErrorSource.ESTIMATE:
        return ErrorModel(whitening_of(data))
    own = whitening_of(replace(data, shared={}))
    shared = np.column_stack(list(data.shared.values())) if data.shared else None
    coordinates = coordinates_of(data, own, functions=functions)
    size = error_size_from_leftover(
        coordinates, own.apply(observed), None if shared is None else own.apply(shared)
    )
    whitening = own.scaled(size.sigma)
    if shared is not None:
        # Shared errors have a size of their own: only what is independent scales with σ.
        whitening = whitening.with_shared(shared)
    sizes: tuple[ErrorSize, ...] = (size,)
    if data.covariance is None:
        scaled = observed / own.standard_errors
        first = error_size_from_first_differences(data.x, scaled)
        sizes = (size, first, error_size_from_second_differences(data.x, scaled))
    return ErrorModel(whitening, size.freedom, size.sigma, sizes)
