"""What whoever holds the link of an invitation sees and can do."""

from datetime import timedelta
from functools import partial
from importlib import import_module
from urllib.parse import parse_qs, urlsplit

import pytest
from django.db import connection
from django.test import Client
from django.urls import reverse
from django.utils import timezone
from django.utils.html import escape

from core.errors import UserError
from core.people import services
from core.people.models import Collaboration, Invitation, LogEntry, Membership, Role, User
from core.people.services import NewInvitation
from tests.conftest import PASSWORD
from tests.meanwhile import meanwhile
from tests.people.conftest import SignedIn, in_a_week, membership

NEWCOMER = {"email": "Nell@merrow.example", "name": "Nell New", "password": PASSWORD, "again": PASSWORD}


def door(invitation: NewInvitation) -> str:
    return reverse("people:invitation", args=[invitation.secret])


@pytest.fixture
def mailed(collaboration: Collaboration, lead: User, monkeypatch: pytest.MonkeyPatch) -> NewInvitation:
    """An invitation that was sent to nell@merrow.example."""
    sending = import_module("core.people.services.invite_by_mail")
    monkeypatch.setattr(sending, "fresh_secret", lambda: "s" * 43)
    sent = services.invite_by_mail(
        by=lead,
        collaboration=collaboration,
        email="nell@merrow.example",
        role=Role.MEMBER,
        expires_at=in_a_week(),
    )
    return NewInvitation(sent.invitation, "s" * 43)


def test_the_page_says_who_invites_to_what_in_which_role(
    for_one: NewInvitation, stranger: User, client: Client, signed_in: SignedIn
) -> None:
    for somebody in (client, signed_in(stranger)):
        page = somebody.get(door(for_one)).content.decode()
        assert "Lin Lead invites you to Lake Merrow survey, in the role of student" in page
        assert "submit theories and curves" in page
        assert "upload, publish and withdraw releases" not in page


def test_nothing_of_the_page_is_kept_indexed_or_told(for_one: NewInvitation, client: Client) -> None:
    for address, policy in (
        (door(for_one), "strict-origin"),
        (reverse("people:invitation", args=["unknown"]), "no-referrer"),
    ):
        answer = client.get(address)
        assert answer["Referrer-Policy"] == policy
        assert answer["X-Robots-Tag"].startswith("noindex")
        assert answer["Cache-Control"] == "no-store"


def test_unknown_expired_revoked_and_used_ones_answer_alike(
    collaboration: Collaboration, lead: User, member: User, stranger: User, signed_in: SignedIn
) -> None:
    make = partial(services.invite_by_link, by=lead, collaboration=collaboration, role=Role.OBSERVER)
    expired = make(expires_at=timezone.now() - timedelta(seconds=1))
    revoked, used = make(expires_at=in_a_week()), make(expires_at=in_a_week())
    services.revoke_invitation(by=lead, invitation=revoked.invitation)
    services.join(user=stranger, invitation=used.invitation)
    secrets = ["unknown", expired.secret, revoked.secret, used.secret]
    for client, method in ((Client(), "GET"), (signed_in(member), "GET"), (signed_in(member), "POST")):
        answers = [client.generic(method, reverse("people:invitation", args=[secret])) for secret in secrets]
        assert {answer.status_code for answer in answers} == {404}
        assert len({answer.content for answer in answers}) == 1
        assert len({str(sorted(answer.headers.items())) for answer in answers}) == 1


def test_somebody_signed_in_joins_in_the_role_of_the_invitation(
    collaboration: Collaboration, for_one: NewInvitation, stranger: User, signed_in: SignedIn
) -> None:
    answer = signed_in(stranger).post(door(for_one))
    assert answer["Location"] == collaboration.get_absolute_url()
    joined = membership(stranger, collaboration)
    assert (joined.role, joined.came_by) == (Role.STUDENT, Membership.CameBy.LINK)
    entry = LogEntry.objects.get(deed="joined")
    assert (entry.who, entry.about) == (stranger, "as student, by the link “Nell” of Lin Lead")


def test_who_only_looks_does_not_join(
    collaboration: Collaboration, for_one: NewInvitation, stranger: User, signed_in: SignedIn
) -> None:
    signed_in(stranger).get(door(for_one))
    assert collaboration.memberships.count() == 2
    assert Invitation.objects.get().is_open


@pytest.mark.parametrize("method", ["get", "post"])
def test_who_is_here_keeps_their_role_and_the_invitation_its_use(
    method: str, collaboration: Collaboration, for_one: NewInvitation, member: User, signed_in: SignedIn
) -> None:
    page = signed_in(member).generic(method, door(for_one)).content.decode()
    assert "You are here already, as member" in page
    assert membership(member, collaboration).role == Role.MEMBER
    assert Invitation.objects.get().is_open


def test_a_link_for_one_is_used_up_by_one(
    for_one: NewInvitation, stranger: User, signed_in: SignedIn, client: Client
) -> None:
    signed_in(stranger).post(door(for_one))
    assert client.post(door(for_one), NEWCOMER).status_code == 404
    assert not User.objects.filter(name="Nell New").exists()


@pytest.mark.django_db(transaction=True)
def test_of_two_who_use_a_link_for_one_at_once_one_joins(
    collaboration: Collaboration, for_one: NewInvitation, stranger: User, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = User.objects.create_user("other@merrow.example", name="Otto Other")
    join = partial(services.join, invitation=for_one.invitation)
    joining = import_module("core.people.services.join")
    with meanwhile(monkeypatch, joining, "_use", partial(join, user=other)) as refusals:
        join(user=stranger)
    assert refusals == ["invitation-closed"]
    assert collaboration.memberships.count() == 3
    assert Invitation.objects.get().uses == 1


@pytest.mark.django_db(transaction=True)
def test_a_link_that_is_revoked_just_before_its_use_opens_nothing(
    collaboration: Collaboration, lead: User, for_one: NewInvitation, client: Client
) -> None:
    looked_at = Invitation.objects.get()
    services.revoke_invitation(by=lead, invitation=for_one.invitation)
    assert looked_at.is_open
    with pytest.raises(UserError, match="opens nothing"):
        services.join_as_newcomer(
            invitation=looked_at, email="nell@merrow.example", name="Nell", password=PASSWORD
        )
    assert not User.objects.filter(email="nell@merrow.example").exists()


def test_what_is_revoked_while_somebody_joins_answers_as_if_it_had_never_been(
    for_one: NewInvitation, stranger: User, signed_in: SignedIn, monkeypatch: pytest.MonkeyPatch
) -> None:
    def revoked(**words: object) -> None:
        raise UserError("invitation-closed", "this invitation opens nothing any more")

    monkeypatch.setattr(services, "join", revoked)
    answer = signed_in(stranger).post(door(for_one))
    assert answer.status_code == 404
    assert "opens nothing" in answer.content.decode()


def test_a_link_for_many_lets_many_in(
    collaboration: Collaboration, for_many: NewInvitation, stranger: User, signed_in: SignedIn, client: Client
) -> None:
    signed_in(stranger).post(door(for_many))
    client.post(door(for_many), NEWCOMER)
    assert collaboration.memberships.count() == 4
    assert Invitation.objects.get().uses == 2


def test_who_signs_in_comes_back_to_the_invitation(
    for_one: NewInvitation, stranger: User, client: Client
) -> None:
    page = client.get(door(for_one)).content.decode()
    sign_in = f"{reverse('account_login')}?next={door(for_one)}"
    assert f'href="{escape(sign_in)}"' in page
    (back,) = parse_qs(urlsplit(sign_in).query)["next"]
    answer = client.post(sign_in, {"login": stranger.email, "password": PASSWORD, "next": back})
    assert answer["Location"] == door(for_one)


def test_a_newcomer_gets_an_account_is_signed_in_and_has_joined(
    collaboration: Collaboration, for_one: NewInvitation, client: Client
) -> None:
    answer = client.post(door(for_one), NEWCOMER)
    assert answer["Location"] == collaboration.get_absolute_url()
    user = User.objects.get(email="nell@merrow.example")
    assert (user.name, user.check_password(PASSWORD)) == ("Nell New", True)
    assert client.session["_auth_user_id"] == str(user.pk)
    joined = membership(user, collaboration)
    assert (joined.role, joined.came_by) == (Role.STUDENT, Membership.CameBy.LINK)
    assert client.get(answer["Location"]).status_code == 200


@pytest.mark.parametrize(
    ("change", "reason"),
    [
        ({"again": "another calm lake"}, "The two passwords differ"),
        ({"password": "short", "again": "short"}, "too short"),
        ({"password": "2938475610", "again": "2938475610"}, "entirely numeric"),
        ({"name": " "}, "This field is required"),
        ({"email": "nobody"}, "valid email"),
    ],
)
def test_what_is_wrong_with_a_new_account_is_said_and_nothing_is_kept(
    change: dict[str, str], reason: str, for_one: NewInvitation, client: Client
) -> None:
    answer = client.post(door(for_one), NEWCOMER | change)
    assert reason in answer.content.decode()
    assert not User.objects.filter(name="Nell New").exists()
    assert Invitation.objects.get().is_open


def test_an_address_with_an_account_is_sent_to_sign_in(
    collaboration: Collaboration, for_one: NewInvitation, stranger: User, client: Client
) -> None:
    answer = client.post(door(for_one), NEWCOMER | {"email": stranger.email.upper()})
    page = answer.content.decode()
    assert "There is an account with this address already" in page
    assert "ask for a new password" in page
    assert "_auth_user_id" not in client.session
    stranger.refresh_from_db()
    assert stranger.check_password(PASSWORD)
    assert collaboration.memberships.count() == 2


def test_whether_an_address_has_an_account_is_not_told_without_an_open_invitation(
    db: None, stranger: User, client: Client
) -> None:
    unknown = reverse("people:invitation", args=["unknown"])
    answers = [client.post(unknown, NEWCOMER | {"email": email}) for email in (stranger.email, "a@b.example")]
    assert len({answer.content for answer in answers}) == 1


def test_an_invitation_by_e_mail_makes_an_account_for_its_address_alone(
    collaboration: Collaboration, mailed: NewInvitation, client: Client
) -> None:
    assert 'value="nell@merrow.example"' in client.get(door(mailed)).content.decode()
    client.post(door(mailed), NEWCOMER | {"email": "mallory@elsewhere.example"})
    user = User.objects.get(name="Nell New")
    assert user.email == "nell@merrow.example"
    assert membership(user, collaboration).came_by == Membership.CameBy.MAIL


def test_an_invitation_by_e_mail_proves_no_other_address(
    collaboration: Collaboration, mailed: NewInvitation, stranger: User, signed_in: SignedIn
) -> None:
    signed_in(stranger).post(door(mailed))
    assert membership(stranger, collaboration).came_by == Membership.CameBy.LINK
    assert "@" not in LogEntry.objects.get(deed="joined").about


def test_a_known_user_proves_their_address_by_the_e_mail(
    collaboration: Collaboration, mailed: NewInvitation, signed_in: SignedIn
) -> None:
    nell = User.objects.create_user("nell@merrow.example", PASSWORD)
    signed_in(nell).post(door(mailed))
    assert membership(nell, collaboration).came_by == Membership.CameBy.MAIL


def test_who_makes_many_accounts_in_a_minute_has_to_wait(for_many: NewInvitation, client: Client) -> None:
    answers = [client.post(door(for_many), {}) for _ in range(61)]
    # As many as a class has pass from one address.
    assert [answer.status_code for answer in answers] == [200] * 60 + [429]
    assert "Wait a minute" in answers[-1].content.decode()


@pytest.mark.django_db(transaction=True)
def test_who_joins_while_the_invitation_is_revoked_is_told_so(
    collaboration: Collaboration,
    for_one: NewInvitation,
    lead: User,
    stranger: User,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    revoking = import_module("core.people.services.revoke_invitation")
    joining = partial(services.join, user=stranger, invitation=for_one.invitation)
    with meanwhile(monkeypatch, revoking, "record", joining) as refusals:
        services.revoke_invitation(by=lead, invitation=for_one.invitation)
    assert refusals == ["invitation-closed"]
    assert collaboration.memberships.count() == 2


@pytest.mark.django_db(transaction=True)
def test_nobody_waits_while_the_password_of_another_is_hashed(
    for_one: NewInvitation, monkeypatch: pytest.MonkeyPatch
) -> None:
    is_within: list[bool] = []
    set_password = User.set_password

    def hashing(user: User, password: str | None) -> None:
        is_within.append(connection.in_atomic_block)
        set_password(user, password)

    monkeypatch.setattr(User, "set_password", hashing)
    services.join_as_newcomer(
        invitation=for_one.invitation, email="nell@merrow.example", name="Nell", password=PASSWORD
    )
    assert is_within == [False]


def test_forms_are_held_to_their_own_site(for_one: NewInvitation) -> None:
    client = Client(enforce_csrf_checks=True)
    assert client.post(door(for_one), NEWCOMER).status_code == 403
    assert not User.objects.filter(name="Nell New").exists()
