"""The page that tells who may do what."""

import re
from collections import Counter
from collections.abc import Iterator

from django.urls import URLPattern, URLResolver, get_resolver, reverse
from django.utils.html import escape

from core.people.models import Collaboration, Role, User
from core.people.permissions import PERMITTED, RULES, Action, Door
from core.people.permitted_addresses import Address, addresses_by_what_they_ask
from tests.people.conftest import SignedIn


def test_each_action_is_told_for_each_role(
    collaboration: Collaboration, lead: User, student: User, signed_in: SignedIn
) -> None:
    page = signed_in(student).get(reverse("people:permissions")).content.decode()
    for action, roles in PERMITTED.items():
        row = page.partition(f'<th scope="row">{escape(action.value)}</th>')[2].partition("</tr>")[0]
        told = ["not allowed" not in cell for cell in re.findall("<td.*?</td>", row)]
        assert told == [role in roles for role in Role]


def test_every_address_is_told_once_for_each_method_below_what_it_asks_for() -> None:
    here = set(named_addresses())
    expected = Counter(
        (rule.asks.value, "read" if method == "GET" else "change", rule.only)
        for name, methods in RULES.items()
        if name in here
        for method, rule in methods.items()
    )
    groups = addresses_by_what_they_ask()
    assert expected == Counter(
        (asks, does, address.only)
        for asks, told in groups.items()
        for address in told
        for does in address.does.split(" and ")
    )
    assert [address.path for address in groups[Action.LEAVE.value]] == ["/collaborations/‹number›/leave"]
    assert Address("/i/‹token›/", "", "read and change") in groups[Door.LINK.value]


def named_addresses() -> Iterator[str]:
    """The names of the site's own addresses."""
    for resolver in get_resolver().url_patterns:
        if isinstance(resolver, URLResolver) and resolver.namespace:
            names = [pattern.name for pattern in resolver.url_patterns if isinstance(pattern, URLPattern)]
            yield from (f"{resolver.namespace}:{name}" for name in names)


def test_conditions_beside_the_role_are_told(stranger: User, signed_in: SignedIn) -> None:
    page = signed_in(stranger).get(reverse("people:permissions")).content.decode()
    conditions = {rule.only for methods in RULES.values() for rule in methods.values() if rule.only}
    assert conditions
    for condition in conditions:
        assert escape(condition) in page


def test_the_people_page_leads_there(collaboration: Collaboration, member: User, signed_in: SignedIn) -> None:
    page = signed_in(member).get(reverse("people:people", args=[collaboration.pk])).content.decode()
    assert f'href="{reverse("people:permissions")}"' in page
