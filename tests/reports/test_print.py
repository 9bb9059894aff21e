"""Reports on paper: the pages that are laid out, without a network, and the job that makes them."""

import sys
from collections.abc import Callable, Iterable
from types import ModuleType
from typing import Any

import pytest
from celery.exceptions import SoftTimeLimitExceeded
from django.test import Client
from django.urls import reverse

import fits.reports
from core.people.models import User
from fits.assessments.leases import Superseded
from fits.assessments.models import Assessment
from fits.reports import pdf, printing
from fits.reports.figures.figure import Figure
from fits.reports.figures.svg import svg
from fits.reports.models import Paper, Printing, Report
from fits.reports.pdf import NothingIsFetched, Refusing
from fits.reports.printing import html, printed
from fits.reports.services import (
    add_part,
    ask_printing,
    create_link,
    edit_part,
    freeze_report,
    print_again,
    start_report,
)
from fits.reports.tasks import print_report

SignedIn = Callable[[User], Client]
MILLIMETRES = 25.4 / 96
Status = Printing.Status


@pytest.fixture
def two_parts(lead: User, done: Assessment) -> Report:
    """Words, then an assessment twice."""
    report = start_report(
        user=lead,
        collaboration=done.release.measurement.collaboration,
        title="The floor & its depth",
        words="*So.*",
    )
    for heading in ("First look", "Second look"):
        part = add_part(report=report, seen=report.revision, assessment=done)
        part.heading = heading
        edit_part(part=part, seen=0)
        report.refresh_from_db()
    freeze_report(user=lead, report=report, seen=report.revision)
    return report


DRAWN: dict[str, str] = {}


def draw_once(figure: Figure) -> str:
    """The drawing; it is the same in both parts and for both papers."""
    if figure.name not in DRAWN:
        DRAWN[figure.name] = svg(figure)
    return DRAWN[figure.name]


@pytest.fixture
def laid_out(two_parts: Report, monkeypatch: pytest.MonkeyPatch) -> Callable[[Paper], Any]:
    """The pages of a paper, as they are before they are written."""

    def lay_out(paper: Paper) -> Any:
        pages: list[Any] = []
        lay = pdf.laid_out
        monkeypatch.setattr(printing, "svg", draw_once)

        def keep(text: str, styles: Iterable[str]) -> Any:
            pages.append(lay(text, styles))
            return pages[0]

        monkeypatch.setattr(pdf, "laid_out", keep)
        assert printed(two_parts, paper).startswith(b"%PDF-")
        return pages[0]

    return lay_out


def text_of(box: Any) -> str:
    """The text that stands on a page, as it can be selected."""
    parts = [box.text] if hasattr(box, "text") else []
    children = getattr(box, "all_children", lambda: getattr(box, "children", ()))()
    return " ".join([*parts, *(text_of(child) for child in children)])


@pytest.mark.parametrize(
    ("paper", "width", "height"), [(Paper.A4, 210.0, 297.0), (Paper.LETTER, 215.9, 279.4)]
)
def test_every_page_has_the_size_of_its_paper_and_says_where_it_belongs(
    laid_out: Callable[[Paper], Any], two_parts: Report, paper: Paper, width: float, height: float
) -> None:
    pages = laid_out(paper).pages
    _nothing_is_wider(pages)
    assert {(round(page.width * MILLIMETRES, 1), round(page.height * MILLIMETRES, 1)) for page in pages} == {
        (width, height)
    }
    texts = [" ".join(text_of(page._page_box).split()) for page in pages]
    for number, text in enumerate(texts, start=1):
        assert f"page {number} of {len(pages)}" in text
        assert f"Frozen {two_parts.frozen_at:%-d %B %Y}" in text
        assert "The floor & its depth" in text
    finding = two_parts.parts.all()[0].finding
    assert finding in texts[0].replace("\u00a0", " ")
    assert "Second look" in " ".join(texts[1:])
    assert "never means proved" in " ".join(texts)
    # Ranking and curves stand on one page.
    assert "Ranking" in texts[0]
    assert "Data, fit and" in texts[0]


def boxes(box: Any) -> list[Any]:
    """A box and all within it."""
    children = getattr(box, "all_children", lambda: getattr(box, "children", ()))()
    return [box, *(inner for child in children for inner in boxes(child))]


def _nothing_is_wider(pages: list[Any]) -> None:
    """No table, cell or drawing reaches beyond the text."""
    for page in pages:
        right = page._page_box.content_box_x() + page._page_box.width
        for box in boxes(page._page_box):
            if box.element_tag in {"table", "svg", "td", "th"} and hasattr(box, "position_x"):
                assert box.position_x + box.width <= right + 1.0, box
            if box.element_tag == "td" and hasattr(box, "children"):
                inner = [line for line in boxes(box) if hasattr(line, "text")]
                for line in inner:
                    assert line.position_x + line.width <= box.position_x + box.border_width() + 1.0, (
                        line.text
                    )


def test_the_same_report_gives_the_same_bytes(report: Report, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(
        printing, "svg", lambda figure: f"<svg viewBox='0 0 9 9'><title>{figure.name}</title></svg>"
    )
    assert printed(report, Paper.A4) == printed(report, Paper.A4)


def test_nothing_is_fetched(report: Report, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[str] = []

    def refuse(self: Refusing, url: str, headers: Any = None) -> Any:
        asked.append(url)
        raise NothingIsFetched(url)

    monkeypatch.setattr(Refusing, "fetch", refuse)
    monkeypatch.setattr(printing, "svg", lambda figure: "<svg viewBox='0 0 9 9'></svg>")
    printed(report, Paper.LETTER)
    assert asked == []
    # What would be fetched is refused.
    pictures = ["https://elsewhere.example/x.png", "file:///etc/hostname", "data:image/png;base64,AA=="]
    pdf.laid_out("".join(f"<img src='{picture}'>" for picture in pictures), [])
    assert asked == pictures


def test_with_each_page_that_is_set_it_is_said_that_the_work_goes_on() -> None:
    steps: list[str] = []
    pages = "".join("<p style='break-after: page'>a</p>" for _ in range(4))
    with pdf.telling(lambda: steps.append("set")):
        document = pdf.laid_out(pages, [])
    assert len(steps) >= 4
    steps.clear()
    pdf.laid_out(pages, [])
    assert not steps
    pdf.written(document, "a", lambda: steps.append("painted"))
    assert len(steps) == 4


def test_a_print_that_is_not_wanted_any_more_ends_in_the_midst() -> None:
    def superseded() -> None:
        raise Superseded

    with pytest.raises(Superseded), pdf.telling(superseded):
        pdf.laid_out("<p>a</p>", [])


def test_one_resolution_is_not_said_of_parts_that_have_others(
    two_parts: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(printing, "svg", lambda figure: "<svg></svg>")
    assert "the resolution chosen beforehand" in html(two_parts)
    widths = iter(["0.2", "0.5"] * 9)
    monkeypatch.setattr("fits.reports.words.resolution_width", lambda snapshot: next(widths))
    text = html(two_parts)
    assert "the resolution chosen beforehand" not in text
    assert "is given with each result" in text


def test_words_alone_are_printed_without_what_is_said_of_results(lead: User, done: Assessment) -> None:
    report = start_report(
        user=lead, collaboration=done.release.measurement.collaboration, title="Words", words="Calm."
    )
    add_part(report=report, seen=report.revision)
    report.refresh_from_db()
    freeze_report(user=lead, report=report, seen=report.revision)
    assert "Calm." in html(report)
    assert "inside" not in html(report)


def test_names_are_escaped_in_what_is_printed(lead: User, done: Assessment) -> None:
    report = start_report(
        user=lead, collaboration=done.release.measurement.collaboration, title="<i>a</i>", assessment=done
    )
    freeze_report(user=lead, report=report, seen=report.revision)
    assert "<i>a</i>" not in html(report)


@pytest.fixture
def quick(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(
        "fits.reports.printing.printed", lambda report, paper, step: f"%PDF {report.pk} {paper}".encode()
    )


@pytest.mark.usefixtures("quick")
def test_a_print_is_waited_for_and_then_shown(signed_in: SignedIn, member: User, report: Report) -> None:
    client = signed_in(member)
    address = reverse("reports:print", args=[report.pk, "a4"])
    progress = reverse("reports:print_progress", args=[report.pk, "a4"])
    waiting = client.get(address).content.decode()
    assert "is being made" in waiting
    assert f'hx-get="{progress}"' in waiting
    assert "HX-Refresh" not in client.get(progress)
    print_report(report.printings.get(paper="a4").pk)
    assert client.get(progress)["HX-Refresh"] == "true"
    made = client.get(address)
    assert made["Content-Type"] == "application/pdf"
    assert made.content == f"%PDF {report.pk} a4".encode()


@pytest.mark.usefixtures("quick")
def test_a_print_delivered_twice_is_made_once(report: Report) -> None:
    printing_row = report.printings.get(paper="letter")
    print_report(printing_row.pk)
    first = Printing.objects.values().get(pk=printing_row.pk)
    print_report(printing_row.pk)
    assert Printing.objects.values().get(pk=printing_row.pk) == first


def test_without_pango_a_print_fails_and_says_what_to_install(
    report: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    class WithoutPango(ModuleType):
        def __getattr__(self, name: str) -> Any:
            raise OSError("cannot load library 'libpango-1.0-0'")

    monkeypatch.setitem(sys.modules, "weasyprint", WithoutPango("weasyprint"))
    monkeypatch.delitem(sys.modules, "fits.reports.pdf")
    monkeypatch.delattr(fits.reports, "pdf")
    row = report.printings.get(paper="a4")
    print_report(row.pk)
    row.refresh_from_db()
    assert (row.status, row.failure_code) == (Status.FAILED, "no-pango")
    assert "Pango, which is not installed" in row.failure


def test_a_print_that_takes_too_long_fails_and_says_so(
    report: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    def slow(*_: Any) -> bytes:
        raise SoftTimeLimitExceeded

    monkeypatch.setattr("fits.reports.printing.printed", slow)
    row = report.printings.get(paper="a4")
    print_report(row.pk)
    row.refresh_from_db()
    assert (row.status, row.failure_code) == (Status.FAILED, "took-too-long")
    assert "fewer parts" in row.failure


def test_a_print_that_is_missing_is_asked_for_once(signed_in: SignedIn, member: User, report: Report) -> None:
    report.printings.all().delete()
    for _ in range(2):
        signed_in(member).get(reverse("reports:print", args=[report.pk, "letter"]))
    assert report.printings.get().status == Status.QUEUED


def test_a_print_that_failed_says_so_and_a_lead_asks_again(
    signed_in: SignedIn, lead: User, member: User, report: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_: Any) -> bytes:
        raise RuntimeError("no letters")

    monkeypatch.setattr("fits.reports.printing.printed", fail)
    row = ask_printing(report, Paper.A4)
    print_report(row.pk)
    address = reverse("reports:print", args=[report.pk, "a4"])
    page = signed_in(member).get(address).content.decode()
    assert "It could not be printed" in page
    assert "Try again" not in page
    assert signed_in(member).post(address).status_code == 403
    assert "Try again" in signed_in(lead).get(address).content.decode()
    signed_in(lead).post(address)
    row.refresh_from_db()
    assert (row.status, row.attempt) == (Status.QUEUED, 0)
    print_again(row)


@pytest.mark.usefixtures("quick")
def test_a_print_opens_behind_a_link(client: Client, lead: User, report: Report) -> None:
    secret = create_link(user=lead, report=report, label="", expires_at=None).secret
    address = reverse("reports:shared_print", args=[secret, "a4"])
    assert "is being made" in client.get(address).content.decode()
    print_report(report.printings.get(paper="a4").pk)
    assert client.get(address)["Content-Type"] == "application/pdf"
    assert client.get(address)["Cache-Control"] == "no-store"


def test_there_are_two_papers(signed_in: SignedIn, member: User, report: Report) -> None:
    assert signed_in(member).get(reverse("reports:print", args=[report.pk, "a5"])).status_code == 404
