"""A student works at a desk of their own, and sees nobody else's."""

import pytest
from django.urls import reverse
from playwright.sync_api import expect

from core.people.models import Collaboration, Membership, Role, User
from core.theories.models import Curve, Theory
from tests.browser.conftest import Browsing
from tests.browser.survey import curve_of
from tests.conftest import PASSWORD

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def students(collaboration: Collaboration) -> tuple[User, User]:
    """Two of them."""
    users = tuple(
        User.objects.create_user(f"bench{bench}@merrow.example", PASSWORD, name=f"Bench {bench}")
        for bench in (1, 2)
    )
    for user in users:
        Membership.objects.create(user=user, collaboration=collaboration, role=Role.STUDENT)
    return users[0], users[1]


def desk_curve(curve: Curve, student: User, name: str) -> Curve:
    """A curve at a student's desk."""
    measurement = curve.measurement
    theory = Theory.objects.create(
        collaboration=measurement.collaboration, name=name, submitted_by=student, desk=student
    )
    return curve_of(theory, measurement, student, stretch=1.1, version=1)


def test_a_student_sees_their_desk_alone_and_the_lead_sees_all(
    browsing: Browsing, curve: Curve, students: tuple[User, User], lead: User
) -> None:
    first, second = students
    mine, theirs = desk_curve(curve, first, "Our one peak"), desk_curve(curve, second, "Our two peaks")
    collaboration = curve.theory.collaboration
    page = browsing.page(first)
    page.goto(collaboration.get_absolute_url())
    expect(page.get_by_role("link", name="Our one peak")).to_be_visible()
    expect(page.locator("main")).not_to_contain_text("Our two peaks")
    expect(page.locator("main")).not_to_contain_text("Parabolic floor")
    page.get_by_role("link", name="Our one peak").first.click()
    expect(page.get_by_role("heading", level=1)).to_have_text("Our one peak")

    browsing.watch.expect(404)
    answer = page.goto(theirs.theory.get_absolute_url())
    assert answer is not None
    assert answer.status == 404

    page = browsing.page(lead)
    page.goto(reverse("overviews:desks", args=[collaboration.pk]))
    for name, owned in (("Bench 1", mine), ("Bench 2", theirs)):
        row = page.get_by_role("row").filter(has_text=name)
        expect(row).to_contain_text(owned.theory.name)
