"""A frozen report as a PDF. Nothing is fetched while it is made, and the same report gives the same bytes."""

import hashlib
import re
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from django.template.loader import render_to_string
from django.utils.safestring import SafeString, mark_safe

from core.user_error import UserError
from fits.reports import words
from fits.reports.figures import figure_of
from fits.reports.figures.figure import Figure
from fits.reports.figures.svg import svg
from fits.reports.models import Paper, Report
from fits.reports.page import result_page
from fits.reports.readable import parts_of
from fits.reports.report_pages import ReportPage, opening_words, pages_of
from fits.reports.snapshot import Snapshot
from fits.reports.static_texts import static_text

SIZES = {Paper.A4: "@page { size: A4 }", Paper.LETTER: "@page { size: letter }"}
# What stands before the element, and its size: the page sets that.
BEFORE_THE_DRAWING = re.compile(r"\A.*?(?=<svg)", re.DOTALL)
SIZE = re.compile(r'(?<=\s)(?:width|height)="[^"]*pt"')
FIGURES = ("curves", "ball", "scales", "misfit", "ladder", "witnesses", "regions")
# In inches, where a drawing is lower than on the screen: this one stands on a page with the ranking.
HEIGHTS = {"curves": 2.9}


class NoAddresses:
    """On paper nothing leads anywhere."""

    def chart(self, figure: Figure, form: str) -> str:
        """None."""
        return ""

    def result_json(self) -> str:
        """None."""
        return ""

    def ranking_csv(self) -> str:
        """None."""
        return ""

    def explained(self) -> str:
        """None."""
        return ""

    def features(self, name: str) -> str:
        """None."""
        return ""


@dataclass(frozen=True)
class Sheet:
    """A page of the report as it is printed: what is said, the result, and its drawings."""

    page: ReportPage
    result: dict[str, Any] | None
    drawings: dict[str, SafeString]
    width: str = ""  # the narrowest feature that was judged, in words


def printed(report: Report, paper: Paper, step: Callable[[], None] = lambda: None) -> bytes:
    """The PDF. `step` is called now and then while it is made."""
    try:
        from fits.reports import pdf
    except OSError as error:
        raise UserError(
            "no-pango",
            "reports are printed with Pango, which is not installed where the workers run",
            "Whoever runs this site can install it, as README.md says; then ask again for the print",
        ) from error
    text = html(report, step)
    with pdf.telling(step):
        pages = pdf.laid_out(text, (static_text("css/print.css"), SIZES[paper]))
    return pdf.written(pages, hashlib.sha256(f"{paper} {text}".encode()).hexdigest()[:32], step)


def html(report: Report, step: Callable[[], None] = lambda: None) -> str:
    """The report as the page that is printed."""
    sheets = []
    for page in pages_of(parts_of(report)):
        sheets.append(_sheet(page))
        step()
    context = {
        "report": report,
        "opening": opening_words(report),
        "sheets": sheets,
        "meaning": words.meaning(*(sheet.width for sheet in sheets if sheet.width)),
        "caution": words.CAUTION,
    }
    return render_to_string("reports/print/report.html", context)


def _sheet(page: ReportPage) -> Sheet:
    snapshot = page.snapshot
    if snapshot is None:
        return Sheet(page, None, {})
    width = words.resolution_width(snapshot)
    return Sheet(page, result_page(snapshot, NoAddresses()), _drawings(snapshot), width)


def _drawings(snapshot: Snapshot) -> dict[str, SafeString]:
    figures = {name: figure_of(name, snapshot) for name in FIGURES}
    return {
        name: _drawing(replace(figure, height=HEIGHTS.get(name, figure.height)))
        for name, figure in figures.items()
        if figure is not None
    }


def _drawing(figure: Figure) -> SafeString:
    """The drawing as an element of the page. Names in it were escaped when it was drawn."""
    return mark_safe(SIZE.sub("", BEFORE_THE_DRAWING.sub("", svg(figure)), count=2))  # noqa: S308
