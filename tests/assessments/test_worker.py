"""The real worker, from queue to verdicts."""

import hashlib
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from django.utils import timezone

from core import broker
from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.services import request_assessment
from tests.assessments.conftest import SETTINGS
from tests.assessments.searching import COARSE, clear_release
from tests.conftest import npy, power
from tests.real_processes import real_worker, wait_until_ready
from tests.waiting import wait_until

pytestmark = pytest.mark.django_db(transaction=True)

POINTS = 1000
CURVES = 20


@pytest.fixture
def idle_worker(db: None, tmp_path: Path) -> Iterator[None]:
    """A worker that waits for work."""
    found = broker.find_or_start()
    log = tmp_path / "worker.log"
    with real_worker(log) as worker:
        wait_until_ready(worker, log)
        yield
    if found.child:
        found.child.end()


@pytest.fixture
def large_release(measurement: Measurement, lead: User) -> Release:
    x = np.linspace(0.5, 4.5, POINTS)
    noise = np.random.default_rng(2).normal(0.0, 0.1, POINTS)
    content = npy(np.column_stack([x, power(x) + noise, np.full(POINTS, 0.1)]))
    return Release.objects.create(
        measurement=measurement,
        number=1,
        state=Release.State.PUBLISHED,
        table=content,
        lines=npy(np.arange(POINTS)),
        columns=[{"header": role, "role": role} for role in ("x", "y", "error")],
        file_name="large.csv",
        file_sha256=hashlib.sha256(content).hexdigest(),
        points=POINTS,
        created_by=lead,
        published_at=timezone.now(),
    )


@pytest.fixture
def many_curves(theory: Theory, measurement: Measurement, member: User) -> list[Curve]:
    x = np.linspace(0.4, 4.6, 400)
    curves = []
    for version in range(1, CURVES + 1):
        content = npy(np.column_stack([x, power(x) * (1.0 + 0.01 * version)]))
        curves.append(
            Curve.objects.create(
                theory=theory,
                measurement=measurement,
                version=version,
                state=Curve.State.SUBMITTED,
                table=content,
                file_name="curve.csv",
                file_sha256=hashlib.sha256(content).hexdigest(),
                points=x.size,
                x_min=float(x[0]),
                x_max=float(x[-1]),
                submitted_by=member,
                submitted_at=timezone.now(),
            )
        )
    return curves


def test_a_thousand_points_and_twenty_curves_end_within_two_seconds(
    idle_worker: None, large_release: Release, many_curves: list[Curve], member: User
) -> None:
    assessment = request_assessment(
        user=member, release=large_release, curves=many_curves, settings=SETTINGS, seed=1
    )

    def ended() -> bool:
        assessment.refresh_from_db()
        return assessment.has_ended

    wait_until(ended, seconds=60.0, what="the assessment has ended")
    assert assessment.status == Assessment.Status.DONE, assessment.failure
    assert assessment.verdicts.count() == CURVES
    assert assessment.ended_at is not None
    taken = (assessment.ended_at - assessment.created_at).total_seconds()
    assert taken < 2.0, f"it took {taken:.2f} s"


def test_features_follow_the_verdicts_part_by_part(
    idle_worker: None, release: Release, curve: Curve, member: User
) -> None:
    assessment = request_assessment(
        user=member, release=clear_release(release), curves=[curve], settings=COARSE, seed=1
    )

    def ended() -> bool:
        search = assessment.feature_searches.first()
        return search is not None and search.has_ended

    wait_until(ended, seconds=60.0, what="the features are found")
    search = assessment.feature_searches.get()
    assert search.status == FeatureSearch.Status.DONE, [part.failure for part in search.parts.all()]
    assert {part.kind for part in search.parts.all()} == set(FeaturePart.Kind)
    assessment.refresh_from_db()
    assert assessment.ended_at is not None
    for part in search.parts.all():
        assert part.attempt == 1
        assert part.started_at is not None
        assert part.started_at >= assessment.ended_at
