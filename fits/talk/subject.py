"""What a comment is on: a theory or an assessment."""

from django.db.models import QuerySet

from core.theories.models import Theory
from fits.assessments.models import Assessment
from fits.talk.models import Comment

Subject = Theory | Assessment

LARGE = ("result", "detail", "separations", *(f"release__{name}" for name in ("table", "lines", "variances")))
LARGE += ("release__covariance", "release__windows")


def assessments_with_place() -> QuerySet[Assessment]:
    """Assessments with all that says where they belong, without their numbers."""
    rows = Assessment.objects.select_related("release__measurement__collaboration", "desk")
    return rows.defer(*LARGE)


def with_subject(comments: QuerySet[Comment]) -> QuerySet[Comment]:
    """Comments with their authors and with what they are on, without its numbers."""
    return comments.select_related(
        "collaboration", "author", "desk", "theory", "assessment__release__measurement"
    ).defer(*(f"assessment__{name}" for name in LARGE))


def subject_of(comment: Comment) -> Subject:
    """The theory or the assessment that a comment is on."""
    found = comment.theory or comment.assessment
    assert found is not None
    return found


def about(subject: Subject) -> str:
    """Its name in a sentence; of an assessment release and measurement have to be loaded."""
    if isinstance(subject, Theory):
        return f"theory “{subject.name}”"
    return f"assessment {subject.pk} of {subject.release.measurement}, {subject.release}"


def address(comment: Comment) -> str:
    """Where the comment stands."""
    return f"{subject_of(comment).get_absolute_url()}#comment-{comment.pk}"
