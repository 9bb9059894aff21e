"""Invitations as leads make them, send them, see them and revoke them."""

from datetime import timedelta
from functools import partial
from typing import Any

import pytest
from django.core import mail
from django.core.mail.backends.base import BaseEmailBackend
from django.test import Client
from django.urls import reverse
from django.utils import timezone
from pytest_django import DjangoAssertNumQueries

from core.errors import UserError
from core.people import services
from core.people.models import Collaboration, Invitation, LogEntry, Role, User
from core.people.services import NewInvitation
from tests.people.conftest import SignedIn, in_a_week

LINK = {"link-label": "The class", "link-role": "student", "link-days": "7", "link-is_for_many": "on"}
MAIL = {"mail-email": "Nell.New@merrow.example", "mail-role": "observer", "mail-days": "1"}


class NoPost(BaseEmailBackend):
    """A post that takes nothing."""

    def send_messages(self, email_messages: Any) -> int:
        raise OSError("nobody there")


def address(name: str, collaboration: Collaboration) -> str:
    return reverse(f"people:{name}", args=[collaboration.pk])


def page(client: Client, collaboration: Collaboration) -> str:
    return client.get(address("people", collaboration)).content.decode()


def test_a_lead_makes_a_link_and_sees_its_secret_once(
    collaboration: Collaboration, lead: User, signed_in: SignedIn, client: Client
) -> None:
    answer = signed_in(lead).post(address("new_invitation", collaboration), LINK)
    link = answer.context["new_address"]
    assert link in answer.content.decode()
    assert "no-store" in answer["Cache-Control"]
    assert client.get(link).status_code == 200
    again = page(signed_in(lead), collaboration)
    assert link not in again
    assert "The class" in again


def test_only_the_hash_of_the_secret_is_kept(for_one: NewInvitation) -> None:
    assert for_one.secret not in str(Invitation.objects.values_list().get())
    assert len(for_one.invitation.token_sha256) == 64


@pytest.mark.parametrize(("days", "label"), [(1, "a day"), (7, "a week"), (30, "a month")])
def test_a_link_is_open_as_long_as_its_maker_says(
    days: int, label: str, collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    answer = signed_in(lead).post(address("new_invitation", collaboration), LINK | {"link-days": str(days)})
    assert label in answer.content.decode()
    left = Invitation.objects.get().expires_at - timezone.now()
    assert timedelta(days=days, minutes=-1) < left <= timedelta(days=days)


def test_a_link_for_many_makes_no_leads(
    collaboration: Collaboration, lead: User, signed_in: SignedIn
) -> None:
    answer = signed_in(lead).post(address("new_invitation", collaboration), LINK | {"link-role": "lead"})
    assert "a link for many makes no leads" in answer.content.decode().lower()
    assert not Invitation.objects.exists()


def test_a_lead_sees_how_often_a_link_was_used_and_by_when_it_ends(
    collaboration: Collaboration, lead: User, stranger: User, signed_in: SignedIn, for_many: NewInvitation
) -> None:
    services.join(user=stranger, invitation=for_many.invitation)
    used = Invitation.objects.get()
    assert used.uses == 1
    shown = page(signed_in(lead), collaboration)
    assert '<td class="number">1</td>' in shown
    for moment in (used.last_used_at, used.expires_at):
        assert moment is not None
        assert f"{moment:%-d %b %Y, %H:%M}" in shown


def test_a_lead_revokes_a_link(
    collaboration: Collaboration, lead: User, signed_in: SignedIn, for_many: NewInvitation, client: Client
) -> None:
    signed_in(lead).post(reverse("people:revoke_invitation", args=[for_many.invitation.pk]))
    assert client.get(reverse("people:invitation", args=[for_many.secret])).status_code == 404
    assert "revoked" in page(signed_in(lead), collaboration)


def test_a_link_that_is_revoked_again_keeps_its_time(lead: User, for_one: NewInvitation) -> None:
    services.revoke_invitation(by=lead, invitation=for_one.invitation)
    first = Invitation.objects.get().revoked_at
    services.revoke_invitation(by=lead, invitation=for_one.invitation)
    assert Invitation.objects.get().revoked_at == first
    assert LogEntry.objects.filter(deed="revoked_invitation").count() == 1


def test_only_leads_invite_and_revoke(
    collaboration: Collaboration,
    member: User,
    student: User,
    observer: User,
    stranger: User,
    for_one: NewInvitation,
    signed_in: SignedIn,
) -> None:
    for user, status in ((member, 403), (student, 403), (observer, 403), (stranger, 404)):
        client = signed_in(user)
        assert client.post(address("new_invitation", collaboration), LINK).status_code == status
        assert client.post(address("mail_invitation", collaboration), MAIL).status_code == status
        revoke = reverse("people:revoke_invitation", args=[for_one.invitation.pk])
        assert client.post(revoke).status_code == status
    assert Invitation.objects.get().is_open


def test_others_than_leads_see_no_invitations(
    collaboration: Collaboration, member: User, for_one: NewInvitation, signed_in: SignedIn
) -> None:
    assert "Nell" not in page(signed_in(member), collaboration)


@pytest.mark.django_db(transaction=True)
def test_an_invitation_by_e_mail_holds_a_link_that_opens(
    collaboration: Collaboration, lead: User, signed_in: SignedIn, client: Client
) -> None:
    answer = signed_in(lead).post(address("mail_invitation", collaboration), MAIL, follow=True)
    assert "on its way to nell.new@merrow.example" in answer.content.decode()
    (sent,) = mail.outbox
    assert sent.to == ["nell.new@merrow.example"]
    assert "Lin Lead invites you" in sent.body
    link = next(line for line in sent.body.splitlines() if line.startswith("http"))
    assert "nell.new@merrow.example" in client.get(link).content.decode()


def test_nothing_is_mailed_before_all_is_committed(collaboration: Collaboration, lead: User) -> None:
    invite(collaboration, lead)
    assert mail.outbox == []


@pytest.mark.django_db(transaction=True)
def test_an_e_mail_that_cannot_be_sent_is_told_with_what_to_do(
    collaboration: Collaboration, lead: User, signed_in: SignedIn, settings: Any
) -> None:
    settings.EMAIL_BACKEND = f"{__name__}.NoPost"
    answer = signed_in(lead).post(address("mail_invitation", collaboration), MAIL, follow=True)
    told = answer.content.decode()
    assert "could not be sent" in told
    assert "make a link and hand it on yourself" in told
    assert Invitation.objects.get().is_open


def test_who_is_here_is_not_invited(collaboration: Collaboration, lead: User, member: User) -> None:
    with pytest.raises(UserError, match="is here already"):
        invite(collaboration, lead, member.email.upper())
    assert not Invitation.objects.exists()


def test_an_address_has_one_open_invitation_here(collaboration: Collaboration, lead: User) -> None:
    first = invite(collaboration, lead)
    with pytest.raises(UserError, match="open already"):
        invite(collaboration, lead)
    services.revoke_invitation(by=lead, invitation=first)
    assert invite(collaboration, lead).is_open


def test_only_so_many_invitations_by_e_mail_are_open_at_once(
    collaboration: Collaboration, lead: User, for_many: NewInvitation
) -> None:
    Invitation.objects.bulk_create(
        Invitation(
            collaboration=collaboration,
            token_sha256=f"{number:064d}",
            role=Role.STUDENT,
            email=f"pupil{number}@merrow.example",
            created_by=lead,
            expires_at=in_a_week(),
        )
        for number in range(199)
    )
    last = invite(collaboration, lead)
    with pytest.raises(UserError, match="make one link for many"):
        invite(collaboration, lead, "late@merrow.example")
    services.revoke_invitation(by=lead, invitation=last)
    assert invite(collaboration, lead, "late@merrow.example").is_open


def test_what_is_wrong_with_an_address_is_said_beside_it(
    collaboration: Collaboration, lead: User, member: User, signed_in: SignedIn
) -> None:
    client = signed_in(lead)
    for email, reason in ((member.email, "is here already"), ("nobody", "valid email")):
        answer = client.post(address("mail_invitation", collaboration), MAIL | {"mail-email": email})
        assert reason in answer.content.decode()


def test_the_log_tells_of_invitations_without_addresses(
    collaboration: Collaboration, lead: User, for_many: NewInvitation
) -> None:
    services.revoke_invitation(by=lead, invitation=invite(collaboration, lead))
    entries = LogEntry.objects.order_by("pk")
    assert [(entry.who, entry.deed, entry.about) for entry in entries] == [
        (lead, "invited", "“The class” by link, as student"),
        (lead, "invited", "nell… by e-mail, as observer"),
        (lead, "revoked_invitation", "nell…, as observer"),
    ]
    assert "@" not in str(list(entries.values_list("about", "detail", "url")))


def test_the_page_takes_the_same_number_of_queries_for_many_invitations(
    collaboration: Collaboration,
    lead: User,
    signed_in: SignedIn,
    django_assert_max_num_queries: DjangoAssertNumQueries,
) -> None:
    make = partial(
        services.invite_by_link,
        by=lead,
        collaboration=collaboration,
        role=Role.MEMBER,
        expires_at=in_a_week(),
    )
    for _ in range(8):
        make()
    client = signed_in(lead)
    with django_assert_max_num_queries(8):
        client.get(address("people", collaboration))


def invite(collaboration: Collaboration, lead: User, email: str = "nell@merrow.example") -> Invitation:
    return services.invite_by_mail(
        by=lead, collaboration=collaboration, email=email, role=Role.OBSERVER, expires_at=in_a_week()
    ).invitation
