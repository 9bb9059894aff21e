"""Somebody new comes by the link of an invitation, as a browser goes about it."""

from datetime import timedelta

import pytest
from django.urls import reverse
from django.utils import timezone
from playwright.sync_api import expect

from core.people.models import Collaboration, Membership, Role, User
from core.people.services import invite_by_link
from tests.browser.conftest import Browsing
from tests.conftest import PASSWORD

pytestmark = pytest.mark.django_db(transaction=True)


def test_a_newcomer_joins_and_their_browser_tells_no_page_the_secret(
    browsing: Browsing, collaboration: Collaboration, lead: User
) -> None:
    made = invite_by_link(
        by=lead,
        collaboration=collaboration,
        role=Role.OBSERVER,
        expires_at=timezone.now() + timedelta(days=1),
    )
    page = browsing.page()
    told: list[str] = []
    page.on("request", lambda request: told.append(request.all_headers().get("referer", "")))
    page.goto(reverse("people:invitation", args=[made.secret]))
    page.get_by_label("E-mail address").fill("nell@merrow.example")
    page.get_by_label("Name").fill("Nell New")
    page.get_by_label("Password", exact=True).fill(PASSWORD)
    page.get_by_label("Password, once more").fill(PASSWORD)
    page.get_by_role("button", name="Make the account and join").click()
    expect(page.get_by_role("status")).to_contain_text("You have joined Lake Merrow survey")
    assert Membership.objects.get(user__email="nell@merrow.example").role == Role.OBSERVER
    assert len(told) > 2
    assert not [address for address in told if made.secret in address]
