"""Two who take the same locks from different ends: neither waits for the other for ever."""

from collections.abc import Callable
from functools import partial
from typing import Any

import pytest
from django.db.models import Manager

from core.errors import UserError
from core.measurements import services
from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve, Theory
from core.theories.services import discard_curve, submit_curve
from fits.assessments.default_settings import default_settings
from fits.assessments.models import Assessment
from fits.assessments.services import request_assessment
from tests.meanwhile import meanwhile
from tests.measurements.sealing import drafted

MAPPED = ["x", "y", "error"]


@pytest.fixture
def at_once(
    monkeypatch: pytest.MonkeyPatch,
) -> Callable[[Manager[Any], Callable[[], object], Callable[[], object]], list[str]]:
    """Does the first; when it is about to lock rows of this kind, the second begins. The second's refusals."""

    def both(locked: Manager[Any], first: Callable[[], object], second: Callable[[], object]) -> list[str]:
        with meanwhile(monkeypatch, locked, "select_for_update", second) as refusals:
            first()
        return refusals

    return both


@pytest.mark.django_db(transaction=True)
def test_who_asks_for_an_assessment_while_the_release_is_withdrawn_gets_it_or_is_told(
    release: Release, curve: Curve, lead: User, at_once: Callable[..., list[str]]
) -> None:
    withdraw = partial(services.withdraw_release, user=lead, release=release, reason="A wrong gauge.")
    ask = partial(
        request_assessment,
        user=lead,
        release=Release.objects.get(),
        curves=[curve],
        settings=default_settings(),
        seed=1,
    )
    refusals = at_once(Release.objects, withdraw, ask)
    assert Release.objects.get().is_withdrawn
    assert refusals == ([] if Assessment.objects.exists() else ["release-withdrawn"])


@pytest.mark.django_db(transaction=True)
def test_a_draft_that_is_discarded_while_it_is_published_is_one_or_the_other(
    measurement: Measurement, lead: User, at_once: Callable[..., list[str]]
) -> None:
    draft = drafted(measurement, lead)
    discard = partial(services.discard_release, Release.objects.get(), lead)
    refused: list[str] = []

    def publish() -> None:
        try:
            services.publish_release(draft, lead)
        except UserError as error:
            refused.append(error.code)

    refusals = at_once(Release.objects, publish, discard)
    assert refused + refusals == ["not-a-draft"]
    assert Release.objects.exists() == (refused == [])


@pytest.mark.django_db(transaction=True)
def test_a_curve_that_is_discarded_while_it_is_submitted_is_one_or_the_other(
    curve: Curve, at_once: Callable[..., list[str]]
) -> None:
    Curve.objects.filter(pk=curve.pk).update(state=Curve.State.DRAFT, version=None, submitted_at=None)
    refused: list[str] = []

    def submit() -> None:
        try:
            submit_curve(Curve.objects.get())
        except UserError as error:
            refused.append(error.code)

    refusals = at_once(Theory.objects, submit, partial(discard_curve, Curve.objects.get()))
    assert refused + refusals == ["not-a-draft"]
    assert Curve.objects.exists() == (refused == [])
