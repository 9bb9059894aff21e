"""Who sees the pages, and what they are offered there."""

from collections.abc import Callable

import pytest
from django.db.models import Model
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, Role, User
from core.theories.models import Curve, Theory
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


@pytest.fixture(params=["collaboration", "measurement", "theory"])
def address(
    request: pytest.FixtureRequest, collaboration: Collaboration, measurement: Measurement, theory: Theory
) -> str:
    rows: dict[str, Model] = {"collaboration": collaboration, "measurement": measurement, "theory": theory}
    return reverse(f"overviews:{request.param}", args=[rows[request.param].pk])


def test_a_lead_sees_each_page(signed_in: SignedIn, lead: User, address: str) -> None:
    assert signed_in(lead).get(address).status_code == 200


def test_a_member_sees_each_page(signed_in: SignedIn, member: User, address: str) -> None:
    assert signed_in(member).get(address).status_code == 200


def test_a_stranger_gets_404_for_each_page(signed_in: SignedIn, stranger: User, address: str) -> None:
    assert signed_in(stranger).get(address).status_code == 404


def test_someone_not_signed_in_is_sent_to_the_sign_in(client: Client, address: str) -> None:
    answer = client.get(address)
    assert answer.status_code == 302
    assert answer.headers["Location"].startswith(reverse("account_login"))


def test_the_home_page_asks_for_a_sign_in(client: Client) -> None:
    answer = client.get(reverse("overviews:home"))
    assert answer.status_code == 302
    assert answer.headers["Location"].startswith(reverse("account_login"))


def test_a_lead_is_offered_to_add_measurements_and_people(
    signed_in: SignedIn, lead: User, collaboration: Collaboration
) -> None:
    page = signed_in(lead).get(collaboration.get_absolute_url()).content.decode()
    assert reverse("measurements:new_measurement", args=[collaboration.pk]) in page
    assert "Invite or remove people" in page


def test_a_member_is_offered_theories_but_neither_measurements_nor_people(
    signed_in: SignedIn, member: User, collaboration: Collaboration
) -> None:
    page = signed_in(member).get(collaboration.get_absolute_url()).content.decode()
    assert reverse("theories:new_theory", args=[collaboration.pk]) in page
    assert reverse("measurements:new_measurement", args=[collaboration.pk]) not in page
    assert "Invite or remove people" not in page


def test_a_lead_is_offered_to_upload_a_release(signed_in: SignedIn, lead: User, release: Release) -> None:
    page = signed_in(lead).get(release.measurement.get_absolute_url()).content.decode()
    assert reverse("measurements:upload", args=[release.measurement_id]) in page


def test_a_member_is_offered_to_assess_and_to_submit_but_not_to_upload(
    signed_in: SignedIn, member: User, release: Release, theory: Theory
) -> None:
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    assert reverse("assessments:new", args=[release.pk]) in page
    assert reverse("theories:new_curve", args=[theory.pk]) in page
    assert reverse("measurements:upload", args=[release.measurement_id]) not in page


def test_only_leads_see_draft_releases(
    signed_in: SignedIn, lead: User, member: User, make: Maker, measurement: Measurement
) -> None:
    draft = make.release(measurement, None)
    address = measurement.get_absolute_url()
    assert draft.get_absolute_url() in signed_in(lead).get(address).content.decode()
    assert draft.get_absolute_url() not in signed_in(member).get(address).content.decode()


def test_a_draft_curve_is_shown_to_who_uploaded_it_alone(
    signed_in: SignedIn, lead: User, member: User, make: Maker, curve: Curve
) -> None:
    draft = make.curve(curve.theory, curve.measurement, None)
    address = curve.theory.get_absolute_url()
    assert draft.get_absolute_url() in signed_in(member).get(address).content.decode()
    assert draft.get_absolute_url() not in signed_in(lead).get(address).content.decode()


def test_a_theory_is_offered_for_editing_to_who_added_it_and_to_leads(
    signed_in: SignedIn, lead: User, member: User, make: Maker, theory: Theory
) -> None:
    address, edit = theory.get_absolute_url(), reverse("theories:edit_theory", args=[theory.pk])
    assert edit in signed_in(member).get(address).content.decode()
    assert edit in signed_in(lead).get(address).content.decode()
    Theory.objects.filter(pk=theory.pk).update(submitted_by=lead)
    assert edit not in signed_in(member).get(address).content.decode()


@pytest.mark.parametrize(
    ("role", "offered"),
    [
        (
            Role.LEAD,
            {"overviews:comparison", "people:people", "overviews:desks", "talk:log", "reports:reports"},
        ),
        (Role.MEMBER, {"overviews:comparison", "people:people", "talk:log", "reports:reports"}),
        (Role.OBSERVER, {"overviews:comparison", "people:people", "talk:log", "reports:reports"}),
        (Role.STUDENT, {"overviews:comparison", "people:people"}),
    ],
)
def test_a_collaboration_leads_where_its_reader_may_go(
    signed_in: SignedIn, make: Maker, collaboration: Collaboration, role: Role, offered: set[str]
) -> None:
    reader = User.objects.create_user("reader@merrow.example")
    make.joined(reader, role)
    page = signed_in(reader).get(collaboration.get_absolute_url()).content.decode()
    ways = ("overviews:comparison", "people:people", "overviews:desks", "talk:log", "reports:reports")
    addresses = {way: f'href="{reverse(way, args=[collaboration.pk])}"' for way in ways}
    assert {way for way, address in addresses.items() if address in page} == offered


def test_a_lead_may_withdraw_a_release_that_is_not_withdrawn(
    signed_in: SignedIn, lead: User, member: User, make: Maker, release: Release
) -> None:
    address, withdraw = (
        release.measurement.get_absolute_url(),
        reverse("measurements:withdraw", args=[release.pk]),
    )
    assert withdraw in signed_in(lead).get(address).content.decode()
    assert withdraw not in signed_in(member).get(address).content.decode()
    make.withdrawn(release, "The clock ran slow")
    page = signed_in(lead).get(address).content.decode()
    assert withdraw not in page
    assert "Every release is withdrawn." in page
    assert "The clock ran slow" in page
    assert reverse("assessments:new", args=[release.pk]) not in page
