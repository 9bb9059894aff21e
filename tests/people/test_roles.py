"""Leaving, being removed, another role, and the lead handed over; also by two at once."""

from functools import partial

import pytest

from core.errors import UserError
from core.people import services
from core.people.access import seen_by
from core.people.models import Collaboration, Invitation, LogEntry, Membership, Role, User
from core.people.services import NewInvitation
from core.theories.models import Theory
from tests.meanwhile import meanwhile
from tests.people.conftest import in_a_week, membership


def roles(collaboration: Collaboration) -> dict[str, str]:
    """Who is here by name, with their roles."""
    return dict(collaboration.memberships.values_list("user__name", "role"))


def told() -> list[tuple[str, str, str]]:
    """What the log says, the oldest first."""
    return [(str(entry.who), entry.deed, entry.about) for entry in LogEntry.objects.order_by("pk")]


def test_anyone_but_the_last_lead_leaves(collaboration: Collaboration, member: User) -> None:
    services.leave(membership(member, collaboration))
    assert roles(collaboration) == {"Lin Lead": "lead"}
    assert told() == [("Mo Member", "left", "member until then")]


def test_the_last_lead_cannot_leave(collaboration: Collaboration, lead: User) -> None:
    with pytest.raises(UserError, match="last lead") as refusal:
        services.leave(membership(lead, collaboration))
    assert refusal.value.remedy == "Make someone else a lead first"
    assert roles(collaboration)["Lin Lead"] == "lead"


def test_a_member_can_be_removed(collaboration: Collaboration, lead: User, member: User) -> None:
    services.remove_member(by=lead, membership=membership(member, collaboration))
    assert roles(collaboration) == {"Lin Lead": "lead"}
    assert told() == [("Lin Lead", "removed_person", "Mo Member, member until then")]


def test_the_last_lead_cannot_be_removed(collaboration: Collaboration, lead: User) -> None:
    with pytest.raises(UserError, match="last lead"):
        services.remove_member(by=lead, membership=membership(lead, collaboration))


def test_the_last_lead_cannot_become_a_member(collaboration: Collaboration, lead: User) -> None:
    own = membership(lead, collaboration)
    with pytest.raises(UserError, match="last lead"):
        services.change_role(by=lead, membership=own, role=Role.MEMBER, seen=Role.LEAD)
    assert roles(collaboration)["Lin Lead"] == "lead"


def test_one_of_two_leads_can_go(collaboration: Collaboration, lead: User, second_lead: User) -> None:
    services.leave(membership(lead, collaboration))
    assert "Lin Lead" not in roles(collaboration)


def test_a_change_of_role_is_in_the_log(collaboration: Collaboration, lead: User, member: User) -> None:
    services.change_role(
        by=lead, membership=membership(member, collaboration), role=Role.OBSERVER, seen=Role.MEMBER
    )
    assert roles(collaboration)["Mo Member"] == "observer"
    assert told() == [("Lin Lead", "changed_role", "Mo Member, from member to observer")]


def test_the_same_role_again_is_no_change(collaboration: Collaboration, lead: User, member: User) -> None:
    own = membership(member, collaboration)
    services.change_role(by=lead, membership=own, role=Role.MEMBER, seen=Role.MEMBER)
    assert told() == []


def test_a_role_that_was_not_seen_is_not_replaced(
    collaboration: Collaboration, lead: User, member: User
) -> None:
    person = membership(member, collaboration)
    services.change_role(by=lead, membership=person, role=Role.STUDENT, seen=Role.MEMBER)
    with pytest.raises(UserError, match="is student by now: somebody else has changed it"):
        services.change_role(by=lead, membership=person, role=Role.OBSERVER, seen=Role.MEMBER)
    assert roles(collaboration)["Mo Member"] == "student"


def test_who_leads_no_more_changes_nothing(
    collaboration: Collaboration, lead: User, second_lead: User, member: User
) -> None:
    person = membership(member, collaboration)
    services.hand_over(by=lead, membership=membership(second_lead, collaboration), seen=Role.LEAD)
    with pytest.raises(UserError, match="do not lead"):
        services.change_role(by=lead, membership=person, role=Role.LEAD, seen=Role.MEMBER)
    with pytest.raises(UserError, match="do not lead"):
        services.remove_member(by=lead, membership=person)
    with pytest.raises(UserError, match="do not lead"):
        services.invite_by_link(by=lead, collaboration=collaboration, role=Role.LEAD, expires_at=in_a_week())


def test_the_lead_is_handed_over(collaboration: Collaboration, lead: User, member: User) -> None:
    services.hand_over(by=lead, membership=membership(member, collaboration), seen=Role.MEMBER)
    assert roles(collaboration) == {"Lin Lead": "member", "Mo Member": "lead"}
    assert told() == [("Lin Lead", "handed_over", "to Mo Member, member until then")]


def test_nobody_hands_the_lead_to_themselves(collaboration: Collaboration, lead: User) -> None:
    with pytest.raises(UserError, match="yours already"):
        services.hand_over(by=lead, membership=membership(lead, collaboration), seen=Role.LEAD)
    assert roles(collaboration)["Lin Lead"] == "lead"


def test_a_promoted_student_goes_on_seeing_what_stands_at_their_desk(
    collaboration: Collaboration, lead: User, member: User, student: User
) -> None:
    at_desk = Theory.objects.create(
        collaboration=collaboration, name="Two basins", submitted_by=student, desk=student
    )
    person = membership(student, collaboration)
    services.change_role(by=lead, membership=person, role=Role.MEMBER, seen=Role.STUDENT)
    at_desk.refresh_from_db()
    assert at_desk.desk == student
    assert list(seen_by(Theory.objects.all(), student)) == [at_desk]
    assert not seen_by(Theory.objects.all(), member).exists()


@pytest.mark.parametrize("way", ["leave", "removed", "role", "hand over"])
def test_who_ceases_to_lead_keeps_no_way_back(
    way: str, collaboration: Collaboration, lead: User, second_lead: User, for_one: NewInvitation
) -> None:
    own, other = membership(lead, collaboration), membership(second_lead, collaboration)
    if way == "leave":
        services.leave(own)
    elif way == "removed":
        services.remove_member(by=second_lead, membership=own)
    elif way == "role":
        services.change_role(by=second_lead, membership=own, role=Role.MEMBER, seen=Role.LEAD)
    else:
        services.hand_over(by=lead, membership=other, seen=Role.LEAD)
    assert not Invitation.objects.get().is_open
    assert ("those that Lin Lead made as a lead", "revoked_invitation") in {
        (about, deed) for _, deed, about in told()
    }
    with pytest.raises(UserError, match="opens nothing"):
        services.join(user=User.objects.create_user("back@merrow.example"), invitation=for_one.invitation)


def test_an_invitation_that_was_used_stays_so_when_its_maker_leaves(
    collaboration: Collaboration, lead: User, second_lead: User, stranger: User, for_one: NewInvitation
) -> None:
    services.join(user=stranger, invitation=for_one.invitation)
    services.leave(membership(lead, collaboration))
    assert Invitation.objects.get().revoked_at is None


@pytest.mark.django_db(transaction=True)
def test_of_two_leads_who_leave_at_once_one_stays(
    collaboration: Collaboration, lead: User, second_lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = partial(services.leave, membership(second_lead, collaboration))
    with meanwhile(monkeypatch, Membership, "delete", other) as refusals:
        services.leave(membership(lead, collaboration))
    assert refusals == ["last-lead"]
    assert roles(collaboration) == {"Lou Lead": "lead", "Mo Member": "member"}


@pytest.mark.django_db(transaction=True)
def test_of_two_leads_who_demote_each_other_one_stays(
    collaboration: Collaboration, lead: User, second_lead: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    first, second = membership(lead, collaboration), membership(second_lead, collaboration)
    demote = partial(services.change_role, role=Role.MEMBER, seen=Role.LEAD)
    other = partial(demote, by=second_lead, membership=first)
    with meanwhile(monkeypatch, Membership, "save", other) as refusals:
        demote(by=lead, membership=second)
    assert refusals == ["no-lead"]
    assert roles(collaboration)["Lin Lead"] == "lead"


@pytest.mark.django_db(transaction=True)
def test_of_two_who_change_one_role_at_once_the_second_is_told(
    collaboration: Collaboration,
    lead: User,
    second_lead: User,
    member: User,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    change = partial(services.change_role, membership=membership(member, collaboration), seen=Role.MEMBER)
    other = partial(change, by=second_lead, role=Role.OBSERVER)
    with meanwhile(monkeypatch, Membership, "save", other) as refusals:
        change(by=lead, role=Role.STUDENT)
    assert refusals == ["role-changed-meanwhile"]
    assert roles(collaboration)["Mo Member"] == "student"


@pytest.mark.django_db(transaction=True)
def test_who_is_removed_at_the_same_moment_gets_no_role(
    collaboration: Collaboration,
    lead: User,
    second_lead: User,
    member: User,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    person = membership(member, collaboration)
    other = partial(services.change_role, by=second_lead, membership=person, role=Role.LEAD, seen=Role.MEMBER)
    with meanwhile(monkeypatch, Membership, "delete", other) as refusals:
        services.remove_member(by=lead, membership=membership(member, collaboration))
    assert refusals == ["not-here"]
    assert "Mo Member" not in roles(collaboration)
