"""What the section of comments on a page shows."""

from dataclasses import dataclass

from django.urls import reverse
from django.utils.safestring import SafeString

from core.people.access import collaboration_of, readers_of, role_of, seen_by
from core.people.models import Role, User
from core.people.permissions import PERMITTED, Action
from core.theories.models import Theory
from fits.talk.forms import CommentForm
from fits.talk.models import Comment, Mention
from fits.talk.subject import Subject
from fits.talk.words import names_of, shown


@dataclass(frozen=True)
class CommentLine:
    """A comment, its words as they are shown, and whether the reader may take it back."""

    comment: Comment
    words: SafeString
    may_remove: bool


@dataclass(frozen=True)
class CommentsPage:
    """The comments, oldest first; where a new one is sent, and whom it can mention."""

    lines: tuple[CommentLine, ...]
    may_comment: bool
    form: CommentForm
    sent_to: str
    names: tuple[str, ...]


def comments_on(target: Subject, reader: User) -> CommentsPage:
    """Gather the section, in as many queries for many comments as for one."""
    role = role_of(reader, collaboration_of(target))
    may_comment = role in PERMITTED[Action.COMMENT]
    kind = "theory" if isinstance(target, Theory) else "assessment"
    rows = seen_by(Comment.objects.filter(**{kind: target}), reader)
    named: dict[int, list[User]] = {}
    for mention in Mention.objects.filter(comment__in=rows.order_by().values("pk")).select_related("user"):
        named.setdefault(mention.comment_id, []).append(mention.user)
    return CommentsPage(
        lines=tuple(
            CommentLine(
                comment=comment,
                words=shown(comment.words, names_of(named.get(comment.pk, []))),
                may_remove=comment.removed_at is None
                and may_comment
                and (role is Role.LEAD or comment.author_id == reader.pk),
            )
            for comment in rows.select_related("author", "removed_by")
        ),
        may_comment=may_comment,
        form=CommentForm(),
        sent_to=reverse(f"talk:comment_{kind}", args=[target.pk]),
        names=tuple(sorted({str(person) for person in readers_of(target)} - {str(reader)}))
        if may_comment
        else (),
    )
