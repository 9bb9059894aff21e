"""No page asks more of the database where there is more to show."""

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from core.people.models import Role
from core.people.permissions import PERMITTED, RULES, Door
from tests.permissions.cases import KEYS
from tests.permissions.conftest import client_of
from tests.permissions.growth import grow
from tests.permissions.world import World

pytestmark = pytest.mark.django_db

READ = [route for route, methods in RULES.items() if "GET" in methods]


def queries(here: World, who: str, route: str) -> list[str]:
    client = client_of(here, who)
    address = reverse(route, args=KEYS[route](here, who))
    with CaptureQueriesContext(connection) as captured:
        client.get(address)
    return [query["sql"] for query in captured]


def looks(who: str) -> list[str]:
    """The addresses that someone in this role reads."""
    return [
        route
        for route in READ
        if isinstance(asks := RULES[route]["GET"].asks, Door) or Role(who) in PERMITTED[asks]
    ]


@pytest.mark.parametrize("who", ["lead", "member", "student", "observer"])
def test_no_page_asks_more_where_there_is_more_to_show(here: World, who: str) -> None:
    client_of(here, who).get(
        reverse("overviews:home")
    )  # what is asked but once: kinds of rows, the last look
    few = {route: queries(here, who, route) for route in looks(who)}
    grow(here)
    many = {route: queries(here, who, route) for route in looks(who)}
    grown = {
        route: [len(few[route]), len(many[route]), *sorted(set(many[route]) - set(few[route]))[:2]]
        for route in few
        if len(many[route]) > len(few[route])
    }
    assert grown == {}
