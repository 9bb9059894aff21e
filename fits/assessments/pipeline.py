"""From rows to the engine and back."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from threadpoolctl import threadpool_limits

from core.measurements.stored_release import data_of
from core.theories.stored_curve import table_of
from core.user_error import UserError
from fits.assessments.context import curve_names
from fits.assessments.detail import detail_document
from fits.assessments.document import result_document
from fits.assessments.models import Assessment
from fits.engine.assess import assess
from fits.engine.data import CurveTable
from fits.engine.refusal import InputRefused
from fits.engine.result import Result
from fits.engine.separation import MOST_CURVES, separations_of
from fits.engine.settings import RadiusKind, Settings, Shrinkage

RADIUS_LEVEL = 0.95


@dataclass(frozen=True)
class Outcome:
    """What an assessment found. `curve_keys` leads from the names in the result back to the rows; `radius` and
    `separations` are kept in fields of their own, for pages that ask many assessments for them."""

    result: dict[str, Any]
    detail: dict[str, Any]
    curve_keys: dict[str, int]
    radius: float | None = None
    separations: dict[str, Any] | None = None


# Sums split over threads come out otherwise rounded: one thread gives the same bits on every machine of a kind.
@threadpool_limits.wrap(limits=1)  # type: ignore[untyped-decorator]
def compute(assessment: Assessment, progress: Callable[[str, float], None]) -> Outcome:
    """Compute an assessment from its rows alone; the same rows give the same bits."""
    progress(Assessment.Stage.READING, 0.0)
    names = curve_names(assessment)
    keys = {name: key for key, name in names.items()}
    curves = [replace(table_of(curve), name=names[curve.pk]) for curve in assessment.curves.order_by("pk")]
    result = _assess(assessment, curves, progress)
    progress(Assessment.Stage.SAVING, 0.0)
    return Outcome(
        result=result_document(result, seed=assessment.seed),
        detail=detail_document(result),
        curve_keys=keys,
        radius=radius_of(result),
        separations=separations_document(result, [keys[curve.name] for curve in curves]),
    )


def radius_of(result: Result) -> float | None:
    """The radius at 95 %, of the kind that was chosen; None where that level was not asked for."""
    kind = result.settings.radius.value
    return next((getattr(radius, kind) for radius in result.ball.radii if radius.level == RADIUS_LEVEL), None)


def separations_document(result: Result, keys: Sequence[int]) -> dict[str, Any] | None:
    """How far its curves, with these keys, are from each other; None where they are too many to keep all pairs."""
    if len(keys) > MOST_CURVES:
        return None
    distances = separations_of([verdict.coordinates for verdict in result.verdicts])
    return {"curves": list(keys), "distances": distances.tolist()}


def fit_and_ball(assessment: Assessment) -> Result:
    """The fit and the ball of an assessment again, to the bit, without judging its curves."""
    return _assess(assessment, [], lambda stage, fraction: None)


def _assess(
    assessment: Assessment, curves: Sequence[CurveTable], progress: Callable[[str, float], None]
) -> Result:
    data = data_of(assessment.release)
    try:
        return assess(
            data,
            curves,
            settings_of(assessment.settings),
            rng=np.random.default_rng(assessment.seed),
            progress=progress,
        )
    except InputRefused as refusal:
        raise user_error(refusal) from refusal


def user_error(refusal: InputRefused) -> UserError:
    """The engine's refusal as the user's error."""
    return UserError(refusal.code, f"{refusal.field}: {refusal.reason}", refusal.remedy)


def settings_of(chosen: Mapping[str, Any]) -> Settings:
    """The engine's settings of an assessment's row."""
    return Settings(
        levels=tuple(chosen["levels"]),
        resolution=chosen["resolution"],
        feature_width=chosen["feature_width"],
        full=chosen["full"],
        shrinkage=Shrinkage(chosen["shrinkage"]),
        draws=chosen["draws"],
        # Older rows were made before there was a choice.
        radius=RadiusKind(chosen.get("radius", RadiusKind.CALIBRATED)),
    )
