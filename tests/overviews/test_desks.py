"""The leads' page of all desks."""

import csv
from collections.abc import Callable
from datetime import datetime

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.measurements.models import EarlyLook, Measurement, Release
from core.people.models import Collaboration, Role, User
from core.theories.models import Curve
from fits.overviews.desks import Desk, desks_page
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


@pytest.fixture
def student(make: Maker) -> User:
    return make.student("Ada Able")


@pytest.fixture
def own(make: Maker, measurement: Measurement, student: User) -> Curve:
    """A curve at the student's desk."""
    return make.curve(make.theory("Flat floor", student), measurement, by=student)


def listed(collaboration: Collaboration, reader: User, **chosen: str) -> dict[str, Desk]:
    return {str(desk.student): desk for desk in desks_page(collaboration, reader, chosen).desks}


def test_every_student_is_listed_also_without_submissions(
    own: Curve, make: Maker, collaboration: Collaboration, lead: User
) -> None:
    make.student("Bo Brief")
    desks = listed(collaboration, lead)
    assert list(desks) == ["Ada Able", "Bo Brief"]
    assert [submission.curve for submission in desks["Ada Able"].submissions] == [own]
    assert desks["Bo Brief"].submissions == ()


def test_what_is_shared_and_what_is_a_draft_is_not_listed(
    curve: Curve, own: Curve, make: Maker, collaboration: Collaboration, lead: User
) -> None:
    make.curve(own.theory, own.measurement, version=None)
    page = desks_page(collaboration, lead, {})
    assert (page.submitted, page.empty) == (1, 0)


def test_the_newest_verdict_counts(
    own: Curve,
    make: Maker,
    release: Release,
    collaboration: Collaboration,
    lead: User,
    ago: Callable[[int], datetime],
) -> None:
    make.assessment(release, {own: 0.4}, ended_at=ago(3))
    newest = make.assessment(release, {own: 0.01}, ended_at=ago(1))
    make.assessment(release, {own: 0.4}, ended_at=ago(2))
    (submission,) = listed(collaboration, lead)["Ada Able"].submissions
    assert submission.verdict is not None
    assert (submission.verdict.assessment, submission.verdict.word) == (newest.pk, "outside")


def test_the_page_shows_verdict_rank_and_times(
    own: Curve, make: Maker, release: Release, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    assessment = make.assessment(release, {own: 0.4})
    page = signed_in(lead).get(reverse("overviews:desks", args=[collaboration.pk])).content.decode()
    for words in ("Ada Able", "Flat floor", "version 1", "1 of 1", "0.400", "release 1", "</svg>inside"):
        assert words in page
    assert assessment.get_absolute_url() in page


def test_who_is_a_student_no_more_keeps_the_desk(
    own: Curve, student: User, collaboration: Collaboration, lead: User
) -> None:
    student.memberships.update(role=Role.MEMBER)
    assert list(listed(collaboration, lead)) == ["Ada Able"]
    student.memberships.all().delete()
    assert list(listed(collaboration, lead)) == ["Ada Able"]


def test_desks_are_chosen_by_student_and_by_measurement(
    own: Curve, make: Maker, collaboration: Collaboration, lead: User
) -> None:
    other = make.student("Bo Brief")
    gauge = make.measurement()
    make.curve(make.theory("Deep floor", other), gauge)
    assert list(listed(collaboration, lead, student=str(other.pk))) == ["Bo Brief"]
    found = listed(collaboration, lead, measurement=str(gauge.pk))
    assert [len(desk.submissions) for desk in found.values()] == [0, 1]


@pytest.mark.parametrize(
    "query", ["student=0", "student=ada", "measurement=99999999999999999999", "measurement=-1"]
)
def test_what_is_not_there_is_not_found(
    query: str, own: Curve, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    for name in ("desks", "desks_csv"):
        address = reverse(f"overviews:{name}", args=[collaboration.pk])
        assert signed_in(lead).get(f"{address}?{query}").status_code == 404


def test_verdicts_of_a_sealed_measurement_are_shown_to_a_lead_who_has_looked_alone(
    make: Maker, student: User, collaboration: Collaboration, lead: User
) -> None:
    sealed = make.sealed()
    curve = make.curve(make.theory("Flat floor", student), sealed)
    make.assessment(make.release(sealed, 1), {curve: 0.4})
    assert listed(collaboration, lead)["Ada Able"].submissions[0].verdict is None
    EarlyLook.objects.create(measurement=sealed, user=lead)
    assert listed(collaboration, lead)["Ada Able"].submissions[0].verdict is not None


def test_a_withdrawn_release_is_said_to_be(
    own: Curve, make: Maker, release: Release, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    make.assessment(make.withdrawn(release), {own: 0.4})
    page = signed_in(lead).get(reverse("overviews:desks", args=[collaboration.pk])).content.decode()
    assert "release 1 (withdrawn)" in page


def test_only_leads_see_it(
    own: Curve,
    make: Maker,
    student: User,
    member: User,
    stranger: User,
    collaboration: Collaboration,
    lead: User,
    signed_in: SignedIn,
) -> None:
    observer = User.objects.create_user("observer@merrow.example")
    make.joined(observer, Role.OBSERVER)
    for name in ("desks", "desks_csv"):
        address = reverse(f"overviews:{name}", args=[collaboration.pk])
        for user, status in ((lead, 200), (member, 403), (student, 403), (observer, 403), (stranger, 404)):
            assert signed_in(user).get(address).status_code == status


def test_the_table_is_given_as_csv_that_no_spreadsheet_runs(
    make: Maker,
    student: User,
    release: Release,
    collaboration: Collaboration,
    lead: User,
    signed_in: SignedIn,
) -> None:
    curve = make.curve(make.theory("=1+1", student), release.measurement)
    make.assessment(release, {curve: 0.25})
    make.student("Bo Brief")
    text = signed_in(lead).get(reverse("overviews:desks_csv", args=[collaboration.pk])).content.decode()
    rows = list(csv.DictReader(text.splitlines()))
    assert [row["student"] for row in rows] == ["Ada Able", "Bo Brief"]
    assert (rows[0]["theory"], rows[0]["verdict at 95 %"], rows[0]["p-value"]) == ("'=1+1", "inside", "0.25")
    assert rows[1]["theory"] == ""


def test_who_else_submitted_at_a_desk_is_named(
    own: Curve, make: Maker, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    make.curve(own.theory, own.measurement, version=2, by=lead)
    page, text = (
        signed_in(lead).get(reverse(f"overviews:{name}", args=[collaboration.pk])).content.decode()
        for name in ("desks", "desks_csv")
    )
    assert page.count("by Lin Lead") == 1
    by = {row["version"]: row["submitted by"] for row in csv.DictReader(text.splitlines())}
    assert by == {"1": "Ada Able", "2": "Lin Lead"}


def test_queries_do_not_grow_with_desks(
    own: Curve, make: Maker, release: Release, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    client, address = signed_in(lead), reverse("overviews:desks", args=[collaboration.pk])
    counts = []
    for _ in range(2):
        with CaptureQueriesContext(connection) as captured:
            assert client.get(address).status_code == 200
        counts.append(len(captured))
        assert not [query for query in captured if '"table"' in query["sql"] or '"result"' in query["sql"]]
        for number in range(4):
            person = make.student(f"Student {number}")
            curve = make.curve(make.theory("Deep floor", person), release.measurement)
            make.assessment(release, {curve: 0.3})
    assert counts[0] == counts[1] <= 9
