"""Say something on a theory or an assessment."""

from django.db import transaction

from core.people.access import readers_of
from core.people.log import Deed, record
from core.people.models import User
from core.theories.models import Theory
from core.user_error import UserError
from fits.assessments.models import Assessment
from fits.talk import words as said
from fits.talk.models import Comment, Mention
from fits.talk.subject import Subject, about, address, assessments_with_place


@transaction.atomic
def comment(*, by: User, on: Subject, words: str) -> Comment:
    """A comment; those whom it names, and who may see it, are noted. Desk and seal are those of its subject now."""
    text = words.replace("\r\n", "\n").replace("\r", "\n").strip()
    if not text:
        raise UserError("no-words", "there is nothing in it", "Write something")
    if len(text) > said.MOST_LETTERS:
        reason = f"it has {len(text)} letters of at most {said.MOST_LETTERS}"
        raise UserError("too-long", reason, "Shorten it, or make two of it")
    made = Comment(author=by, words=text)
    if isinstance(on, Theory):
        subject: Subject = Theory.objects.select_related("collaboration", "desk").get(pk=on.pk)
        assert isinstance(subject, Theory)
        made.theory, made.collaboration = subject, subject.collaboration
    else:
        subject = _done_assessment(on.pk)
        made.assessment, made.measurement = subject, subject.release.measurement
        made.collaboration = subject.release.measurement.collaboration
    made.desk = subject.desk
    made.save()
    names = said.names_of(readers_of(subject))
    named = sorted(said.mentioned(text, names))
    Mention.objects.bulk_create(Mention(comment=made, user_id=key) for key in named)
    record(
        Deed.COMMENTED,
        who=by,
        collaboration=made.collaboration,
        about=about(subject),
        url=address(made),
        desk=made.desk,
        hidden_with=made.measurement,
    )
    return made


def _done_assessment(pk: int) -> Assessment:
    found = assessments_with_place().get(pk=pk)
    if found.status != Assessment.Status.DONE:
        raise UserError("assessment-not-done", "this assessment has no result yet", "Wait until it is done")
    return found
