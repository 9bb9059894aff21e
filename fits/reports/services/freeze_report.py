"""Freeze a report."""

from collections.abc import Sequence

from django.db import transaction
from django.utils import timezone

from core.measurements.models import Release
from core.people.log import Deed, record
from core.people.models import User
from core.user_error import UserError
from fits.assessments.models import Assessment, FeatureSearch
from fits.reports.markdown import rendered
from fits.reports.models import Paper, Report, ReportPart
from fits.reports.part_snapshots import heading_of, snapshot_of
from fits.reports.readable import RELEASE_BYTES
from fits.reports.report_pages import words_of
from fits.reports.services.drafting import change_draft
from fits.reports.services.parts import refuse_unreportable
from fits.reports.services.print_report import ask_printing
from fits.reports.services.start_report import start_report
from fits.reports.words import finding


@transaction.atomic
def freeze_report(*, user: User, report: Report, seen: int) -> None:
    """From now on it never changes: all that its pages show is taken up into it."""
    change_draft(report, seen=seen)
    places = report.parts.select_related("assessment__release__measurement__collaboration", "search")
    parts = list(places.defer(*RELEASE_BYTES))
    if not parts:
        raise UserError("report-empty", "there is nothing in this report", "Add an assessment or words")
    _hold([part.assessment for part in parts if part.assessment])
    now = timezone.now()
    for part in parts:
        _freeze_part(part)
    Report.objects.filter(pk=report.pk).update(
        state=Report.State.FROZEN,
        frozen_at=now,
        words_html=rendered(report.words, below=1),
        author_name=str(report.author),
        collaboration_name=str(report.collaboration),
    )
    report.refresh_from_db()
    record(
        Deed.FROZE_REPORT,
        who=user,
        collaboration=report.collaboration,
        about=report.title,
        url=report.get_absolute_url(),
    )
    for paper in Paper:
        ask_printing(report, paper)


def _hold(assessments: Sequence[Assessment]) -> None:
    """Whoever withdraws one of the releases at this moment comes before, and it is said, or after."""
    keys = {assessment.release_id for assessment in assessments}
    held = Release.objects.select_for_update(no_key=True).filter(pk__in=keys).order_by("pk")
    states = dict(held.values_list("pk", "state"))
    for assessment in assessments:
        if assessment.release.state != states[assessment.release_id]:
            assessment.release.refresh_from_db(fields=["state", "withdrawn_at", "withdrawal_reason"])


def _freeze_part(part: ReportPart) -> None:
    fields: dict[str, object] = {"words_html": words_of(part)}
    if part.assessment is not None:
        refuse_unreportable(part.assessment)
        snapshot = snapshot_of(part)
        fields |= {
            "snapshot": snapshot.stored(),
            "heading": heading_of(part),
            "finding": finding(snapshot, snapshot.level_or_default()),
        }
    ReportPart.objects.filter(pk=part.pk).update(**fields)


@transaction.atomic
def create_report(
    *, user: User, assessment: Assessment, title: str, words: str, search: FeatureSearch | None = None
) -> Report:
    """A report of one assessment, frozen at once."""
    report = start_report(
        user=user,
        collaboration=assessment.release.measurement.collaboration,
        title=title,
        words=words,
        assessment=assessment,
        search=search,
    )
    freeze_report(user=user, report=report, seen=report.revision)
    return report
