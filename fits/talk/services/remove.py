"""Take a comment back."""

from django.core.exceptions import PermissionDenied
from django.db import transaction
from django.utils import timezone

from core.people.access import role_of
from core.people.log import Deed, record
from core.people.models import Role, User
from core.user_error import UserError
from fits.talk.models import Comment, Mention
from fits.talk.subject import about, address, subject_of


@transaction.atomic
def remove_comment(*, by: User, comment: Comment) -> None:
    """Erase its words and whom they named; that there was a comment stays. For its author and for leads."""
    if comment.author_id != by.pk and role_of(by, comment.collaboration) is not Role.LEAD:
        raise PermissionDenied("only who wrote a comment, or a lead, may remove it")
    there = Comment.objects.filter(pk=comment.pk, removed_at=None)
    if not there.update(words="", removed_at=timezone.now(), removed_by=by):
        raise UserError("already-removed", "somebody else has removed this comment already")
    Mention.objects.filter(comment=comment).delete()
    record(
        Deed.REMOVED_COMMENT,
        who=by,
        collaboration=comment.collaboration,
        about=about(subject_of(comment)),
        url=address(comment),
        detail={} if comment.author_id == by.pk else {"written by": str(comment.author)},
        desk=comment.desk,
        hidden_with=comment.measurement,
    )
