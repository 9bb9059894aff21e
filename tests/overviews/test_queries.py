"""Pages ask as many questions of the database for many rows as for one, and load no stored table."""

import re
from collections.abc import Callable

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]
BIG = ('"table"', '"lines"', '"covariance"', '"result"', '"detail"', '"snapshot"')


PAGES = [
    "home",
    "collaboration",
    "comparison",
    "comparison_csv",
    "separation",
    "measurement",
    "pairs",
    "theory",
]


@pytest.fixture(params=[*PAGES, "history_chart"])
def address(
    request: pytest.FixtureRequest,
    collaboration: Collaboration,
    measurement: Measurement,
    theory: Theory,
    rival: Curve,
) -> str:
    keys: dict[str, list[object]] = {
        "home": [],
        "theory": [theory.pk],
        "measurement": [measurement.pk],
        "pairs": [measurement.pk],
        "history_chart": [measurement.pk, "history", "csv"],
    }
    path = reverse(f"overviews:{request.param}", args=keys.get(request.param, [collaboration.pk]))
    pair = f"?first={theory.pk}&second={rival.theory_id}" if request.param == "separation" else ""
    return f"{path}{pair}"


def queries_of(client: Client, address: str) -> list[str]:
    with CaptureQueriesContext(connection) as captured:
        assert client.get(address).status_code == 200
    return [query["sql"] for query in captured]


@pytest.fixture
def one_of_each(make: Maker, release: Release, curve: Curve, rival: Curve) -> None:
    make.report(make.assessment(release, {curve: 0.4, rival: 0.2}, apart=[0.3]), "One")
    make.assessment(release, {}, status="running")
    make.release(release.measurement, None)


def fill(make: Maker, release: Release, curve: Curve, desk: User | None, reader: User) -> None:
    """Several more of everything that the pages list."""
    collaboration = release.measurement.collaboration
    for number in range(2, 6):
        person = User.objects.create_user(f"person{number}@merrow.example")
        Membership.objects.create(user=person, collaboration=collaboration)
        other = Collaboration.objects.create(name=f"Class {number}")
        Membership.objects.create(user=reader, collaboration=other)
        theory = make.theory(f"Theory {number}", desk)
        newer = make.release(release.measurement, number)
        line = make.curve(theory, release.measurement, by=person)
        again = make.curve(curve.theory, release.measurement, number, by=person)
        gauge = make.measurement()
        gauge_line = make.curve(curve.theory, gauge)
        make.assessment(make.release(gauge, 1), {gauge_line: 0.3})
        judged = make.assessment(newer, {line: 0.3, again: 0.01, curve: 0.2}, apart=[0.3, 2.0, 1.5])
        make.report(judged, f"Report {number}")
        make.withdrawn(make.release(make.sealed(), 1))
        make.assessment(newer, {}, status="running")
        make.release(release.measurement, None)
        make.curve(curve.theory, release.measurement, None, by=reader)


@pytest.mark.parametrize("role", [Role.LEAD, Role.STUDENT, Role.OBSERVER])
def test_queries_do_not_grow_with_rows(
    signed_in: SignedIn,
    lead: User,
    make: Maker,
    release: Release,
    curve: Curve,
    one_of_each: None,
    address: str,
    role: Role,
) -> None:
    reader = User.objects.create_user("reader@merrow.example")
    make.joined(reader, role)
    if role is Role.STUDENT:
        # Shared theories are no page of theirs: they work with what stands at their desk.
        Theory.objects.update(desk=reader)
        Assessment.objects.update(desk=reader)
    client = signed_in(reader)
    few = queries_of(client, address)
    curve.theory.refresh_from_db()
    fill(make, release, curve, curve.theory.desk, reader)
    many = queries_of(client, address)
    assert len(many) == len(few)
    assert len(many) <= 24


def test_no_page_loads_what_is_big_but_the_one_release_that_is_drawn(
    signed_in: SignedIn, lead: User, one_of_each: None, address: str
) -> None:
    sql = queries_of(signed_in(lead), address)
    loading = [query for query in sql if any(column in query for column in BIG)]
    assert len(loading) == (1 if re.fullmatch(r"/measurements/\d+/", address) else 0)
