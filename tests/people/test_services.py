"""How collaborations start, change their words, and get people by command."""

from functools import partial

import pytest
from allauth.core import context
from django.core import mail
from django.test import RequestFactory
from pytest_django import DjangoCaptureOnCommitCallbacks

from core.errors import UserError
from core.people import services
from core.people.models import Collaboration, LogEntry, Membership, Role, User, UserManager
from tests.meanwhile import meanwhile
from tests.people.conftest import membership


def test_the_creator_of_a_collaboration_leads_it(stranger: User) -> None:
    collaboration = services.create_collaboration(user=stranger, name="Wave tank", about="A lab class.")
    started = membership(stranger, collaboration)
    assert (started.role, started.came_by) == (Role.LEAD, Membership.CameBy.START)


def test_starting_and_editing_are_in_the_log(stranger: User) -> None:
    collaboration = services.create_collaboration(user=stranger, name="Wave tank")
    services.edit_collaboration(
        user=stranger, collaboration=collaboration, name="Wave tank 2", about="", seen=0
    )
    entries = LogEntry.objects.filter(collaboration=collaboration, who=stranger).order_by("pk")
    assert [(entry.deed, entry.about) for entry in entries] == [
        ("started", "Wave tank"),
        ("edited_collaboration", "Wave tank 2"),
    ]


def test_words_that_were_changed_meanwhile_are_not_replaced(collaboration: Collaboration, lead: User) -> None:
    edit = partial(services.edit_collaboration, user=lead, collaboration=collaboration, about="", seen=0)
    edit(name="First")
    with pytest.raises(UserError, match="omebody else has changed this"):
        edit(name="Second")
    assert Collaboration.objects.get().name == "First"
    assert LogEntry.objects.count() == 1


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


def test_who_is_added_is_in_the_log_without_an_address(collaboration: Collaboration, lead: User) -> None:
    services.add_member(collaboration=collaboration, email="new@merrow.example", role=Role.MEMBER, by=lead)
    entry = LogEntry.objects.get()
    assert (entry.deed, entry.who, entry.about) == ("added_person", lead, "new, as member")


def test_someone_who_is_here_is_not_added_twice(collaboration: Collaboration, member: User) -> None:
    with pytest.raises(UserError, match="is here already"):
        services.add_member(collaboration=collaboration, email=member.email, role=Role.LEAD)
    assert collaboration.memberships.count() == 2


@pytest.mark.parametrize(("email", "role"), [("not an address", Role.MEMBER), ("a@merrow.example", "king")])
def test_an_odd_address_or_role_is_refused(collaboration: Collaboration, email: str, role: str) -> None:
    with pytest.raises(UserError):
        services.add_member(collaboration=collaboration, email=email, role=role)
    assert collaboration.memberships.count() == 2


@pytest.mark.django_db(transaction=True)
def test_two_collaborations_add_the_same_new_address_at_the_same_moment(
    collaboration: Collaboration, stranger: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = services.create_collaboration(user=stranger, name="Wave tank")
    add = partial(services.add_member, email="new@merrow.example", role=Role.MEMBER)
    with meanwhile(monkeypatch, UserManager, "create_user", partial(add, collaboration=other)) as refusals:
        add(collaboration=collaboration)
    assert refusals == []
    user = User.objects.get(email="new@merrow.example")
    assert set(user.collaborations.all()) == {collaboration, other}


def test_someone_without_a_name_is_never_shown_by_a_whole_address(db: None) -> None:
    assert str(User.objects.create_user("nameless@merrow.example")) == "nameless"
