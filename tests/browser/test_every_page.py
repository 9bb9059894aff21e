"""Each page on a desk and on a phone: readable by all, within its width, within the policy, by keyboard alone."""

import os
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.base import AXE_SCRIPT
from django.test import Client
from django.urls import URLPattern, URLResolver, get_resolver, reverse
from django.utils import timezone
from playwright.sync_api import Page, expect

from core.measurements.models import Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments.features import features_of
from fits.reports.models import ShareLink
from tests.browser.conftest import HEIGHT, WIDE, Browsing
from tests.browser.pages import PAGES, Row, a_batch, sealed
from tests.browser.survey import Survey, survey_of
from tests.reports.searches import NOTHING_FOUND, stored_search

pytestmark = pytest.mark.django_db(transaction=True)

NARROW = 360
SCREENSHOTS = os.environ.get("INRADIUS_SCREENSHOTS")
SERIOUS = {"serious", "critical"}
# Addresses that show no page of their own to who asks by GET: they take POST alone, or answer with a file, with
# a part of a page or by leading elsewhere.
NO_PAGES = {
    *("account_confirm_login_code", "account_confirm_reauthentication_code", "account_set_password"),
    *("account_request_reauthentication_code", "account_email", "account_email_verification_sent"),
    *("account_confirm_email", "assessments:cancel", "assessments:progress", "assessments:coordinates"),
    *("overviews:comparison_csv", "overviews:history_chart"),
    *("measurements:discard", "measurements:download", "measurements:look", "measurements:publish"),
    *("people:change_role", "people:remove", "people:leave"),
    *("people:new_invitation", "people:mail_invitation", "people:revoke_invitation"),
    *("reports:assessment_chart", "reports:assessment_csv", "reports:assessment_json"),
    *("reports:report_chart", "reports:report_csv", "reports:report_json"),
    *("reports:shared_chart", "reports:shared_csv", "reports:shared_json"),
    *("reports:assessment_features", "reports:report_features", "reports:shared_features"),
    *("reports:ask_features", "reports:cancel_features", "reports:features_progress"),
    *("reports:new_link", "reports:revoke", "reports:later", "reports:freeze", "reports:discard"),
    *("reports:add_part", "reports:move_part", "reports:remove_part", "reports:renew_part"),
    *("reports:print_progress", "reports:shared_print_progress"),
    *("talk:comment_theory", "talk:comment_assessment", "talk:remove", "talk:log_csv"),
    *("theories:discard", "theories:download", "theories:register_csv", "theories:submit"),
    *("theories:discard_batch", "theories:submit_batch", "overviews:desks_csv"),
}


@pytest.fixture
def survey(release: Release, theory: Theory, curve: Curve, member: User, stranger: User) -> Survey:
    return survey_of(release, theory, curve, member, stranger)


def opened(row: Row, survey: Survey, browsing: Browsing, width: int) -> Page:
    """The page, drawn."""
    user = None if row.who == "nobody" else getattr(survey, row.who)
    browsing.watch.expect(row.status)
    page = browsing.page(user, width=width)
    answer = page.goto(row.address(survey))
    assert answer is not None
    if row.then is None:
        assert answer.status == row.status
    else:
        row.then(page)
    page.wait_for_load_state("load")
    return page


def seen_faults(page: Page) -> list[str]:
    """What axe finds serious or critical."""
    page.evaluate(AXE_SCRIPT)
    # The strokes of drawings are left out, of which there are thousands: each stands in an element with a name.
    found: dict[str, Any] = page.evaluate(
        "axe.run({exclude: [['.js-plotly-plot .main-svg']]}, {resultTypes: ['violations']})"
    )
    return [
        f"{fault['id']} ({fault['impact']}): {fault['help']}: {node['target']}"
        for fault in found["violations"]
        if fault["impact"] in SERIOUS
        for node in fault["nodes"]
    ]


def sideways(page: Page) -> list[str]:
    """What reaches over the right edge, if the page can be scrolled sideways."""
    found: list[str] = page.evaluate(
        """() => document.documentElement.scrollWidth <= window.innerWidth ? [] :
        [...document.querySelectorAll("body *")]
          .filter((part) => part.getBoundingClientRect().right > window.innerWidth + 1)
          .map((part) => `${part.tagName}.${part.getAttribute("class")} ${part.textContent.trim().slice(0, 40)}`)
          .concat(`${document.documentElement.scrollWidth} px`)"""
    )
    return found


def picture(page: Page, row: Row, width: int) -> None:
    """Keep a screenshot, for someone to look at."""
    if SCREENSHOTS:
        folder = Path(SCREENSHOTS)
        folder.mkdir(parents=True, exist_ok=True)
        page.evaluate("window.scrollTo(0, 0)")
        page.screenshot(path=folder / f"{row.name}-{width}.png", full_page=True)


@pytest.mark.parametrize("row", PAGES, ids=[row.name for row in PAGES])
def test_a_page_is_readable_by_all_and_keeps_to_its_width(
    row: Row, survey: Survey, browsing: Browsing
) -> None:
    page = opened(row, survey, browsing, WIDE)
    assert faults_at(page, row, WIDE) == []
    if row.then is None:
        page.set_viewport_size({"width": NARROW, "height": HEIGHT})
        page.reload(wait_until="load")
    else:
        page = opened(row, survey, browsing, NARROW)
    assert faults_at(page, row, NARROW) == []


def faults_at(page: Page, row: Row, width: int) -> list[str]:
    """What is wrong with the page as it stands."""
    picture(page, row, width)
    return [*sideways(page), *seen_faults(page)]


def routes(patterns: Sequence[URLPattern | URLResolver], space: str = "") -> Iterator[tuple[str, str]]:
    """Name and path of every named address of the site."""
    for pattern in patterns:
        if isinstance(pattern, URLResolver):
            yield from routes(pattern.url_patterns, f"{pattern.namespace}:" if pattern.namespace else space)
        elif pattern.name:
            yield space + pattern.name, str(pattern.pattern)


def test_every_address_that_shows_a_page_is_in_the_list() -> None:
    named = {name for name, _ in routes(get_resolver().url_patterns)}
    assert named == {row.route for row in PAGES} | NO_PAGES


def test_the_addresses_left_out_of_the_list_show_no_page(survey: Survey) -> None:
    client = Client()
    client.force_login(survey.lead)
    keys = {
        "assessments": survey.done.pk,
        "batches": a_batch(survey).pk,
        "collaborations": survey.collaboration.pk,
        "comments": 1,
        "curves": survey.curve.pk,
        "invitations": survey.collaboration.invitations.create(
            created_by=survey.lead, expires_at=timezone.now()
        ).pk,
        "links": ShareLink.objects.latest("pk").pk,
        "measurements": survey.measurement.pk,
        "r": survey.secret,
        "releases": survey.release.pk,
        "report-parts": survey.report.parts.get().pk,
        "reports": survey.report.pk,
        "theories": survey.theory.pk,
    }
    part = survey.report.parts.get()
    found = features_of(stored_search(survey.done, NOTHING_FOUND, survey.member))
    survey.report.parts.update(snapshot=(part.snapshot or {}) | {"features": found})
    person = survey.member.memberships.get().pk
    rest = {"membership_pk": person, "name": "curves", "form": "csv", "key": "none", "paper": "a4"}
    shown = []
    for name, path in routes(get_resolver().url_patterns):
        if name in NO_PAGES:
            own = {"pk": keys.get(path.split("/")[0]), "token": survey.secret, **rest}
            if name.endswith("_features"):
                own["name"] = "features.json"
            if name == "overviews:history_chart":
                own["name"] = "history"
            if name == "theories:register_csv":
                own["pk"] = sealed(survey)
            address = reverse(name, kwargs={key: own[key] for key in own if f"{key}>" in path})
            answer = client.get(address)
            assert answer.status_code in {200, 302, 405}, address
            if answer.status_code == 200 and b"<html" in answer.getvalue():
                shown.append(name)
    assert shown == []


def test_what_has_the_keyboard_can_be_seen(survey: Survey, browsing: Browsing) -> None:
    page = browsing.page(survey.lead)
    for address in (
        reverse("overviews:home"),
        survey.done.get_absolute_url(),
        survey.draft.get_absolute_url(),
    ):
        page.goto(address)
        page.keyboard.press("Tab")
        expect(page.get_by_role("link", name="Skip to the content")).to_be_in_viewport()
        for _ in range(14):
            page.keyboard.press("Tab")
            outline = page.evaluate("getComputedStyle(document.activeElement).outlineStyle")
            assert outline != "none", page.evaluate("document.activeElement.outerHTML")


def test_the_way_past_the_header_leads_to_the_content(survey: Survey, browsing: Browsing) -> None:
    page = browsing.page(survey.lead)
    page.goto(reverse("overviews:home"))
    page.keyboard.press("Tab")
    page.keyboard.press("Enter")
    expect(page.locator("#content")).to_be_focused()


def test_style_scripts_and_charts_arrive(survey: Survey, browsing: Browsing) -> None:
    page = browsing.page(survey.lead)
    page.goto(survey.done.get_absolute_url())
    expect(page.locator(".js-plotly-plot .main-svg").first).to_be_visible()
    sheets = "[...document.styleSheets].map((sheet) => sheet.cssRules.length)"
    assert min(page.evaluate(sheets)) > 0
    drawn = page.locator("[data-chart].is-drawn").count()
    assert drawn == page.locator("[data-chart]").count() > 5


def test_a_result_can_be_read_without_scripts(survey: Survey, browsing: Browsing) -> None:
    page = browsing.page(survey.lead, scripts=False)
    page.goto(f"{survey.done.get_absolute_url()}?level=0.99")
    expect(page.locator(".finding:visible")).to_contain_text("99 % set")
    stills = page.locator("img.drawn")
    assert stills.count() > 5
    for still in stills.all():
        expect(still).to_be_visible()
        page.wait_for_function(
            "still => still.complete && still.naturalWidth > 0", arg=still.element_handle()
        )


def test_on_paper_every_chart_is_its_still_drawing(survey: Survey, browsing: Browsing) -> None:
    page = browsing.page(survey.lead)
    page.goto(survey.done.get_absolute_url())
    expect(page.locator(".js-plotly-plot .main-svg").first).to_be_visible()
    page.emulate_media(media="print")
    page.pdf()
    expect(page.locator(".js-plotly-plot:visible")).to_have_count(0)
    stills = page.locator("img.drawn")
    assert stills.count() > 5
    for still in stills.all():
        expect(still).to_be_visible()
        page.wait_for_function(
            "still => still.complete && still.naturalWidth > 0", arg=still.element_handle()
        )
