"""What the home page shows."""

from dataclasses import dataclass
from datetime import datetime

from core.people.models import Collaboration, Membership, User
from fits.overviews.news import Digest, digests
from fits.overviews.next_steps import NextStep, next_steps


@dataclass(frozen=True)
class CollaborationNews:
    """A collaboration of the reader's, its news, and what it lacks before its first verdict."""

    collaboration: Collaboration
    role: str
    digest: Digest
    next_step: NextStep | None


def home_page(reader: User, since: datetime | None) -> list[CollaborationNews]:
    """The news of each of the reader's collaborations, those with the newest news first. Seven queries."""
    memberships = list(Membership.objects.filter(user=reader).select_related("collaboration"))
    news = digests(reader, [membership.collaboration_id for membership in memberships], since)
    steps = next_steps(reader, memberships)
    found = [
        CollaborationNews(
            collaboration=membership.collaboration,
            role=membership.get_role_display(),
            digest=news[membership.collaboration_id],
            next_step=steps.get(membership.collaboration_id),
        )
        for membership in memberships
    ]
    return sorted(found, key=_newest_first)


def _newest_first(found: CollaborationNews) -> tuple[float, str]:
    latest = next(iter((*found.digest.new, *found.digest.earlier)), None)
    return (-latest.at.timestamp() if latest else 0.0, found.collaboration.name)
