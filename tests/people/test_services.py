"""Who is let in and out of a collaboration, and by which rules."""

import pytest
from allauth.core import context
from django.core import mail
from django.test import RequestFactory
from pytest_django import DjangoCaptureOnCommitCallbacks

from core.errors import UserError
from core.people import services
from core.people.models import Collaboration, Membership, Role, User


def membership(user: User, collaboration: Collaboration) -> Membership:
    return Membership.objects.get(user=user, collaboration=collaboration)


def test_the_creator_of_a_collaboration_leads_it(stranger: User) -> None:
    collaboration = services.create_collaboration(user=stranger, name="Wave tank", about="A lab class.")
    assert membership(stranger, collaboration).role == Role.LEAD


def test_a_known_address_is_added_without_regard_to_case(
    collaboration: Collaboration, stranger: User
) -> None:
    services.add_member(collaboration=collaboration, email=stranger.email.upper(), role=Role.MEMBER)
    assert membership(stranger, collaboration).role == Role.MEMBER


def test_an_unknown_address_gets_a_user_who_cannot_sign_in_yet(collaboration: Collaboration) -> None:
    added = services.add_member(
        collaboration=collaboration, email="new@merrow.example", role=Role.MEMBER, name="Nell New"
    )
    assert added.user.name == "Nell New"
    assert not added.user.has_usable_password()


def test_an_unknown_address_gets_the_link_that_sets_a_password(
    collaboration: Collaboration,
    django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks,
    rf: RequestFactory,
) -> None:
    with context.request_context(rf.get("/")), django_capture_on_commit_callbacks(execute=True):
        services.add_member(collaboration=collaboration, email="new@merrow.example", role=Role.MEMBER)
    (sent,) = mail.outbox
    assert sent.to == ["new@merrow.example"]
    assert "/accounts/password/reset/key/" in sent.body


def test_someone_who_is_here_is_not_added_twice(collaboration: Collaboration, member: User) -> None:
    with pytest.raises(UserError, match="is here already"):
        services.add_member(collaboration=collaboration, email=member.email, role=Role.LEAD)
    assert collaboration.memberships.count() == 2


@pytest.mark.parametrize(("email", "role"), [("not an address", Role.MEMBER), ("a@merrow.example", "king")])
def test_an_odd_address_or_role_is_refused(collaboration: Collaboration, email: str, role: str) -> None:
    with pytest.raises(UserError):
        services.add_member(collaboration=collaboration, email=email, role=role)
    assert collaboration.memberships.count() == 2


def test_a_member_can_be_removed(collaboration: Collaboration, member: User) -> None:
    services.remove_member(membership(member, collaboration))
    assert not Membership.objects.filter(user=member).exists()


def test_the_last_lead_cannot_be_removed(collaboration: Collaboration, lead: User) -> None:
    with pytest.raises(UserError, match="last lead"):
        services.remove_member(membership(lead, collaboration))


def test_the_last_lead_cannot_become_a_member(collaboration: Collaboration, lead: User) -> None:
    with pytest.raises(UserError, match="last lead"):
        services.change_role(membership(lead, collaboration), Role.MEMBER)
    assert membership(lead, collaboration).role == Role.LEAD


def test_one_of_two_leads_can_go(collaboration: Collaboration, lead: User, member: User) -> None:
    services.change_role(membership(member, collaboration), Role.LEAD)
    services.remove_member(membership(lead, collaboration))
    assert list(collaboration.memberships.values_list("user", flat=True)) == [member.pk]


def test_someone_without_a_name_is_never_shown_by_a_whole_address(db: None) -> None:
    assert str(User.objects.create_user("nameless@merrow.example")) == "nameless"
