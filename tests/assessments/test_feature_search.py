"""Asking for features, planning them, cancelling them."""

from collections.abc import Callable

import pytest
from django.db import IntegrityError, transaction
from pytest_django import DjangoCaptureOnCommitCallbacks

from core.errors import UserError
from core.measurements.models import Release
from core.people.models import LogEntry, User
from core.theories.models import Curve
from fits.assessments import feature_parts, searches
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.assessments.services import cancel_features, request_assessment, request_features
from fits.assessments.tasks import run_assessment, run_feature_part
from tests.assessments.searching import COARSE, clear_release, finished, plan_of, run_all, run_plan

Status = FeatureSearch.Status
Kind = FeaturePart.Kind
Ask = Callable[..., FeatureSearch]


@pytest.fixture
def queued(member: User, release: Release, curve: Curve) -> Assessment:
    """An assessment of data that demand two peaks."""
    return request_assessment(
        user=member, release=clear_release(release), curves=[curve], settings=COARSE, seed=1
    )


@pytest.fixture
def done(queued: Assessment) -> Assessment:
    return finished(queued)


@pytest.fixture
def ask(done: Assessment, member: User) -> Ask:
    def asking(*windows: tuple[float, float]) -> FeatureSearch:
        return request_features(user=member, assessment=done, windows=windows)

    return asking


def test_a_finished_assessment_has_its_own_features_sought(done: Assessment) -> None:
    search = done.feature_searches.get()
    assert (search.status, search.windows, search.requested_by) == (Status.QUEUED, [], done.requested_by)
    assert [part.kind for part in search.parts.all()] == ["plan"]


def test_an_assessment_without_features_has_none(member: User, release: Release, curve: Curve) -> None:
    settings = COARSE | {"features": False}
    asked = request_assessment(user=member, release=release, curves=[curve], settings=settings, seed=1)
    assert not finished(asked).feature_searches.exists()


def test_asking_again_with_features_adds_them_to_the_same_assessment(
    member: User, release: Release, curve: Curve
) -> None:
    def ask(features: bool) -> Assessment:
        settings = COARSE | {"features": features}
        return request_assessment(user=member, release=release, curves=[curve], settings=settings, seed=1)

    first = finished(ask(features=False))
    assert ask(features=True) == first
    assert first.feature_searches.count() == 1


def test_features_asked_for_while_it_runs_are_sought_at_its_end(
    member: User, release: Release, curve: Curve
) -> None:
    asked = request_assessment(
        user=member, release=release, curves=[curve], settings=COARSE | {"features": False}, seed=1
    )
    request_assessment(user=member, release=release, curves=[curve], settings=COARSE, seed=1)
    assert finished(asked).feature_searches.count() == 1


def test_the_plan_leads_to_one_part_for_each_window_and_question(ask: Ask) -> None:
    search = ask()
    run_plan(search)
    search.refresh_from_db()
    assert search.status == Status.RUNNING
    assert plan_of(search).status == Status.DONE
    kinds = list(search.parts.values_list("kind", flat=True))
    assert kinds[:3] == ["plan", "count", "dip_count"]
    assert kinds[-2:] == ["spacing", "harmonic"]
    # Two resonances and a ripple of the noise at two standard errors, with the dips between.
    assert (kinds.count("peak"), kinds.count("dip")) == (3, 3)
    assert all(part.window for part in search.parts.filter(kind=Kind.PEAK))


def test_given_windows_are_where_peaks_are_sought_and_dips_where_the_fit_is_lowest_inside(ask: Ask) -> None:
    search = ask((1.8, 2.8), (0.8, 2.0))
    run_plan(search)
    peaks, dips = ([part.window for part in search.parts.filter(kind=kind)] for kind in ("peak", "dip"))
    step = 4.0 / 200
    assert peaks == [pytest.approx([0.8, 2.0], abs=step), pytest.approx([1.8, 2.8], abs=step)]
    assert dips == peaks[1:]


def test_each_part_is_a_message_of_its_own_once_the_plan_is_committed(
    ask: Ask,
    monkeypatch: pytest.MonkeyPatch,
    django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks,
) -> None:
    sent: list[int] = []
    monkeypatch.setattr(searches, "enqueue", lambda jobs, pk: sent.append(pk))
    with django_capture_on_commit_callbacks(execute=True):
        search = ask((1.0, 2.0))
    assert sent == [plan_of(search).pk]
    with django_capture_on_commit_callbacks(execute=True):
        run_plan(search)
        assert len(sent) == 1
    assert sent == list(search.parts.values_list("pk", flat=True))


def test_a_search_whose_parts_are_all_done_is_done(ask: Ask) -> None:
    search = ask()
    run_all(search)
    assert search.status == Status.DONE
    assert not search.parts.exclude(status=Status.DONE).exists()


def test_one_failed_part_fails_the_search_and_leaves_the_others(
    ask: Ask, monkeypatch: pytest.MonkeyPatch
) -> None:
    search = ask()
    run_plan(search)

    def refuse(*_: object) -> None:
        raise UserError("too-narrow", "nothing fits in there", "Widen it")

    monkeypatch.setitem(feature_parts._COMPUTED_BY, Kind.DIP, refuse)
    run_all(search)
    assert search.status == Status.FAILED
    for part in search.parts.all():
        assert part.status == (Status.FAILED if part.kind == Kind.DIP else Status.DONE)
    failed = search.parts.filter(kind=Kind.DIP)[0]
    assert failed.failure_code == "too-narrow"
    assert "Widen it" in failed.failure


@pytest.mark.parametrize(
    ("window", "code"),
    [
        ((2.0, 1.0), "window-reversed"),
        ((1.0, 1.0), "window-reversed"),
        ((float("nan"), 2.0), "window-reversed"),
        ((0.1, 2.0), "window-outside"),
        ((1.0, float("inf")), "window-outside"),
        ((1.0, 1.01), "window-narrow"),
    ],
)
def test_bad_windows_are_refused_with_a_reason(ask: Ask, window: tuple[float, float], code: str) -> None:
    searches_before = FeatureSearch.objects.count()
    with pytest.raises(UserError) as refused:
        ask((1.0, 2.0), window)
    assert refused.value.code == code
    assert refused.value.remedy
    assert FeatureSearch.objects.count() == searches_before


def test_more_than_fifty_windows_are_refused(ask: Ask) -> None:
    with pytest.raises(UserError) as refused:
        ask(*[(1.0, 2.0)] * 51)
    assert refused.value.code == "too-many-windows"


def test_the_grid_of_the_result_is_the_one_on_which_features_are_sought(done: Assessment) -> None:
    assert done.result is not None
    assert feature_parts.feature_case_of(done).space.grid.tolist() == done.result["fit"]["x"]


def test_an_unfinished_assessment_has_no_features(queued: Assessment, member: User) -> None:
    with pytest.raises(UserError) as refused:
        request_features(user=member, assessment=queued)
    assert refused.value.code == "assessment-not-done"


def test_another_engines_assessment_is_refused(done: Assessment, member: User) -> None:
    done.engine_version = "0.9"
    with pytest.raises(UserError) as refused:
        request_features(user=member, assessment=done)
    assert refused.value.code == "other-engine"


def test_too_fine_a_resolution_is_refused(ask: Ask, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(feature_parts, "MOST_FUNCTIONS", 10)
    search = ask()
    run_plan(search)
    search.refresh_from_db()
    assert (search.status, plan_of(search).failure_code) == (Status.FAILED, "too-many-functions")


def test_the_same_windows_are_searched_once(ask: Ask) -> None:
    assert ask((1.0, 2.0), (2.5, 3.5)) == ask((2.5, 3.5), (1, 2))
    assert ask((1.0, 2.0)) != ask((1.0, 2.1))


@pytest.mark.parametrize("status", [Status.FAILED, Status.CANCELLED])
def test_what_failed_or_was_cancelled_may_be_sought_again(ask: Ask, status: str) -> None:
    first = ask()
    FeatureSearch.objects.filter(pk=first.pk).update(status=status)
    assert ask() != first


def test_the_database_itself_refuses_a_second_search(ask: Ask) -> None:
    search = ask()
    search.pk = None
    with pytest.raises(IntegrityError), transaction.atomic():
        search.save(force_insert=True)


def test_cancelling_ends_what_waits_and_asks_what_runs_to_end(
    ask: Ask, monkeypatch: pytest.MonkeyPatch
) -> None:
    search = ask()
    run_plan(search)
    running = search.parts.get(kind=Kind.SPACING)

    def compute(part: FeaturePart, look: Callable[[], None]) -> None:
        cancel_features(search, by=search.requested_by)
        look()

    monkeypatch.setattr(feature_parts, "compute", compute)
    run_feature_part(running.pk)
    running.refresh_from_db()
    assert (search.status, running.status, running.result) == (Status.CANCELLED, Status.CANCELLED, None)
    assert not search.parts.filter(status__in=FeaturePart.LIVING).exists()


def test_a_plan_that_ends_after_cancelling_starts_nothing(ask: Ask, monkeypatch: pytest.MonkeyPatch) -> None:
    search = ask()
    real = feature_parts.compute

    def compute(part: FeaturePart, look: Callable[[], None]) -> object:
        found: object = real(part, look)
        cancel_features(search, by=search.requested_by)
        return found

    monkeypatch.setattr(feature_parts, "compute", compute)
    run_plan(search)
    search.refresh_from_db()
    assert search.status == Status.CANCELLED
    assert [part.status for part in search.parts.all()] == [Status.CANCELLED]


def test_cancelling_a_finished_search_changes_nothing(ask: Ask) -> None:
    search = ask()
    run_all(search)
    cancel_features(search, by=search.requested_by)
    assert search.status == Status.DONE


def test_a_search_that_cannot_start_leaves_the_assessment_running(
    queued: Assessment, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Result and search are saved together or not at all, so that neither is lost with its worker."""

    def break_down(search: FeatureSearch) -> None:
        raise RuntimeError("the worker is killed")

    monkeypatch.setattr(searches, "begin", break_down)
    run_assessment(queued.pk)
    queued.refresh_from_db()
    assert (queued.status, queued.failure_code, queued.result) == (Status.FAILED, "fault", None)
    assert not queued.feature_searches.exists()


def test_the_log_tells_once_who_asked_for_features_and_who_cancelled(ask: Ask, lead: User) -> None:
    search = ask((1.0, 2.0))
    ask((1.0, 2.0))
    for _ in range(2):
        cancel_features(search, by=lead)
    entries = LogEntry.objects.filter(deed__contains="features").order_by("pk")
    assert [(entry.deed, entry.who) for entry in entries] == [
        ("asked_features", search.requested_by),
        ("cancelled_features", lead),
    ]
