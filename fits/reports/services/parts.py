"""The parts of a draft: put in, changed, moved, taken out."""

from collections.abc import Sequence

from django.db import transaction
from django.db.models import Max

from core.revision import save_if_current
from core.user_error import UserError
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports.models import Report, ReportPart
from fits.reports.newest_assessments import newest_assessment
from fits.reports.services.drafting import change_draft


def refuse_unreportable(assessment: Assessment) -> None:
    """A report is read by all who share: only what is open to all of them, and done, comes into one."""
    measurement = assessment.release.measurement
    if measurement.is_sealed:
        raise UserError(
            "measurement-sealed",
            f"{measurement} is sealed, and a report would open it",
            "Wait until it is open",
        )
    if assessment.desk_id is not None:
        raise UserError(
            "assessment-at-desk",
            f"{assessment} stands at a student’s desk, and reports are read by others",
            "Report an assessment of shared curves",
        )
    if assessment.status != Assessment.Status.DONE:
        raise UserError(
            "assessment-not-done",
            f"{assessment} has no result to report",
            "Wait until it is done, or take it out",
        )


@transaction.atomic
def add_part(
    *, report: Report, seen: int, assessment: Assessment | None = None, search: FeatureSearch | None = None
) -> ReportPart:
    """A new last part: an assessment with what a search found in it, or room for words."""
    if assessment is not None:
        refuse_unreportable(assessment)
        if assessment.release.measurement.collaboration_id != report.collaboration_id:
            raise UserError("wrong-collaboration", "this assessment is of another collaboration")
    change_draft(report, seen=seen)
    last = report.parts.aggregate(last=Max("order"))["last"] or 0
    return ReportPart.objects.create(report=report, order=last + 1, assessment=assessment, search=search)


@transaction.atomic
def edit_part(*, part: ReportPart, seen: int) -> None:
    """Keep its heading, its words and what is shown, as they stand on `part`."""
    change_draft(part.report)
    if not ReportPart.objects.filter(pk=part.pk).exists():
        raise UserError(
            "part-removed", "somebody else has taken this part out", "Keep what you wrote, and add it again"
        )
    save_if_current(part, seen=seen, fields=("heading", "words", "shown"))


@transaction.atomic
def move_part(*, part: ReportPart, seen: int, up: bool) -> None:
    """One place up or down; at the end nothing moves."""
    report = part.report
    change_draft(report, seen=seen)
    parts = list(report.parts.defer("snapshot", "words"))
    place = parts.index(part)
    other = place - 1 if up else place + 1
    if 0 <= other < len(parts):
        parts[place], parts[other] = parts[other], parts[place]
        _number(parts)


def _number(parts: Sequence[ReportPart]) -> None:
    for order, part in enumerate(parts, start=1):
        if part.order != order:
            ReportPart.objects.filter(pk=part.pk).update(order=order)


@transaction.atomic
def remove_part(*, part: ReportPart, seen: int) -> None:
    """Take it out, with its words."""
    change_draft(part.report, seen=seen)
    part.delete()


@transaction.atomic
def renew_part(*, part: ReportPart, seen: int) -> None:
    """Put the assessment of the measurement's newest release in the place of the one that it shows. Of the theories
    that were shown, those that it judged stay shown."""
    change_draft(part.report, seen=seen)
    newest = part.assessment and newest_assessment(part.assessment.release.measurement)
    if not newest or newest.pk == part.assessment_id:
        raise UserError("nothing-newer", "there is no newer assessment", "Leave it as it is")
    refuse_unreportable(newest)
    names = {curve["name"] for curve in (newest.result or {}).get("curves", ())}
    shown = part.shown and [name for name in part.shown if name in names]
    if shown == []:
        raise UserError(
            "none-judged", "the newest assessment judged none of the theories shown here", "Show others first"
        )
    search = newest.feature_searches.filter(status=FeatureSearch.Status.DONE).first()
    part.assessment, part.search, part.shown = newest, search, shown
    save_if_current(part, seen=part.revision, fields=("assessment", "search", "shown"))
