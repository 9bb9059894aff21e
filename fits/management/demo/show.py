"""What the demo shows at the end of a run on its own: rankings, and a report opened by its share link."""

import html
import re
import urllib.error
import urllib.request
from collections.abc import Iterable
from datetime import timedelta

from django.utils import timezone

from core.user_error import UserError
from fits.assessments.models import Assessment
from fits.management.commands.rank import ranking_table
from fits.reports.models import Report
from fits.reports.services import create_link, create_report
from fits.reports.snapshot import Snapshot
from fits.reports.words import finding

TITLE = "Which floor has Lake Merrow?"
WORDS = "Invented data: a report of the demo."


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


def open_by_share_link(assessment: Assessment, address: str) -> str:
    """Make a report of the assessment, open it as somebody without an account, return its finding.

    Raises UserError if the page does not open or does not say the finding.
    """
    assessment.refresh_from_db()
    author = assessment.requested_by
    frozen = Report.objects.filter(
        state=Report.State.FROZEN, title=TITLE, author=author, parts__assessment=assessment
    )
    report = frozen.first() or create_report(user=author, assessment=assessment, title=TITLE, words=WORDS)
    tomorrow = timezone.now() + timedelta(days=1)
    new = create_link(user=author, report=report, label="demo", expires_at=tomorrow)
    sentence = _finding(report)
    if sentence not in _text(f"{address}r/{new.secret}/"):
        raise UserError("demo-failed", f"the report page does not say: {sentence}")
    return sentence


def _finding(report: Report) -> str:
    snapshot = Snapshot.of(report.parts.get().snapshot or {})
    return _plain(finding(snapshot, snapshot.level_or_default()))


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
