"""One part of a search from claim to end, whatever happens on the way."""

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.conf import settings
from django.db import connection
from django.utils import timezone

from core.errors import UserError
from fits.assessments import feature_parts, leases, searches, tasks
from fits.assessments.job import Job
from fits.assessments.leases import Lease
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.tasks import run_feature_part
from fits.engine.refusal import InputRefused
from tests.assessments.conftest import outcome_of
from tests.assessments.searching import plan_of

Status = FeaturePart.Status
Compute = Callable[[FeaturePart, Callable[[], None]], object]
MADE_UP_PLAN = {"windows": {"peak": [[1.0, 2.0]], "dip": []}, "theories": []}


@pytest.fixture
def plan(queued: Assessment, computed: list[int]) -> FeaturePart:
    """The plan of an assessment's own features, waiting."""
    tasks.run_assessment(queued.pk)
    queued.refresh_from_db()
    assert queued.result == outcome_of(queued).result
    return plan_of(queued.feature_searches.get())


@pytest.fixture
def compute_part_as(monkeypatch: pytest.MonkeyPatch) -> Callable[[Compute], None]:
    """Puts another computation in the place of the engine's."""
    return lambda compute: monkeypatch.setattr(feature_parts, "compute", compute)


@pytest.fixture
def found(compute_part_as: Callable[[Compute], None]) -> list[int]:
    """The keys of the parts that were computed, by a stand-in that succeeds."""
    keys: list[int] = []

    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        keys.append(part.pk)
        return MADE_UP_PLAN if part.kind == "plan" else None

    compute_part_as(compute)
    return keys


@pytest.fixture
def sent(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """The keys of the parts that were enqueued, with a broker that takes them."""
    keys: list[int] = []

    def enqueue(jobs: type[Job], pk: int) -> bool:
        assert jobs is FeaturePart
        keys.append(pk)
        return True

    monkeypatch.setattr(tasks, "enqueue", enqueue)
    return keys


def let_the_lease_end(part: FeaturePart) -> None:
    """As if its worker had been silent for longer than the lease."""
    silent = timezone.now() - timedelta(seconds=settings.ASSESSMENT_LEASE_SECONDS + 1)
    FeaturePart.objects.filter(pk=part.pk).update(heartbeat_at=silent)


def test_a_part_is_given_once(plan: FeaturePart) -> None:
    assert leases.take(FeaturePart, plan.pk) == Lease(FeaturePart, plan.pk, 1)
    assert leases.take(FeaturePart, plan.pk) is None


def test_a_second_delivery_of_a_plan_plans_nothing_twice(plan: FeaturePart, found: list[int]) -> None:
    run_feature_part(plan.pk)
    run_feature_part(plan.pk)
    assert found == [plan.pk]
    assert plan.search.parts.count() == 6


def test_a_second_delivery_during_the_first_computes_nothing(
    plan: FeaturePart, compute_part_as: Callable[[Compute], None]
) -> None:
    computations: list[int] = []

    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        computations.append(part.pk)
        run_feature_part(part.pk)
        return MADE_UP_PLAN

    compute_part_as(compute)
    run_feature_part(plan.pk)
    plan.refresh_from_db()
    assert (computations, plan.attempt, plan.status) == ([plan.pk], 1, Status.DONE)


def test_a_superseded_plan_starts_nothing(
    plan: FeaturePart, compute_part_as: Callable[[Compute], None]
) -> None:
    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        let_the_lease_end(part)
        leases.take(FeaturePart, part.pk)
        return MADE_UP_PLAN

    compute_part_as(compute)
    run_feature_part(plan.pk)
    plan.refresh_from_db()
    assert (plan.status, plan.attempt, plan.result) == (Status.RUNNING, 2, None)
    assert plan.search.parts.count() == 1


def test_the_look_is_its_heartbeat(plan: FeaturePart, compute_part_as: Callable[[Compute], None]) -> None:
    moments: list[object] = []

    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        let_the_lease_end(part)
        look()
        moments.append(FeaturePart.objects.filter(leases.ended(), pk=part.pk).exists())
        return MADE_UP_PLAN

    compute_part_as(compute)
    run_feature_part(plan.pk)
    assert moments == [False]


@pytest.mark.parametrize(
    ("error", "code"),
    [
        (UserError("other-engine", "made by another engine", "Assess again"), "other-engine"),
        (InputRefused("window-narrow", "window", "holds 1 grid point"), "window-narrow"),
        (ZeroDivisionError("inner matters"), "fault"),
    ],
)
def test_a_failure_keeps_its_code_and_a_sentence_and_ends_the_search(
    plan: FeaturePart, compute_part_as: Callable[[Compute], None], error: Exception, code: str
) -> None:
    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        raise error

    compute_part_as(compute)
    run_feature_part(plan.pk)
    plan.refresh_from_db()
    assert (plan.status, plan.failure_code) == (Status.FAILED, code)
    assert plan.failure
    assert "inner matters" not in plan.failure
    assert FeatureSearch.objects.get(pk=plan.search_id).status == Status.FAILED


def test_a_failed_part_leaves_the_assessment_done(
    plan: FeaturePart, compute_part_as: Callable[[Compute], None]
) -> None:
    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        raise ZeroDivisionError

    compute_part_as(compute)
    run_feature_part(plan.pk)
    assert Assessment.objects.get().status == Status.DONE


def test_a_part_that_nobody_picked_up_is_enqueued_again(plan: FeaturePart, sent: list[int]) -> None:
    tasks.sweep()
    assert sent == []
    asked = timezone.now() - timedelta(seconds=settings.ASSESSMENT_PICK_UP_SECONDS + 1)
    FeaturePart.objects.filter(pk=plan.pk).update(created_at=asked)
    tasks.sweep()
    tasks.sweep()
    assert sent == [plan.pk]


def test_a_part_whose_worker_was_lost_is_enqueued_again(plan: FeaturePart, sent: list[int]) -> None:
    leases.take(FeaturePart, plan.pk)
    tasks.sweep()
    assert sent == []
    let_the_lease_end(plan)
    tasks.sweep()
    assert sent == [plan.pk]


def test_after_the_last_attempt_part_and_search_fail_with_a_reason(
    plan: FeaturePart, sent: list[int]
) -> None:
    for _ in range(settings.ASSESSMENT_MAX_ATTEMPTS):
        assert leases.take(FeaturePart, plan.pk) is not None
        let_the_lease_end(plan)
    tasks.sweep()
    plan.refresh_from_db()
    assert (plan.status, plan.failure_code, sent) == (Status.FAILED, "lost-worker", [])
    assert FeatureSearch.objects.get(pk=plan.search_id).status == Status.FAILED


def test_a_search_whose_last_worker_died_before_settling_it_is_settled(
    plan: FeaturePart, sent: list[int]
) -> None:
    plan.search.parts.update(status=Status.DONE)
    tasks.sweep()
    assert FeatureSearch.objects.get(pk=plan.search_id).status == Status.DONE


def test_a_search_whose_last_part_fails_while_it_is_settled_is_not_called_done(plan: FeaturePart) -> None:
    def fail_after_first_look(execute: Any, sql: str, params: Any, many: bool, context: Any) -> Any:
        answer = execute(sql, params, many, context)
        if sql.startswith("UPDATE") and "SET" in sql.partition("featuresearch")[2]:
            FeaturePart.objects.filter(pk=plan.pk).update(status=Status.FAILED)
        return answer

    with connection.execute_wrapper(fail_after_first_look):
        searches.settle()
    plan.refresh_from_db()
    assert plan.status == Status.FAILED
    searches.settle()
    assert FeatureSearch.objects.get(pk=plan.search_id).status == Status.FAILED
