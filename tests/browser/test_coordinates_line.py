"""What a resolution comes to is told while it is chosen."""

import pytest
from django.urls import reverse
from playwright.sync_api import Page, expect

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve
from tests.browser.conftest import Browsing

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def form(release: Release, curve: Curve, member: User, browsing: Browsing) -> Page:
    page = browsing.page(member)
    page.goto(reverse("assessments:new", args=[release.pk]))
    return page


def test_the_line_follows_the_number_and_the_number_makes_the_choice(form: Page) -> None:
    line = form.locator("#coordinates")
    expect(line).to_contain_text("J = 20 functions")
    form.get_by_role("spinbutton", name="Number of functions").fill("32")
    expect(line).to_contain_text("J = 32 functions: features wider than 0.25 cycles per hour")
    expect(form.get_by_label("A number of functions, given below")).to_be_checked()
    form.get_by_label("Full: as many functions").check()
    expect(line).to_contain_text("J = 40 functions")


def test_the_line_refuses_what_submitting_would_refuse(form: Page) -> None:
    form.get_by_role("spinbutton", name="Narrowest feature").fill("-1")
    expect(form.locator("#coordinates")).to_have_text("Give a width above 0.")
