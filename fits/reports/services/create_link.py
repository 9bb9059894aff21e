"""Share a report by a link."""

import hashlib
import secrets
from dataclasses import dataclass
from datetime import datetime

from django.contrib.auth.hashers import make_password
from django.db import transaction

from core.people.log import Deed, record
from core.people.models import User
from core.user_error import UserError
from fits.reports.models import Report, ShareLink


@dataclass(frozen=True)
class NewLink:
    """A link and its secret, which is known at this moment only."""

    link: ShareLink
    secret: str


def create_link(
    *, user: User, report: Report, label: str, expires_at: datetime | None, passphrase: str = ""
) -> NewLink:
    """A link with a fresh secret, of which only the hash is kept."""
    if not report.is_frozen:
        raise UserError("report-not-frozen", "this report is a draft", "Freeze it first")
    secret = secrets.token_urlsafe(32)
    # Slow on purpose: not while the transaction is open.
    kept_passphrase = make_password(passphrase) if passphrase else ""
    with transaction.atomic():
        link = ShareLink.objects.create(
            report=report,
            token_sha256=hashed(secret),
            label=label,
            passphrase=kept_passphrase,
            created_by=user,
            expires_at=expires_at,
        )
        record_link(Deed.MADE_LINK, link, user)
    return NewLink(link, secret)


def record_link(deed: Deed, link: ShareLink, user: User) -> None:
    """Tell it in the log."""
    record(
        deed,
        who=user,
        collaboration=link.report.collaboration,
        about=f"{link}, to “{link.report}”",
        url=link.report.get_absolute_url(),
    )


def hashed(secret: str) -> str:
    """The hash by which a link is found."""
    return hashlib.sha256(secret.encode()).hexdigest()
