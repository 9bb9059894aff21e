"""From rows to the engine and back."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from core.measurements.models import Release
from core.measurements.reading.release import release_data
from core.measurements.reading.stored import from_bytes
from core.measurements.reading.table import Table
from core.theories.models import Curve
from core.user_error import UserError
from fits.assessments.context import curve_names
from fits.assessments.detail import detail_document
from fits.assessments.document import result_document
from fits.assessments.models import Assessment
from fits.engine.assess import assess
from fits.engine.data import Axis, CurveTable, Data, validated_curve
from fits.engine.refusal import InputRefused
from fits.engine.settings import Settings, Shrinkage


@dataclass(frozen=True)
class Outcome:
    """What an assessment found. `curve_keys` leads from the names in the result back to the rows."""

    result: dict[str, Any]
    detail: dict[str, Any]
    curve_keys: dict[str, int]


def compute(assessment: Assessment, progress: Callable[[str, float], None]) -> Outcome:
    """Compute an assessment from its rows alone; the same rows give the same bits."""
    progress(Assessment.Stage.READING, 0.0)
    names = curve_names(assessment)
    curves = [curve_of(curve, names[curve.pk]) for curve in assessment.curves.order_by("pk")]
    data = data_of(assessment.release)
    try:
        result = assess(
            data,
            curves,
            settings_of(assessment.settings),
            rng=np.random.default_rng(assessment.seed),
            progress=progress,
        )
    except InputRefused as refusal:
        raise UserError(refusal.code, f"{refusal.field}: {refusal.reason}", refusal.remedy) from refusal
    progress(Assessment.Stage.SAVING, 0.0)
    return Outcome(
        result=result_document(result, seed=assessment.seed),
        detail=detail_document(result),
        curve_keys={name: key for key, name in names.items()},
    )


def settings_of(chosen: Mapping[str, Any]) -> Settings:
    """The engine's settings of an assessment's row."""
    return Settings(
        levels=tuple(chosen["levels"]),
        resolution=chosen["resolution"],
        feature_width=chosen["feature_width"],
        full=chosen["full"],
        shrinkage=Shrinkage(chosen["shrinkage"]),
        draws=chosen["draws"],
    )


def data_of(release: Release) -> Data:
    """A release's stored table as data for the engine."""
    columns = release.columns
    table = Table(
        file_name=release.file_name,
        headers=tuple(column["header"] for column in columns),
        values=from_bytes(release.table),
        lines=from_bytes(release.lines),
    )
    covariance = None if release.covariance is None else from_bytes(release.covariance)
    return release_data(
        table,
        [column["role"] for column in columns],
        axis=Axis(release.measurement.axis),
        covariance=covariance,
        covariance_name=release.covariance_name,
    )


def curve_of(curve: Curve, name: str) -> CurveTable:
    """A curve's stored table."""
    table = from_bytes(curve.table)
    return validated_curve(name, table[:, 0], table[:, 1])
