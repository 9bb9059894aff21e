"""Who sees and does what on the pages of people."""

from functools import partial

import pytest
from django.test import Client
from django.urls import reverse
from pytest_django import DjangoAssertNumQueries

from core.people import services
from core.people.models import Collaboration, Membership, Role, User
from tests.people.conftest import SignedIn, membership


def people(collaboration: Collaboration) -> str:
    return reverse("people:people", args=[collaboration.pk])


def edit(collaboration: Collaboration) -> str:
    return reverse("people:edit_collaboration", args=[collaboration.pk])


def leave(collaboration: Collaboration) -> str:
    return reverse("people:leave", args=[collaboration.pk])


def change(name: str, collaboration: Collaboration, user: User) -> str:
    return reverse(f"people:{name}", args=[collaboration.pk, membership(user, collaboration).pk])


def test_anyone_signed_in_starts_a_collaboration_and_leads_it(stranger: User, signed_in: SignedIn) -> None:
    answer = signed_in(stranger).post(reverse("people:new_collaboration"), {"name": "Wave tank"})
    collaboration = Collaboration.objects.get()
    assert answer["Location"] == collaboration.get_absolute_url()
    assert collaboration.memberships.get().role == Role.LEAD


def test_someone_not_signed_in_is_sent_to_sign_in(collaboration: Collaboration, client: Client) -> None:
    own = (reverse(f"people:{name}") for name in ("new_collaboration", "permissions", "preferences"))
    for address in (*own, people(collaboration), edit(collaboration)):
        answer = client.get(address)
        assert answer.status_code == 302
        assert answer["Location"].startswith(reverse("account_login"))


def test_a_lead_sees_addresses_and_all_forms(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    page = signed_in(lead).get(people(collaboration)).content.decode()
    assert member.email in page
    assert change("change_role", collaboration, member) in page
    assert change("remove", collaboration, member) in page
    assert change("hand_over", collaboration, member) in page


def test_a_member_sees_how_people_came_but_no_addresses_and_no_forms(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    page = signed_in(member).get(people(collaboration)).content.decode()
    assert "Lin Lead" in page
    assert "How they came" in page
    assert "@merrow.example" not in page
    assert page.count("<form") == 2  # to sign out and to leave


def test_a_student_and_an_observer_see_names_and_roles(
    collaboration: Collaboration, student: User, observer: User, signed_in: SignedIn
) -> None:
    for user in (student, observer):
        page = signed_in(user).get(people(collaboration)).content.decode()
        assert "Mo Member" in page
        assert "How they came" not in page
        assert "@merrow.example" not in page
        assert page.count("<form") == 2


def test_a_stranger_is_told_of_nothing(
    collaboration: Collaboration, stranger: User, signed_in: SignedIn
) -> None:
    assert signed_in(stranger).get(people(collaboration)).status_code == 404
    assert signed_in(stranger).post(leave(collaboration)).status_code == 404


def test_the_page_says_how_each_came(collaboration: Collaboration, lead: User, signed_in: SignedIn) -> None:
    Membership.objects.filter(user=lead).update(came_by=Membership.CameBy.START)
    page = signed_in(lead).get(people(collaboration)).content.decode()
    assert "<td>started it</td>" in page
    assert "<td>added</td>" in page


def test_only_a_lead_changes_the_words(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    words = {"name": "Merrow again", "about": "", "revision": "0"}
    assert signed_in(stranger).post(edit(collaboration), words).status_code == 404
    assert signed_in(member).post(edit(collaboration), words).status_code == 403
    signed_in(lead).post(edit(collaboration), words)
    collaboration.refresh_from_db()
    assert collaboration.name == "Merrow again"


def test_of_two_who_change_the_words_at_once_neither_loses_any(
    collaboration: Collaboration, lead: User, second_lead: User, signed_in: SignedIn
) -> None:
    first, second = signed_in(lead), signed_in(second_lead)
    seen = [client.get(edit(collaboration)).context["form"]["revision"].value() for client in (first, second)]
    first.post(edit(collaboration), {"name": "Deep lake", "about": "Cold.", "revision": seen[0]})
    answer = second.post(edit(collaboration), {"name": "Long lake", "about": "Cold.", "revision": seen[1]})
    page = answer.content.decode()
    assert "Somebody else has changed this" in page
    assert "Now stands here: “Deep lake”" in page
    assert 'value="Long lake"' in page
    collaboration.refresh_from_db()
    assert collaboration.name == "Deep lake"
    again = answer.context["form"]["revision"].value()
    second.post(edit(collaboration), {"name": "Long lake", "about": "Cold.", "revision": again})
    collaboration.refresh_from_db()
    assert collaboration.name == "Long lake"


@pytest.mark.parametrize("name", ["change_role", "remove", "hand_over"])
def test_only_a_lead_changes_who_is_here(
    name: str,
    collaboration: Collaboration,
    member: User,
    student: User,
    observer: User,
    stranger: User,
    signed_in: SignedIn,
) -> None:
    address = change(name, collaboration, member)
    for user, status in ((member, 403), (student, 403), (observer, 403), (stranger, 404)):
        answer = signed_in(user).post(address, {"role": "lead", "seen": "member"})
        assert answer.status_code == status
    assert membership(member, collaboration).role == Role.MEMBER


def test_a_lead_changes_a_role(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    signed_in(lead).post(change("change_role", collaboration, member), {"role": "student", "seen": "member"})
    assert membership(member, collaboration).role == Role.STUDENT


def test_a_form_that_is_older_than_the_role_changes_nothing(
    collaboration: Collaboration, lead: User, second_lead: User, member: User, signed_in: SignedIn
) -> None:
    address = change("change_role", collaboration, member)
    signed_in(lead).post(address, {"role": "observer", "seen": "member"})
    answer = signed_in(second_lead).post(address, {"role": "lead", "seen": "member"})
    assert answer.status_code == 400
    assert "is observer by now" in answer.content.decode()
    assert membership(member, collaboration).role == Role.OBSERVER


def test_the_page_tells_each_form_which_role_was_seen(
    collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    page = signed_in(lead).get(people(collaboration)).content.decode()
    assert page.count('<input type="hidden" name="seen" value="member">') == 1


def test_a_role_that_there_is_not_is_told(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    address = change("change_role", collaboration, member)
    answer = signed_in(lead).post(address, {"role": "king", "seen": "member"}, follow=True)
    assert "The role is not changed" in answer.content.decode()


def test_a_lead_removes_people(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    answer = signed_in(lead).post(change("remove", collaboration, member), follow=True)
    assert "Mo Member is removed" in answer.content.decode()
    assert not Membership.objects.filter(user=member).exists()


def test_everybody_can_leave(
    collaboration: Collaboration,
    second_lead: User,
    member: User,
    student: User,
    observer: User,
    signed_in: SignedIn,
) -> None:
    for user in (second_lead, member, student, observer):
        answer = signed_in(user).post(leave(collaboration))
        assert answer["Location"] == reverse("overviews:home")
        assert not Membership.objects.filter(user=user).exists()


def test_the_last_lead_is_told_to_make_another_first(
    collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    client, words = signed_in(lead), {"role": "member", "seen": "lead"}
    own = partial(change, collaboration=collaboration, user=lead)
    for address in (leave(collaboration), own("remove"), own("change_role")):
        answer = client.post(address, words)
        assert answer.status_code == 400
        assert "Make someone else a lead first" in answer.content.decode()
    assert membership(lead, collaboration).role == Role.LEAD


def test_the_lead_is_handed_over_once_it_is_confirmed(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    client, address = signed_in(lead), change("hand_over", collaboration, member)
    asked = client.get(address)
    assert "Mo Member, member now, becomes a lead" in asked.content.decode()
    assert membership(member, collaboration).role == Role.MEMBER
    client.post(address, {"seen": asked.context["form"]["seen"].value()})
    assert membership(member, collaboration).role == Role.LEAD
    assert membership(lead, collaboration).role == Role.MEMBER
    assert client.get(address).status_code == 403


def test_a_lead_does_not_reach_into_another_collaboration(
    collaboration: Collaboration, lead: User, stranger: User, signed_in: SignedIn
) -> None:
    other = services.create_collaboration(user=stranger, name="Wave tank")
    theirs = Membership.objects.get(collaboration=other)
    for name in ("remove", "change_role", "hand_over"):
        address = reverse(f"people:{name}", args=[collaboration.pk, theirs.pk])
        assert signed_in(lead).post(address, {"role": "member", "seen": "lead"}).status_code == 404


def test_the_list_takes_the_same_number_of_queries_for_many(
    collaboration: Collaboration,
    lead: User,
    signed_in: SignedIn,
    django_assert_max_num_queries: DjangoAssertNumQueries,
) -> None:
    for number in range(20):
        services.add_member(collaboration=collaboration, email=f"{number}@merrow.example", role="member")
    client = signed_in(lead)
    with django_assert_max_num_queries(8):
        client.get(people(collaboration))


def test_a_name_with_markup_is_shown_as_words(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    User.objects.filter(pk=member.pk).update(name="<script>alert(1)</script>")
    assert "<script>alert" not in signed_in(lead).get(people(collaboration)).content.decode()
