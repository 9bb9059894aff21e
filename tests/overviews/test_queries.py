"""Pages ask as many questions of the database for many rows as for one, and load no stored table."""

from collections.abc import Callable

import pytest
from django.db import connection
from django.db.models import Model
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Membership, User
from core.theories.models import Curve, Theory
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]
BIG = ('"table"', '"lines"', '"covariance"', '"result"', '"detail"', '"snapshot"')


@pytest.fixture(params=["home", "collaboration", "measurement", "theory"])
def address(
    request: pytest.FixtureRequest, collaboration: Collaboration, measurement: Measurement, theory: Theory
) -> str:
    rows: dict[str, Model] = {"collaboration": collaboration, "measurement": measurement, "theory": theory}
    keys = [rows[request.param].pk] if request.param in rows else []
    return reverse(f"overviews:{request.param}", args=keys)


def queries_of(client: Client, address: str) -> list[str]:
    with CaptureQueriesContext(connection) as captured:
        assert client.get(address).status_code == 200
    return [query["sql"] for query in captured]


@pytest.fixture
def one_of_each(make: Maker, release: Release, curve: Curve) -> None:
    make.report(make.assessment(release, {curve: 0.4}), "One")
    make.assessment(release, {}, status="running")
    make.release(release.measurement, None)


def fill(make: Maker, release: Release, curve: Curve, lead: User) -> None:
    """Several more of everything that the pages list."""
    collaboration = release.measurement.collaboration
    for number in range(2, 6):
        person = User.objects.create_user(f"person{number}@merrow.example")
        Membership.objects.create(user=person, collaboration=collaboration)
        other = Collaboration.objects.create(name=f"Class {number}")
        Membership.objects.create(user=lead, collaboration=other)
        theory = make.theory(f"Theory {number}")
        newer = make.release(release.measurement, number)
        line = make.curve(theory, release.measurement, by=person)
        again = make.curve(curve.theory, release.measurement, number, by=person)
        gauge = make.measurement()
        gauge_line = make.curve(curve.theory, gauge)
        make.assessment(make.release(gauge, 1), {gauge_line: 0.3})
        make.report(make.assessment(newer, {line: 0.3, again: 0.01, curve: 0.2}), f"Report {number}")
        make.assessment(newer, {}, status="running")
        make.release(release.measurement, None)
        make.curve(curve.theory, release.measurement, None, by=lead)


def test_queries_do_not_grow_with_rows(
    signed_in: SignedIn,
    lead: User,
    make: Maker,
    release: Release,
    curve: Curve,
    one_of_each: None,
    address: str,
) -> None:
    client = signed_in(lead)
    few = queries_of(client, address)
    fill(make, release, curve, lead)
    many = queries_of(client, address)
    assert len(many) == len(few)
    assert len(many) <= 14


def test_no_page_loads_what_is_big_but_the_one_release_that_is_drawn(
    signed_in: SignedIn, lead: User, one_of_each: None, address: str
) -> None:
    sql = queries_of(signed_in(lead), address)
    loading = [query for query in sql if any(column in query for column in BIG)]
    assert len(loading) == (1 if "/measurements/" in address else 0)
