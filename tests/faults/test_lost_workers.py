"""Workers and brokers that die in the middle."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from django.conf import settings

from core import broker
from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.services import cancel_assessment, request_assessment
from tests.assessments.conftest import SETTINGS
from tests.real_processes import kill_group, real_worker, wait_until_ready
from tests.waiting import wait_until

pytestmark = pytest.mark.django_db(transaction=True)
GATED = "tests.faults.gated_worker"
Status = Assessment.Status


@pytest.fixture
def redis() -> Iterator[broker.Broker]:
    """A Redis of this test's own, empty."""
    for left in settings.HOME.glob("appendonly*"):
        for file in left.iterdir() if left.is_dir() else [left]:
            file.unlink()
    settings.HOME.joinpath("dump.rdb").unlink(missing_ok=True)
    found = broker.find_or_start()
    assert found.child, "a Redis of somebody else's is running in the home of the tests"
    yield found
    found.child.end()


def ask(user: User, release: Release, curve: Curve) -> Assessment:
    return request_assessment(user=user, release=release, curves=[curve], settings=SETTINGS, seed=1)


def wait_for(row: Assessment | FeaturePart | FeatureSearch, status: str) -> None:
    def reached() -> bool:
        row.refresh_from_db()
        return row.status == status

    wait_until(reached, seconds=60.0, what=f"{row} is {status}")


def test_another_worker_finishes_what_a_killed_one_began(
    redis: broker.Broker, member: User, release: Release, curve: Curve, tmp_path: Path
) -> None:
    gate = tmp_path / "gate"
    with real_worker(tmp_path / "first.log", app=GATED, GATE=str(gate)) as first:
        assessment = ask(member, release, curve)
        wait_for(assessment, Status.RUNNING)
        kill_group(first)
    gate.touch()
    with real_worker(tmp_path / "second.log", app=GATED, GATE=str(gate)):
        wait_for(assessment, Status.DONE)
    assert assessment.attempt == 2
    assert assessment.verdicts.count() == 1


def test_a_running_assessment_is_cancelled_between_batches(
    redis: broker.Broker, member: User, release: Release, curve: Curve, tmp_path: Path
) -> None:
    with real_worker(tmp_path / "worker.log", app=GATED, GATE=str(tmp_path / "never")):
        assessment = ask(member, release, curve)
        wait_for(assessment, Status.RUNNING)
        cancel_assessment(assessment, by=assessment.requested_by)
        wait_for(assessment, Status.CANCELLED)


def test_another_worker_finishes_the_part_of_a_search_that_a_killed_one_began(
    redis: broker.Broker, member: User, release: Release, curve: Curve, tmp_path: Path
) -> None:
    gate, part_gate = tmp_path / "gate", tmp_path / "part_gate"
    gate.touch()
    gates = {"GATE": str(gate), "PART_GATE": str(part_gate)}
    with real_worker(tmp_path / "first.log", app=GATED, **gates) as first:
        assessment = ask(member, release, curve)
        wait_for(assessment, Status.DONE)
        plan = assessment.feature_searches.get().parts.get()
        wait_for(plan, Status.RUNNING)
        kill_group(first)
    part_gate.touch()
    with real_worker(tmp_path / "second.log", app=GATED, **gates):
        wait_for(assessment.feature_searches.get(), Status.DONE)
    plan.refresh_from_db()
    assert plan.attempt == 2
    assert plan.search.parts.count() == 6


def test_what_was_asked_for_while_redis_was_away_still_ends(
    redis: broker.Broker, member: User, release: Release, curve: Curve, tmp_path: Path
) -> None:
    gate = tmp_path / "gate"
    gate.touch()
    log = tmp_path / "worker.log"
    with real_worker(log, app=GATED, GATE=str(gate)) as worker:
        wait_until_ready(worker, log)
        assert redis.child
        redis.child.process.kill()
        redis.child.process.wait()
        assessment = ask(member, release, curve)
        restarted = broker.find_or_start()
        assert restarted.child
        try:
            wait_for(assessment, Status.DONE)
        finally:
            restarted.child.end()
