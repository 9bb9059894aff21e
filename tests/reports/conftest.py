"""Results to show: a computed one of an invented lake, and the rows that pages need."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from django.utils import timezone

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments import pipeline
from fits.assessments.detail import detail_document
from fits.assessments.document import result_document
from fits.assessments.models import Assessment
from fits.engine import VERSION
from fits.engine.assess import assess
from fits.engine.data import validated_curve, validated_data
from fits.engine.settings import Settings
from fits.reports.models import Report
from fits.reports.services import create_report
from fits.reports.snapshot import Snapshot
from tests.conftest import power
from tests.reports.features_case import with_features

SETTINGS: dict[str, Any] = {
    "levels": [0.67, 0.9, 0.95, 0.99],
    "resolution": None,
    "feature_width": None,
    "full": False,
    "shrinkage": "monotone",
    "draws": 500,
}
NAMES = ("Parabolic floor", "Flat floor", "Two joined basins")
LABELS = {"x_label": "frequency (cycles per hour)", "y_label": "power (mm²)", "x_unit": "cycles per hour"}


@pytest.fixture(scope="session")
def computed() -> Snapshot:
    """Three curves on 120 points: the true one, one with its peaks moved, one a little low everywhere."""
    x = np.linspace(0.5, 4.5, 120)
    noise = np.random.default_rng(3).normal(0.0, 0.1, x.size)
    data = validated_data(x, power(x) + noise, errors=np.full(x.size, 0.1))
    grid = np.linspace(0.4, 4.7, 300)
    values = (power(grid), power(grid * 1.08), power(grid) - 0.02)
    curves = [validated_curve(name, grid, y) for name, y in zip(NAMES, values, strict=True)]
    found = assess(data, curves, Settings(draws=500), rng=np.random.default_rng(1))
    context = {
        "collaboration": "Lake Merrow survey",
        "measurement": {"name": "Surface seiche power", "about": "Invented.", "axis": "linear", **LABELS},
        "release": {"number": 3, "file_name": "merrow-3.csv", "file_sha256": "ab" * 32, "points": 120},
        "curves": [{"name": name, "theory": name, "version": 1, "file_name": "curve.csv"} for name in NAMES],
        "settings": SETTINGS,
        "recompute": "python manage.py recompute 12",
    }
    return Snapshot(result_document(found, seed=1), detail_document(found), context)


@pytest.fixture(scope="session")
def featured() -> Snapshot:
    """Two curves on three peaks, with features."""
    snapshot: Snapshot = with_features()
    return snapshot


Verdicts = dict[str, tuple[float, bool, bool]]


@pytest.fixture(scope="session")
def told(computed: Snapshot) -> Callable[..., Snapshot]:
    """Makes a snapshot with given verdicts, name → (distance, inside, in the scale set), the same at each level."""

    def tell(verdicts: Verdicts, *, settled: bool = True, theories: bool = True) -> Snapshot:
        curves = []
        for rank, (name, (distance, inside, broad)) in enumerate(verdicts.items(), start=1):
            each = dict.fromkeys(("0.67", "0.9", "0.95", "0.99"), inside)
            sets = {kind: dict(each) for kind in ("exact", "published", "calibrated")}
            sets["scales"] = dict.fromkeys(each, broad)
            first = computed.curves[0]
            curves.append(first | {"name": name, "rank": rank, "distance": distance, "inside": sets})
        pairs = [
            {"first": first, "second": second, "settled": settled}
            for first, second in zip(list(verdicts), list(verdicts)[1:], strict=False)
        ]
        origins = [{"name": name, "theory": name if theories else None} for name in verdicts]
        return Snapshot(
            {**computed.result, "curves": curves},
            {**computed.detail, "neighbours": pairs},
            {**computed.context, "curves": origins},
        )

    return tell


@pytest.fixture
def done(member: User, release: Release, curve: Curve) -> Assessment:
    """An assessment of one curve, computed."""
    assessment = Assessment.objects.create(
        release=release, settings=SETTINGS, seed=1, fingerprint="f" * 64, requested_by=member
    )
    assessment.curves.set([curve])
    outcome = pipeline.compute(assessment, lambda stage, share: None)
    assessment.result, assessment.detail = outcome.result, outcome.detail
    assessment.status, assessment.stage = Assessment.Status.DONE, Assessment.Stage.ENDED
    assessment.ended_at, assessment.engine_version = timezone.now(), VERSION
    assessment.save()
    return assessment


@pytest.fixture
def report(lead: User, done: Assessment) -> Report:
    """A report on it."""
    return create_report(
        user=lead, assessment=done, title="What the first release says", words="Calm & clear."
    )
