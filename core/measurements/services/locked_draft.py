"""A draft that is about to be changed: locked, and still read as its reader saw it."""

import hashlib
import json

from core.errors import UserError
from core.measurements.models import Release
from core.revision import CHANGED_MEANWHILE


def reading_of(release: Release) -> str:
    """A mark of how a draft is read: equal for equal columns and words on the errors."""
    read = [release.columns, str(release.error_source), release.calibration]
    return hashlib.sha256(json.dumps(read, sort_keys=True).encode()).hexdigest()[:16]


def locked_draft(release: Release, *, seen: str) -> Release:
    """The draft as it stands, locked until the transaction ends. A UserError where it is a draft no more, or is read
    otherwise than `seen`."""
    drafts = Release.objects.select_for_update().filter(pk=release.pk, state=Release.State.DRAFT)
    # By its key: in the order of their measurements, the measurement's row would be locked with it, and after it.
    draft = drafts.order_by("pk").first()
    if draft is None:
        raise UserError("not-a-draft", "this release is a draft no more", "Look at the measurement's page")
    if reading_of(draft) != seen:
        raise UserError(
            CHANGED_MEANWHILE,
            "somebody else has said how this draft is read since you opened it",
            "Look at it as it is read now, and decide again",
        )
    return draft
