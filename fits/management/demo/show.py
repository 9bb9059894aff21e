"""What the demo shows: a report, and at the end of a run on its own rankings and the report behind its link."""

import html
import re
import urllib.error
import urllib.request
from collections.abc import Iterable, Sequence
from datetime import timedelta

from django.utils import timezone

from core.user_error import UserError
from fits.assessments.job import Job
from fits.assessments.models import Assessment, FeatureSearch
from fits.management.commands.rank import ranking_table
from fits.reports.models import Report
from fits.reports.services import add_part, create_link, edit_part, freeze_report, start_report

TITLE = "Which floor has Lake Merrow?"
WORDS = """Invented data: a report of the demo.

- The **surface** was measured best: its newest release comes first.
- The **current in the narrows** was measured once, and sees the overtones more strongly.
"""
WORDS_ON = {
    "Surface seiche power": "All four floors have the slowest seiche in common; the overtones tell them apart.",
    "Current in the narrows": "Less precise, and *independent* of the gauges at the shore.",
}


def all_done(assessments: Iterable[Assessment]) -> bool:
    """Whether all are done. Raises UserError as soon as one has ended otherwise."""
    statuses = set()
    for assessment in assessments:
        assessment.refresh_from_db(fields=["status", "failure"])
        statuses.add(assessment.status)
        if assessment.has_ended and assessment.status != Assessment.Status.DONE:
            raise UserError("demo-failed", f"{assessment} {assessment.status}: {assessment.failure}")
    return statuses == {Assessment.Status.DONE}


def rankings(assessments: Iterable[Assessment]) -> str:
    """A table for each release."""
    parts = []
    for assessment in assessments:
        assessment.refresh_from_db()
        release = assessment.release
        place = f"{release.measurement.collaboration}: {release.measurement}, {release}"
        desk = f", at the desk of {assessment.desk}" if assessment.desk else ""
        parts.append(f"{place}{desk}\n{ranking_table(assessment.result or {})}")
    return "\n\n".join(parts)


def all_found(assessments: Iterable[Assessment]) -> bool:
    """Whether no search for their features is under way or yet to come."""
    for assessment in assessments:
        searches = list(assessment.feature_searches.values_list("status", flat=True))
        if not searches or not set(searches).isdisjoint(Job.LIVING):
            return False
    return True


def reported(assessments: Iterable[Assessment]) -> list[Assessment]:
    """The survey's assessments that its report is about: that of each measurement's newest release."""
    newest: dict[str, Assessment] = {}
    for assessment in assessments:
        release = assessment.release
        if release.measurement.name in WORDS_ON:
            newest[release.measurement.name] = assessment
    return [newest[name] for name in WORDS_ON]


def report_on(assessments: Sequence[Assessment]) -> Report:
    """The survey's report, frozen; the one of an earlier start where nothing has changed since."""
    first = assessments[0]
    author, collaboration = first.requested_by, first.release.measurement.collaboration
    frozen = Report.objects.filter(state=Report.State.FROZEN, title=TITLE, collaboration=collaboration)
    if found := frozen.first():
        return found
    report = start_report(user=author, collaboration=collaboration, title=TITLE, words=WORDS)
    for assessment in assessments:
        search = assessment.feature_searches.filter(status=FeatureSearch.Status.DONE).first()
        part = add_part(report=report, seen=report.revision, assessment=assessment, search=search)
        part.words = WORDS_ON[assessment.release.measurement.name]
        edit_part(part=part, seen=part.revision)
        report.refresh_from_db()
    freeze_report(user=author, report=report, seen=report.revision)
    return report


def open_by_share_link(report: Report, address: str) -> str:
    """Open the report as somebody without an account, return the finding of its first part.

    Raises UserError if the page does not open or does not say the finding.
    """
    tomorrow = timezone.now() + timedelta(days=1)
    new = create_link(user=report.author, report=report, label="demo", expires_at=tomorrow)
    sentence = _plain(report.parts.all()[0].finding)
    if sentence not in _text(f"{address}r/{new.secret}/"):
        raise UserError("demo-failed", f"the report page does not say: {sentence}")
    return sentence


def _text(address: str) -> str:
    try:
        with urllib.request.urlopen(address, timeout=60.0) as answer:  # noqa: S310 - our own address
            page = answer.read().decode()
    except urllib.error.HTTPError as error:
        raise UserError("demo-failed", f"the share link answered {error.code}") from None
    except OSError as error:
        raise UserError("demo-failed", f"the share link did not answer: {error}") from None
    return _plain(html.unescape(re.sub(r"<[^>]*>", "", page)))


def _plain(text: str) -> str:
    return " ".join(text.split())
