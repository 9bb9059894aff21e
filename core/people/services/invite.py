"""Invite by a link that its maker hands on."""

import hashlib
import secrets
from dataclasses import dataclass
from datetime import datetime

from django.db import transaction

from core.errors import UserError
from core.people.log import Deed, record
from core.people.models import Collaboration, Invitation, Role, User
from core.people.services.rules import known_role, lock, people_page, still_lead


@dataclass(frozen=True)
class NewInvitation:
    """An invitation and its secret, which is known at this moment only."""

    invitation: Invitation
    secret: str


@transaction.atomic
def invite_by_link(
    *,
    by: User,
    collaboration: Collaboration,
    role: str,
    expires_at: datetime,
    label: str = "",
    is_for_many: bool = False,
) -> NewInvitation:
    """A link by which one joins, or many do."""
    role = known_role(role)
    if is_for_many and role == Role.LEAD:
        raise UserError(
            "many-leads", "a link for many makes no leads", "Invite each lead by a link of their own"
        )
    lock(collaboration)
    still_lead(by, collaboration)
    secret = fresh_secret()
    invitation = Invitation.objects.create(
        collaboration=collaboration,
        token_sha256=hashed(secret),
        role=role,
        label=label,
        is_for_many=is_for_many,
        created_by=by,
        expires_at=expires_at,
    )
    whom = f"“{label}”" if label else "many" if is_for_many else "somebody"
    record(
        Deed.INVITED,
        who=by,
        collaboration=collaboration,
        about=f"{whom} by link, as {role}",
        url=people_page(collaboration),
    )
    return NewInvitation(invitation, secret)


def fresh_secret() -> str:
    """What the address of an invitation holds; only its hash is kept."""
    return secrets.token_urlsafe(32)


def hashed(secret: str) -> str:
    """The hash by which an invitation is found."""
    return hashlib.sha256(secret.encode()).hexdigest()
