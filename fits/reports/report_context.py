"""What templates/reports/report_body.html is filled with, for those who are signed in and for holders of a link."""

from dataclasses import dataclass
from typing import Any

from django.http import Http404, HttpRequest

from core.measurements.models import Release
from fits.reports.addresses import RouteAddresses
from fits.reports.models import Report
from fits.reports.page import result_page
from fits.reports.readable import parts_of
from fits.reports.report_pages import ReportPage, opening_words, pages_of
from fits.reports.snapshot import Snapshot


@dataclass(frozen=True)
class Entry:
    """A line of the contents."""

    number: int
    heading: str
    finding: str
    is_current: bool


def report_context(request: HttpRequest, report: Report, kind: str, key: int | str) -> dict[str, Any]:
    """One page of a report: that of the query's "part", else the first. `kind`, `key`: as in RouteAddresses."""
    pages = pages_of(parts_of(report))
    page = _chosen(request, pages)
    context: dict[str, Any] = {
        "report": report,
        "page": page,
        "opening": opening_words(report) if page is None or page.number == 1 else "",
        "contents": [
            Entry(found.number, found.heading, found.finding, found is page)
            for found in pages
            if len(pages) > 1
        ],
        "withdrawn": withdrawn_since(report),
        "later": report.later.filter(state=Report.State.FROZEN).order_by("-frozen_at").first(),
        "kept_level": request.GET.get("level", ""),
        "kept_part": page.number if page and len(pages) > 1 else None,
    }
    snapshot = page.snapshot if page else None
    if snapshot is None:
        return context
    addresses = RouteAddresses(kind, key, part=context["kept_part"])
    level, curve = request.GET.get("level"), request.GET.get("curve")
    return result_page(snapshot, addresses, level=level, curve=curve) | context


def snapshot_asked_for(request: HttpRequest, report: Report) -> Snapshot:
    """The result of the query's "part", else of the first page."""
    page = _chosen(request, pages_of(parts_of(report)))
    snapshot = page.snapshot if page else None
    if snapshot is None:
        raise Http404
    return snapshot


def _chosen(request: HttpRequest, pages: list[ReportPage]) -> ReportPage | None:
    asked = request.GET.get("part", "1")
    if not pages and asked == "1":
        return None
    found = next((page for page in pages if str(page.number) == asked), None)
    if found is None:
        raise Http404
    return found


def withdrawn_since(report: Report) -> list[Release]:
    """Releases of its parts that were withdrawn after it was frozen."""
    if not report.is_frozen:
        return []
    releases = Release.objects.filter(
        assessments__report_parts__report=report,
        state=Release.State.WITHDRAWN,
        withdrawn_at__gt=report.frozen_at,
    )
    kept = releases.select_related("measurement").only(
        "number", "state", "withdrawn_at", "withdrawal_reason", "measurement__name"
    )
    return list(kept.order_by("measurement__name", "number").distinct())
