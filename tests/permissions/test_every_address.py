"""Every address, with every method, for every role, a stranger and somebody who has not signed in."""

from collections.abc import Iterator
from itertools import product

import pytest
from django.http import HttpResponseBase
from django.urls import URLPattern, URLResolver, get_resolver, reverse

from core.people.models import Role
from core.people.permissions import PERMITTED, RULES, Action, Door, Rule
from tests.permissions.cases import KEYS, NOT_THERE
from tests.permissions.conftest import client_of
from tests.permissions.world import World

pytestmark = pytest.mark.django_db

ROLES = ("lead", "member", "student", "observer")
EACH = [(route, method) for route, methods in RULES.items() for method in methods]
IN_A_COLLABORATION = [
    (route, method) for route, method in EACH if isinstance(RULES[route][method].asks, Action)
]


def addresses(resolver: URLResolver, spaces: tuple[str, ...] = ()) -> Iterator[str]:
    """The names of all addresses of the site's own."""
    for pattern in resolver.url_patterns:
        if isinstance(pattern, URLResolver):
            inner = (*spaces, pattern.namespace) if pattern.namespace else spaces
            yield from addresses(pattern, inner)
        elif isinstance(pattern, URLPattern) and spaces:
            yield ":".join((*spaces, str(pattern.name)))


def ask(here: World, who: str, route: str, method: str, *, as_if: str | None = None) -> HttpResponseBase:
    """The answer; `as_if`: about the rows that somebody else works with."""
    address = reverse(route, args=KEYS[route](here, as_if or who))
    client = client_of(here, who)
    return client.get(address) if method == "GET" else client.post(address)


def lets_in(answer: HttpResponseBase, route: str) -> bool:
    """Whether whoever asked was let in: a form may still be refused for what stands in it."""
    if answer.status_code == 302:
        return not answer.headers["Location"].startswith(reverse("account_login"))
    return answer.status_code in (200, 400) or (answer.status_code == 404 and route in NOT_THERE)


def test_each_address_of_the_site_has_its_row_in_the_table() -> None:
    assert sorted(set(addresses(get_resolver()))) == sorted(RULES)


def test_each_row_of_the_table_is_asked_about_here() -> None:
    assert sorted(KEYS) == sorted(RULES)


def test_the_table_says_of_each_action_who_may() -> None:
    assert set(PERMITTED) == set(Action)
    assert all(roles <= set(Role) for roles in PERMITTED.values())


@pytest.mark.parametrize(("route", "method", "who"), [(*each, who) for each, who in product(EACH, ROLES)])
def test_each_role_is_let_in_where_the_table_says_so(here: World, route: str, method: str, who: str) -> None:
    rule: Rule = RULES[route][method]
    answer = ask(here, who, route, method)
    if isinstance(rule.asks, Door) or Role(who) in PERMITTED[rule.asks]:
        assert lets_in(answer, route), answer.status_code
    elif who == "observer" and rule.only.startswith("a draft"):
        assert answer.status_code in (403, 404)
    else:
        assert answer.status_code == 403


@pytest.mark.parametrize(("route", "method"), IN_A_COLLABORATION)
def test_a_stranger_cannot_tell_that_it_is_there(here: World, route: str, method: str) -> None:
    assert ask(here, "stranger", route, method).status_code == 404


@pytest.mark.parametrize(("route", "method"), IN_A_COLLABORATION)
def test_nobody_gets_in_without_signing_in(here: World, route: str, method: str) -> None:
    answer = ask(here, "nobody", route, method, as_if="member")
    assert answer.status_code == 302
    assert answer.headers["Location"].startswith(reverse("account_login"))


@pytest.mark.parametrize(("route", "method"), IN_A_COLLABORATION)
@pytest.mark.parametrize("who", ["member", "observer", "other_student", "stranger"])
def test_a_desk_is_closed_to_all_but_its_student_and_the_leads(
    here: World, route: str, method: str, who: str
) -> None:
    if KEYS[route](here, "student") == KEYS[route](here, "member"):
        return  # the same for all: there is none of it at a desk
    assert ask(here, who, route, method, as_if="student").status_code == 404


@pytest.mark.parametrize(("route", "method"), IN_A_COLLABORATION)
def test_a_student_does_not_see_what_the_others_share(here: World, route: str, method: str) -> None:
    if KEYS[route](here, "student") == KEYS[route](here, "member"):
        return
    assert ask(here, "student", route, method, as_if="member").status_code == 404


@pytest.mark.parametrize("route", RULES)
def test_other_methods_are_refused(here: World, route: str) -> None:
    address = reverse(route, args=KEYS[route](here, "lead"))
    client = client_of(here, "lead")
    for method in ("GET", "POST", "PUT", "DELETE"):
        if method not in RULES[route]:
            assert client.generic(method, address).status_code == 405
