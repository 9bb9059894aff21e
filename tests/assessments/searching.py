"""Finished assessments with features, computed by the tasks as the workers do, one after another."""

import hashlib

import numpy as np

from core.measurements.models import Release
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.tasks import run_assessment, run_feature_part
from tests.assessments.conftest import SETTINGS
from tests.conftest import npy, power

CLEAR_ERROR = 0.02
# Small enough to be quick.
COARSE = SETTINGS | {"resolution": 14, "draws": 400}


def clear_table() -> "np.ndarray[tuple[int, ...], np.dtype[np.float64]]":
    """60 points of the true spectrum, precise enough to demand its two peaks; columns x, y, error."""
    x = np.linspace(0.5, 4.5, 60)
    noise = np.random.default_rng(2).normal(0.0, CLEAR_ERROR, x.size)
    return np.column_stack([x, power(x) + noise, np.full(x.size, CLEAR_ERROR)])


def clear_release(first: Release) -> Release:
    """Release 2 of the same measurement."""
    table = clear_table()
    content = npy(table)
    return Release.objects.create(
        measurement=first.measurement,
        number=2,
        state=Release.State.PUBLISHED,
        table=content,
        lines=npy(np.arange(2, len(table) + 2)),
        columns=first.columns,
        file_name="merrow-2.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=len(table),
        created_by=first.created_by,
        published_at=first.published_at,
    )


def finished(assessment: Assessment) -> Assessment:
    """Computed by the real engine."""
    run_assessment(assessment.pk)
    assessment.refresh_from_db()
    assert assessment.status == Assessment.Status.DONE, assessment.failure
    return assessment


def plan_of(search: FeatureSearch) -> FeaturePart:
    return search.parts.get(kind=FeaturePart.Kind.PLAN)


def run_plan(search: FeatureSearch) -> None:
    run_feature_part(plan_of(search).pk)


def run_all(search: FeatureSearch) -> None:
    """The plan and then everything that it led to."""
    run_plan(search)
    for part in search.parts.filter(status=FeaturePart.Status.QUEUED):
        run_feature_part(part.pk)
    search.refresh_from_db()
