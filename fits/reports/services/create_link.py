"""Share a report by a link."""

import hashlib
import secrets
from dataclasses import dataclass
from datetime import datetime

from core.people.models import User
from fits.reports.models import Report, ShareLink


@dataclass(frozen=True)
class NewLink:
    """A link and its secret, which is known at this moment only."""

    link: ShareLink
    secret: str


def create_link(*, user: User, report: Report, label: str, expires_at: datetime | None) -> NewLink:
    """A link with a fresh secret, of which only the hash is kept."""
    secret = secrets.token_urlsafe(32)
    link = ShareLink.objects.create(
        report=report,
        token_sha256=hashed(secret),
        label=label,
        created_by=user,
        expires_at=expires_at,
    )
    return NewLink(link, secret)


def hashed(secret: str) -> str:
    """The hash by which a link is found."""
    return hashlib.sha256(secret.encode()).hexdigest()
