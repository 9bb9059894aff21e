"""The log of who did what. Services write it in the transaction of the change itself."""

from collections.abc import Mapping, Sequence
from enum import StrEnum
from typing import Any

from django.db.models import Model

from core.people.models import Collaboration, LogEntry, User


class Deed(StrEnum):
    """What can be done that the log tells, in the words in which it tells it."""

    STARTED = "started the collaboration"
    EDITED_COLLABORATION = "edited the collaboration"
    INVITED = "invited"
    REVOKED_INVITATION = "revoked an invitation"
    ADDED_PERSON = "added"
    JOINED = "joined"
    LEFT = "left"
    REMOVED_PERSON = "removed"
    CHANGED_ROLE = "changed a role"
    HANDED_OVER = "handed over the lead"
    ADDED_MEASUREMENT = "added a measurement"
    EDITED_MEASUREMENT = "edited a measurement"
    SEALED = "sealed a measurement"
    CHANGED_SEAL = "changed a seal"
    LOOKED_EARLY = "looked at sealed data"
    OPENED = "opened a measurement"
    UPLOADED = "uploaded a release"
    MAPPED_COLUMNS = "said how a draft release is read"
    DISCARDED_DRAFT = "discarded a draft release"
    PUBLISHED = "published a release"
    WITHDREW = "withdrew a release"
    ADDED_THEORY = "added a theory"
    EDITED_THEORY = "edited a theory"
    SUBMITTED = "submitted a curve"
    ASKED_ASSESSMENT = "asked for an assessment"
    BEGAN_ASSESSMENT = "began an assessment"
    CANCELLED_ASSESSMENT = "cancelled an assessment"
    ASKED_FEATURES = "asked for features"
    CANCELLED_FEATURES = "cancelled a search for features"
    WROTE_REPORT = "began a report"
    FROZE_REPORT = "froze a report"
    DISCARDED_REPORT = "discarded a draft report"
    MADE_LINK = "made a share link"
    REVOKED_LINK = "revoked a share link"
    COMMENTED = "commented"
    REMOVED_COMMENT = "removed a comment"


def record(
    deed: Deed,
    *,
    who: User | None,
    collaboration: Collaboration,
    about: str,
    url: str = "",
    detail: Mapping[str, Any] | None = None,
    desk: User | None = None,
    hidden_with: Model | None = None,
    into: list[LogEntry] | None = None,
) -> LogEntry:
    """Write an entry.

    who          None for what happened by itself, as an opening at its time
    about        what it was done to, in words that stay true when that is renamed
    desk         the student at whose desk it was done: only they and the leads see the entry
    hidden_with  the measurement of whose data or verdicts it tells: hidden from whom these are hidden
    into         where many are gathered that `record_all` writes together; without it, it is written at once
    """
    entry = LogEntry(
        deed=deed.name.lower(),
        who=who,
        collaboration=collaboration,
        about=about[:300],
        url=url,
        detail=dict(detail or {}),
        desk=desk,
        hidden_with_id=hidden_with.pk if hidden_with else None,
    )
    if into is None:
        entry.save()
    else:
        into.append(entry)
    return entry


def record_all(entries: Sequence[LogEntry]) -> None:
    """Write what was gathered, in few queries however much it is."""
    LogEntry.objects.bulk_create(entries)
