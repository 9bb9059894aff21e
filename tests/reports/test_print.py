"""Reports on paper: the pages that are laid out, without a network, and the job that makes them."""

from collections.abc import Callable, Iterable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from core.people.models import User
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


def test_names_are_escaped_in_what_is_printed(lead: User, done: Assessment) -> None:
    report = start_report(
        user=lead, collaboration=done.release.measurement.collaboration, title="<i>a</i>", assessment=done
    )
    freeze_report(user=lead, report=report, seen=report.revision)
    assert "<i>a</i>" not in html(report)


@pytest.fixture
def quick(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(
        "fits.reports.tasks.printed", lambda report, paper, step: f"%PDF {report.pk} {paper}".encode()
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

    monkeypatch.setattr("fits.reports.tasks.printed", fail)
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
