"""Who sees and does what on the pages of people."""

from collections.abc import Callable

import pytest
from django.core import mail
from django.test import Client
from django.urls import reverse
from pytest_django import DjangoAssertNumQueries

from core.people import services
from core.people.models import Collaboration, Membership, Role, User
from tests.conftest import PASSWORD

SignedIn = Callable[[User], Client]


def people(collaboration: Collaboration) -> str:
    return reverse("people:people", args=[collaboration.pk])


def edit(collaboration: Collaboration) -> str:
    return reverse("people:edit_collaboration", args=[collaboration.pk])


def change(name: str, collaboration: Collaboration, user: User) -> str:
    membership = Membership.objects.get(user=user, collaboration=collaboration)
    return reverse(f"people:{name}", args=[collaboration.pk, membership.pk])


def test_anyone_signed_in_starts_a_collaboration_and_leads_it(stranger: User, signed_in: SignedIn) -> None:
    answer = signed_in(stranger).post(reverse("people:new_collaboration"), {"name": "Wave tank"})
    collaboration = Collaboration.objects.get()
    assert answer["Location"] == collaboration.get_absolute_url()
    assert collaboration.memberships.get().role == Role.LEAD


def test_someone_not_signed_in_is_sent_to_sign_in(collaboration: Collaboration, client: Client) -> None:
    for address in (reverse("people:new_collaboration"), people(collaboration), edit(collaboration)):
        answer = client.get(address)
        assert answer.status_code == 302
        assert answer["Location"].startswith(reverse("account_login"))


def test_a_lead_and_a_member_see_who_is_here_and_a_stranger_does_not(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    assert "mo member" in signed_in(lead).get(people(collaboration)).content.decode().lower()
    assert signed_in(member).get(people(collaboration)).status_code == 200
    assert signed_in(stranger).get(people(collaboration)).status_code == 404


def test_only_a_lead_changes_the_words(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    words = {"name": "Merrow again", "about": ""}
    assert signed_in(stranger).post(edit(collaboration), words).status_code == 404
    assert signed_in(member).post(edit(collaboration), words).status_code == 403
    signed_in(lead).post(edit(collaboration), words)
    collaboration.refresh_from_db()
    assert collaboration.name == "Merrow again"


def test_only_a_lead_adds_people(
    collaboration: Collaboration, member: User, stranger: User, signed_in: SignedIn
) -> None:
    someone = {"email": "new@merrow.example", "role": "member"}
    assert signed_in(member).post(people(collaboration), someone).status_code == 403
    assert signed_in(stranger).post(people(collaboration), someone).status_code == 404
    assert collaboration.memberships.count() == 2


@pytest.mark.django_db(transaction=True)
def test_someone_added_sets_a_password_by_the_link_in_the_e_mail(
    collaboration: Collaboration, lead: User, signed_in: SignedIn, client: Client
) -> None:
    signed_in(lead).post(people(collaboration), {"email": "new@merrow.example", "role": "member"})
    link = next(line for line in mail.outbox[0].body.splitlines() if line.startswith("http"))
    form = client.get(link, follow=True)
    address = form.redirect_chain[-1][0]
    client.post(address, {"password1": PASSWORD, "password2": PASSWORD})
    assert User.objects.get(email="new@merrow.example").check_password(PASSWORD)


def test_someone_here_already_is_said_beside_the_address(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    page = signed_in(lead).post(people(collaboration), {"email": member.email, "role": "lead"})
    assert "is here already" in page.content.decode()


def test_only_a_lead_changes_roles(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = change("change_role", collaboration, member)
    assert signed_in(member).post(address, {"role": "lead"}).status_code == 403
    assert signed_in(stranger).post(address, {"role": "lead"}).status_code == 404
    signed_in(lead).post(address, {"role": "lead"})
    assert Membership.objects.get(user=member).role == Role.LEAD


def test_only_a_lead_removes_people(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    address = change("remove", collaboration, member)
    assert signed_in(member).post(address).status_code == 403
    assert signed_in(stranger).post(address).status_code == 404
    signed_in(lead).post(address)
    assert not Membership.objects.filter(user=member).exists()


@pytest.mark.parametrize("name", ["remove", "change_role"])
def test_the_last_lead_is_told_to_make_another_first(
    name: str, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    answer = signed_in(lead).post(change(name, collaboration, lead), {"role": "member"})
    assert answer.status_code == 400
    assert "Make someone else a lead first" in answer.content.decode()


def test_a_lead_does_not_reach_into_another_collaboration(
    collaboration: Collaboration, lead: User, stranger: User, signed_in: SignedIn
) -> None:
    other = services.create_collaboration(user=stranger, name="Wave tank")
    theirs = Membership.objects.get(collaboration=other)
    address = reverse("people:remove", args=[collaboration.pk, theirs.pk])
    assert signed_in(lead).post(address).status_code == 404


def test_the_list_takes_the_same_number_of_queries_for_many(
    collaboration: Collaboration,
    lead: User,
    signed_in: SignedIn,
    django_assert_max_num_queries: DjangoAssertNumQueries,
) -> None:
    for number in range(20):
        services.add_member(collaboration=collaboration, email=f"{number}@merrow.example", role="member")
    client = signed_in(lead)
    with django_assert_max_num_queries(9):
        client.get(people(collaboration))


def test_a_name_with_markup_is_shown_as_words(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    User.objects.filter(pk=member.pk).update(name="<script>alert(1)</script>")
    assert "<script>alert" not in signed_in(lead).get(people(collaboration)).content.decode()
