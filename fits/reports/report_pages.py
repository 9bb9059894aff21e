"""A report as pages: each shows one assessment, with the words that stand before it."""

from collections.abc import Iterable
from dataclasses import dataclass, field

from django.utils.html import format_html
from django.utils.safestring import SafeString, mark_safe

from core.measurements.models import Release
from fits.assessments.models import Assessment
from fits.reports.markdown import rendered
from fits.reports.models import Report, ReportPart
from fits.reports.part_snapshots import heading_of, snapshot_of
from fits.reports.snapshot import Snapshot


@dataclass(frozen=True)
class Words:
    """Heading and words of a part."""

    heading: str
    html: SafeString


@dataclass
class ReportPage:
    """Parts of words alone, then one with an assessment; the last page may be of words alone."""

    number: int
    parts: list[ReportPart] = field(default_factory=list)

    @property
    def shows(self) -> ReportPart | None:
        """The part that has a result."""
        last = self.parts[-1]
        return last if has_result(last) else None

    @property
    def words(self) -> list[Words]:
        """What is said before the result."""
        return [Words(_heading(part), _html(part)) for part in self.parts]

    @property
    def heading(self) -> str:
        """How the contents name it."""
        named = (_heading(part) for part in reversed(self.parts))
        return next((heading for heading in named if heading), f"Part {self.number}")

    @property
    def finding(self) -> str:
        """What its result says at the level that is shown first; a draft's contents do not say it yet."""
        part = self.shows
        return part.finding if part else ""

    @property
    def snapshot(self) -> Snapshot | None:
        """All that its result is shown from."""
        part = self.shows
        if part is None:
            return None
        return Snapshot.of(part.snapshot or {}) if part.report.is_frozen else snapshot_of(part)


def has_result(part: ReportPart) -> bool:
    """Whether it shows an assessment."""
    if part.report.is_frozen:
        return part.has_snapshot  # type: ignore[attr-defined, no-any-return]
    return part.assessment is not None and part.assessment.status == Assessment.Status.DONE


def pages_of(parts: Iterable[ReportPart]) -> list[ReportPage]:
    """All pages, in order."""
    pages: list[ReportPage] = []
    is_full = True
    for part in parts:
        if is_full:
            pages.append(ReportPage(len(pages) + 1))
        pages[-1].parts.append(part)
        is_full = has_result(part)
    return pages


def opening_words(report: Report) -> SafeString:
    """The words before everything."""
    html = report.words_html if report.is_frozen else rendered(report.words, below=1)
    return mark_safe(html)  # noqa: S308 - made by `rendered`, or escaped


def words_of(part: ReportPart) -> SafeString:
    """The words of a part as they are frozen: they begin with it where its release is withdrawn already."""
    words = rendered(part.words, below=2)
    return _withdrawal(part.assessment.release) + words if part.assessment else words


def _withdrawal(release: Release) -> SafeString:
    if not release.is_withdrawn:
        return SafeString()
    return format_html(
        "<p><strong>{} of {} was withdrawn on {}, before this report was frozen: what was found of it should not be "
        "relied on.</strong> The reason given: {}</p>",
        str(release).capitalize(),
        release.measurement,
        f"{release.withdrawn_at:%-d %B %Y}",
        release.withdrawal_reason or "none.",
    )


def _heading(part: ReportPart) -> str:
    return part.heading if part.report.is_frozen else heading_of(part)


def _html(part: ReportPart) -> SafeString:
    html = part.words_html if part.report.is_frozen else words_of(part)
    return mark_safe(html)  # noqa: S308 - made by `rendered`, or escaped
