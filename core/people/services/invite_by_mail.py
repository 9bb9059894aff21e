"""Invite by e-mail."""

from dataclasses import dataclass
from datetime import datetime

from django.db import transaction

from core.errors import UserError, record_fault
from core.people.log import Deed, record
from core.people.mails import send_invitation
from core.people.models import Collaboration, Invitation, User
from core.people.services.invite import fresh_secret, hashed
from core.people.services.rules import (
    known_address,
    known_role,
    lock,
    open_invitations,
    people_page,
    refuse_who_is_here,
    still_lead,
)

# Each is an e-mail to somebody who may not have asked for it.
MOST_OPEN = 200


@dataclass
class MailedInvitation:
    """An invitation, and the id of the fault that kept its e-mail from going out, known once all is committed."""

    invitation: Invitation
    fault_id: str = ""


@transaction.atomic
def invite_by_mail(
    *, by: User, collaboration: Collaboration, email: str, role: str, expires_at: datetime
) -> MailedInvitation:
    """An invitation for one, whose link goes to an address and is told to nobody else."""
    address, role = known_address(email), known_role(role)
    lock(collaboration)
    still_lead(by, collaboration)
    refuse_who_is_here(address, collaboration)
    _refuse_second(address, collaboration)
    _refuse_too_many(collaboration)
    secret = fresh_secret()
    mailed = MailedInvitation(
        Invitation.objects.create(
            collaboration=collaboration,
            token_sha256=hashed(secret),
            role=role,
            email=address,
            created_by=by,
            expires_at=expires_at,
        )
    )
    record(
        Deed.INVITED,
        who=by,
        collaboration=collaboration,
        about=f"{shortened(address)} by e-mail, as {role}",
        url=people_page(collaboration),
    )

    def send() -> None:
        # Whatever goes wrong with the e-mail, the invitation is there, and its maker is told of it.
        try:
            send_invitation(mailed.invitation, secret)
        except Exception as error:
            mailed.fault_id = record_fault(error, "mailing an invitation")

    transaction.on_commit(send)
    return mailed


def shortened(address: str) -> str:
    """An address as members may read it: never the whole of it."""
    return f"{address.partition('@')[0]}…"


def _refuse_second(address: str, collaboration: Collaboration) -> None:
    if open_invitations().filter(collaboration=collaboration, email=address).exists():
        reason = f"an invitation to {address} is open already"
        raise UserError("already-invited", reason, "Revoke that one first to send another")


def _refuse_too_many(collaboration: Collaboration) -> None:
    if open_invitations().filter(collaboration=collaboration).exclude(email="").count() >= MOST_OPEN:
        reason = f"{MOST_OPEN} invitations by e-mail are open already, as many as there can be at once"
        raise UserError("too-many-invitations", reason, "Revoke some, or make one link for many")
