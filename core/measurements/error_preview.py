"""What is made of what was said of the errors: their sizes as they are drawn, and what is doubtful about them."""

from dataclasses import dataclass

import numpy as np

from fits.engine.data import Data, ErrorSource, FloatArray
from fits.engine.error_checks import shared_sizes, sizes_disagree
from fits.engine.error_size import MINIMUM_FREEDOM, ErrorSize
from fits.engine.errors import error_model_of
from fits.engine.observation import interval_of
from fits.engine.resolution import MINIMUM_FUNCTIONS, functions_for
from fits.engine.settings import Settings
from fits.engine.whitening import SharedErrors


@dataclass(frozen=True)
class Doubt:
    """Something that should be looked at before verdicts rest on it."""

    code: str
    sentence: str


@dataclass(frozen=True, eq=False)
class ErrorPreview:
    """standard_errors: one for each point, shared ones included, in units of y, shape (n,)
    sizes: estimates of σ, that which is used first; empty where σ is known
    shared: each shared error's size over that of the points' own errors
    """

    standard_errors: FloatArray
    sizes: tuple[ErrorSize, ...]
    shared: dict[str, float]
    doubts: tuple[Doubt, ...] = ()


def error_preview(data: Data) -> ErrorPreview:
    """Raises InputRefused where the errors cannot be estimated, or where they are no covariance.

    With counts, the standard error in y of Anscombe's transform. A calibration is not in it: it is a fraction of a
    curve, which the data do not name.
    """
    sizes: tuple[ErrorSize, ...]
    if data.source is ErrorSource.COUNTS:
        own, sizes = np.asarray(np.sqrt(data.y + 0.375)), ()
    elif data.source is ErrorSource.GIVEN and data.errors is not None:
        own, sizes = data.errors, ()
    else:
        own, sizes = _estimated(data)
    variance = own**2
    for column in data.shared.values():
        variance = variance + column**2
    shared = shared_sizes(data.shared, own)
    return ErrorPreview(np.sqrt(variance), sizes, shared, (*_on_sizes(sizes), *_on_shared(shared)))


def _estimated(data: Data) -> tuple[FloatArray, tuple[ErrorSize, ...]]:
    """Errors of the points alone, at the default resolution or where few points are left over at a lower one."""
    functions = functions_for(Settings(), points=data.points, span=interval_of(data).span)
    most = data.points - MINIMUM_FREEDOM - len(data.shared)
    model = error_model_of(data, data.y, functions=max(MINIMUM_FUNCTIONS, min(functions, most)))
    whitening = model.whitening
    own = whitening.own if isinstance(whitening, SharedErrors) else whitening
    return own.standard_errors, model.sizes


def _on_sizes(sizes: tuple[ErrorSize, ...]) -> tuple[Doubt, ...]:
    if not sizes_disagree(sizes):
        return ()
    return (
        Doubt(
            "sizes-differ",
            "The estimates of the error size differ by more than 20 %. If that from the leftover is the largest, the "
            "data hold structure finer than the resolution, or errors of neighbouring points are correlated; if that "
            "from first differences is, the curve changes too much from point to point for it.",
        ),
    )


def _on_shared(shared: dict[str, float]) -> tuple[Doubt, ...]:
    return tuple(
        Doubt(
            "shared-larger",
            f"The shared error “{name}” is {ratio:.3g} times as large as the errors of the points "
            "(root-mean-square): along its shape the data will hardly tell curves apart.",
        )
        for name, ratio in shared.items()
        if ratio > 1.0
    )
