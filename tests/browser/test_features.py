"""Features in a real browser: charts that come when they are near, levels, progress, windows by hand."""

import os
import re
from pathlib import Path
from typing import Any

import pytest
from playwright.sync_api import Page, expect

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments.features import features_of
from fits.assessments.models import FeaturePart, FeatureSearch
from fits.assessments.services.find_features import find_own_features
from fits.reports import page as result_pages
from fits.reports.services import create_link, create_report
from tests.assessments.searching import run_all
from tests.browser.conftest import WIDE, Browsing
from tests.browser.survey import Survey, survey_of
from tests.browser.test_every_page import NARROW, seen_faults, sideways
from tests.reports.searches import running_search, stored_search

pytestmark = pytest.mark.django_db(transaction=True)

SCREENSHOTS = os.environ.get("INRADIUS_SCREENSHOTS")
# Found once: the survey of every test here is the same.
_found: dict[str, Any] = {}


@pytest.fixture
def survey(release: Release, theory: Theory, curve: Curve, member: User, stranger: User) -> Survey:
    survey = survey_of(release, theory, curve, member, stranger)
    if not _found:
        search = find_own_features(member, survey.done)
        run_all(search)
        _found.update(features_of(search) or {})
        assert _found["complete"], _found["failures"]
        search.delete()
    return survey


@pytest.fixture
def search(survey: Survey) -> FeatureSearch:
    return stored_search(survey.done, _found, survey.member)


def through(page: Page) -> None:
    """Scroll past every chart, the dips' as well."""
    page.locator("details.dips > summary").click()
    for chart in page.locator("[data-features] [data-chart]").all():
        chart.scroll_into_view_if_needed()
        expect(chart.locator(".main-svg").first).to_be_visible()


def picture(page: Page, name: str, width: int) -> None:
    """Keep a screenshot, for someone to look at."""
    if SCREENSHOTS:
        place = Path(SCREENSHOTS) / f"features-{name}-{width}.png"
        page.locator("[data-features]").screenshot(path=place)


@pytest.mark.parametrize("width", [WIDE, NARROW])
def test_features_are_readable_by_all_and_within_their_width(
    survey: Survey, search: FeatureSearch, browsing: Browsing, width: int
) -> None:
    page = browsing.page(survey.member, width=width)
    page.goto(survey.done.get_absolute_url())
    through(page)
    assert (
        page.locator("[data-features] .is-drawn").count()
        == page.locator("[data-features] [data-chart]").count()
    )
    picture(page, "result", width)
    assert sideways(page) == []
    assert seen_faults(page) == []


def test_charts_are_fetched_where_they_are_too_large_for_the_page(
    survey: Survey, search: FeatureSearch, browsing: Browsing, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(result_pages, "LARGEST_INLINE", 1000)
    report = create_report(
        user=survey.lead, assessment=survey.done, title="With peaks", words="", search=search
    )
    link = create_link(user=survey.lead, report=report, label="", expires_at=None)
    page = browsing.page()
    with page.expect_response(lambda answer: answer.url.endswith("/features/plots.json")) as fetched:
        page.goto(f"/r/{link.secret}/")
        through(page)
    assert fetched.value.status == 200


def test_another_level_changes_sentences_table_and_charts(
    survey: Survey, search: FeatureSearch, browsing: Browsing
) -> None:
    page = browsing.page(survey.member)
    page.goto(survey.done.get_absolute_url())
    through(page)
    page.get_by_label("67 %").check()
    expect(page.locator("[data-features] p[data-level]:visible").first).to_contain_text("At 67")
    expect(page.locator("table.peaks tr.chosen").first).to_contain_text("67 %")
    widths = page.evaluate(
        """() => Object.fromEntries(document.querySelector("[data-chart=regions] .plot").data
        .filter((trace) => trace.meta.kind === "levelline")
        .map((trace) => [trace.meta.level, trace.line.width]))"""
    )
    assert max(widths, key=widths.get) == "0.67"


def test_on_paper_every_chart_is_its_still_drawing(
    survey: Survey, search: FeatureSearch, browsing: Browsing
) -> None:
    page = browsing.page(survey.member)
    page.goto(survey.done.get_absolute_url())
    page.evaluate("dispatchEvent(new Event('beforeprint'))")
    page.emulate_media(media="print")
    page.pdf()
    stills = page.locator("[data-features] img.drawn")
    assert stills.count() >= 6
    for still in stills.all():
        expect(still).to_be_visible()
        page.wait_for_function(
            "still => still.complete && still.naturalWidth > 0", arg=still.element_handle()
        )


def test_features_can_be_read_without_scripts(
    survey: Survey, search: FeatureSearch, browsing: Browsing
) -> None:
    page = browsing.page(survey.member, scripts=False)
    page.goto(f"{survey.done.get_absolute_url()}?level=0.67")
    expect(page.locator("[data-features] p[data-level]:visible").first).to_contain_text("At 67")
    expect(page.locator("table.peaks").first).to_be_visible()
    expect(page.locator("[data-features] [data-pick]")).to_be_hidden()


@pytest.mark.parametrize("width", [WIDE, NARROW])
def test_a_search_is_followed_and_its_end_shown(survey: Survey, browsing: Browsing, width: int) -> None:
    running = running_search(survey.done, _found, survey.member)
    page = browsing.page(survey.member, width=width)
    page.goto(survey.done.get_absolute_url())
    expect(page.locator("#search-progress")).to_contain_text("parts done")
    picture(page, "progress", width)
    assert sideways(page) == []
    assert seen_faults(page) == []
    FeaturePart.objects.filter(search=running).update(status=FeaturePart.Status.DONE)
    FeatureSearch.objects.filter(pk=running.pk).update(status=FeatureSearch.Status.DONE)
    expect(page.locator("table.peaks").first).to_be_visible()


@pytest.fixture
def picking(survey: Survey, search: FeatureSearch, browsing: Browsing) -> Page:
    """The page with its chart for picking open."""
    page = browsing.page(survey.member)
    page.goto(survey.done.get_absolute_url())
    # Charts that are drawn while something is clicked would move it away.
    through(page)
    page.get_by_text("Seek in other windows").click()
    page.get_by_role("button", name="Pick a window on the chart").click()
    page.locator("#window-picker .main-svg").first.wait_for()
    return page


def test_a_drag_over_the_chart_fills_the_list(survey: Survey, picking: Page) -> None:
    page = picking
    area = page.locator("#window-picker .nsewdrag").first
    area.scroll_into_view_if_needed()
    field = page.get_by_label("Windows, in cycles per hour")
    line = r"\d(\.\d+)? to \d(\.\d+)?"
    for lines, (start, end) in enumerate(((0.2, 0.35), (0.5, 0.7)), start=1):
        box = area.bounding_box()
        assert box is not None
        page.mouse.move(box["x"] + start * box["width"], box["y"] + 60)
        page.mouse.down()
        page.mouse.move(box["x"] + end * box["width"], box["y"] + 90, steps=6)
        # A hand takes its time: what is picked is drawn before it lets go.
        expect(page.locator("#window-picker .select-outline").first).to_be_attached()
        page.mouse.move(box["x"] + end * box["width"], box["y"] + 91)
        page.mouse.up()
        expect(field).to_have_value(re.compile(rf"^{line}(\n{line}){{{lines - 1}}}$"))
    picture(page, "picking", WIDE)
    assert seen_faults(page) == []
    page.get_by_role("button", name="Seek", exact=True).click()
    page.wait_for_url("**search=*")
    assert len(FeatureSearch.objects.latest("pk").windows) == 2


def test_wrong_windows_come_back_with_their_faults(survey: Survey, picking: Page) -> None:
    page = picking
    page.get_by_label("Windows, in cycles per hour").fill("0.9 to 2.1\nhere and there")
    page.get_by_role("button", name="Seek", exact=True).click()
    expect(page.locator("[data-faults]")).to_contain_text("Line 2: “here and there”")
    expect(page.locator("[data-faults]")).to_be_focused()
    expect(page.get_by_label("Windows, in cycles per hour")).to_have_value("0.9 to 2.1\nhere and there")
    picture(page, "faults", WIDE)
    assert seen_faults(page) == []
