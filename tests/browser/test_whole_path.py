"""From signing in to a report that somebody without an account reads, and that is then closed to them."""

import re
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from django.urls import reverse
from playwright.sync_api import FilePayload, Locator, Page, expect

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments.models import Assessment
from tests.browser.conftest import PATIENCE, Browsing
from tests.conftest import PASSWORD, power
from tests.real_processes import real_worker, wait_until_ready

pytestmark = pytest.mark.django_db(transaction=True)

POINTS = 60
# Peaks so far off that the 95 % set rejects the curve and the 99 % set does not.
DOUBTFUL = 1.026


@pytest.fixture
def worker(redis_server: None, browsing: Browsing, tmp_path: Path) -> Iterator[None]:
    """A real worker on the same database."""
    log = tmp_path / "worker.log"
    with real_worker(log) as process:
        wait_until_ready(process, log)
        yield


def upload(field: Locator, name: str, columns: list[np.ndarray], header: str) -> None:
    """Choose a made-up table as the file of a field."""
    rows = "".join(",".join(f"{value:.6g}" for value in row) + "\n" for row in zip(*columns, strict=True))
    file: FilePayload = {"name": name, "mimeType": "text/csv", "buffer": f"{header}\n{rows}".encode()}
    field.set_input_files(files=[file])


def upload_data(page: Page) -> None:
    """A noisy spectrum of the made-up lake, with headers that say nothing to a reader of tables."""
    x = np.linspace(0.5, 4.5, POINTS)
    y = power(x) + np.random.default_rng(5).normal(0.0, 0.1, POINTS)
    columns = [x, y, np.full(POINTS, 0.1)]
    upload(page.get_by_label("Data table"), "merrow.csv", columns, "frequency,height,spread")
    page.get_by_role("button", name="Read it").click()


def upload_curve(page: Page, *, stretch: float = 1.0) -> None:
    """A spectrum with its peaks at `stretch` times the true places."""
    x = np.linspace(0.4, 4.6, 200)
    upload(page.get_by_label("Curve", exact=True), "curve.csv", [x, power(x * stretch)], "x,y")
    page.get_by_role("button", name="Read it").click()


def sign_in(page: Page, user: User) -> None:
    """By e-mail address and password."""
    page.goto("/")
    page.get_by_label("E-mail address").fill(user.email)
    page.get_by_label("Password").fill(PASSWORD)
    page.get_by_role("button", name="Sign in").click()
    expect(page.get_by_role("heading", name="What is new")).to_be_visible()


def start_a_collaboration(page: Page) -> None:
    """A collaboration and its first measurement, along the steps that the first page offers."""
    page.get_by_role("link", name="Create a collaboration").click()
    page.get_by_label("Name").fill("Lake Merrow survey")
    page.get_by_role("button", name="Start it").click()
    page.get_by_role("link", name="Add a measurement").click()
    page.get_by_label("Name", exact=True).fill("Surface seiche power")
    page.get_by_label("Name of x").fill("frequency")
    page.get_by_label("Unit of x").fill("cycles per hour")
    page.get_by_label("Name of y").fill("power")
    page.get_by_role("button", name="Add it").click()
    expect(page.get_by_role("heading", level=1)).to_have_text("Surface seiche power")


def publish_a_release(page: Page) -> None:
    """Upload, say what the columns are, look, publish."""
    page.get_by_role("link", name="Upload a release").click()
    upload_data(page)
    expect(page.get_by_role("heading", name="Not ready to publish")).to_be_visible()
    expect(page.get_by_role("button", name="Publish")).to_have_count(0)
    for column, role in (("frequency", "x"), ("height", "y"), ("spread", "error of y")):
        page.get_by_label(f"What {column} is").select_option(label=role)
    page.get_by_role("button", name="Read it so").click()
    expect(page.locator(".figure .main-svg").first).to_be_visible()
    page.get_by_role("button", name="Publish").click()
    expect(page.get_by_role("heading", level=1)).to_have_text("Release 1")


def submit_a_curve(page: Page, *, stretch: float = 1.0) -> None:
    """From the page of a theory: upload, see it over the data, submit."""
    page.get_by_role("link", name="New curve").click()
    upload_curve(page, stretch=stretch)
    expect(page.get_by_role("heading", name="Is this the curve you meant?")).to_be_visible()
    expect(page.get_by_role("heading", name="Over the data of release 1")).to_be_visible()
    expect(page.locator(".figure .scatterlayer .trace")).to_have_count(2)
    page.get_by_role("button", name="Submit").click()
    expect(page.get_by_role("status")).to_contain_text("Version 1 is submitted.")


def add_theories(page: Page) -> None:
    """One that is true and one that is not, each with a curve."""
    for name, stretch in (("Parabolic floor", 1.0), ("Triangular floor", DOUBTFUL)):
        page.get_by_role("link", name="Lake Merrow survey").click()
        page.get_by_role("link", name="Add a theory").click()
        page.get_by_label("Name").fill(name)
        page.get_by_role("button", name="Add it").click()
        submit_a_curve(page, stretch=stretch)


def assess(page: Page) -> None:
    """Start an assessment of the newest release and stay until the result is there."""
    page.get_by_role("link", name="Surface seiche power").first.click()
    page.get_by_role("link", name="Assess release 1").click()
    page.get_by_label("Seed").fill("7")
    page.get_by_role("button", name="Start the assessment").click()
    expect(page.get_by_role("heading", level=1)).to_have_text("Assessment of release 1")
    expect(page.locator(".finding:visible")).to_be_visible(timeout=2 * PATIENCE)


def read_the_result(page: Page) -> None:
    """The finding, the ranking, another level by keyboard, one curve less."""
    finding = page.locator(".finding:visible")
    expect(finding).to_contain_text("Of 2 theories, 1 stays inside the 95 % set of release 1")
    expect(finding).to_contain_text("the closest is Parabolic floor")
    table = page.get_by_role("region", name="Ranking table")
    expect(table.locator("tbody th")).to_contain_text(["Parabolic floor", "Triangular floor"])
    expect(table.locator("tbody").nth(1).locator("td.chosen")).to_have_text("outside")

    page.get_by_role("radio", name="95 %").focus()
    page.keyboard.press("ArrowRight")
    expect(page.get_by_role("radio", name="99 %")).to_be_checked()
    expect(finding).to_contain_text("All 2 theories stay inside the 99 % set of release 1")
    expect(table.locator("tbody").nth(1).locator("td.chosen")).to_have_text("inside")

    lines = page.locator("#chart-curves .main-svg .trace.scatter")
    drawn = lines.count()
    box = page.locator("[data-legend]").get_by_label("Triangular floor")
    box.focus()
    page.keyboard.press("Space")
    expect(box).not_to_be_checked()
    expect(lines).not_to_have_count(drawn)
    assert lines.count() < drawn


def write_a_report(page: Page) -> None:
    """Words of one's own above a frozen result."""
    page.get_by_role("link", name="Write a report").click()
    page.get_by_label("Title").fill("The floor of the lake")
    page.get_by_role("button", name="Take it in").click()
    page.get_by_role("link", name="Change title and opening words").click()
    page.get_by_label("Opening words").fill("A first look, <b>no more</b>.")
    page.get_by_role("button", name="Keep them").click()
    page.get_by_role("link", name="Preview").click()
    expect(page.locator(".words")).to_have_text("A first look, <b>no more</b>.")
    page.get_by_role("link", name="Back to the draft").click()
    page.get_by_role("button", name="Freeze the report").click()
    expect(page.get_by_role("heading", level=1)).to_have_text("The floor of the lake")
    expect(page.locator(".words")).to_have_text("A first look, <b>no more</b>.")


def share_it(page: Page) -> str:
    """The address of a new link, which is shown once."""
    page.get_by_label("For whom").fill("the harbour office")
    page.get_by_role("button", name="Make a link").click()
    address = page.locator(".secret").get_attribute("href")
    assert address
    assert re.search(r"/r/[\w-]{43}/$", address)
    return address


def read_without_an_account(page: Page, address: str) -> None:
    """The report as whoever has the link sees it."""
    answer = page.goto(address)
    assert answer is not None
    assert answer.status == 200
    assert answer.headers["referrer-policy"] == "no-referrer"
    expect(page.get_by_role("heading", level=1)).to_have_text("The floor of the lake")
    expect(page.locator(".finding:visible")).to_contain_text("1 stays inside the 95 % set")
    expect(page.locator(".js-plotly-plot .main-svg").first).to_be_visible()
    expect(page.get_by_role("button", name="Make a link")).to_have_count(0)
    assert page.context.cookies() == []


def test_from_sign_in_to_a_shared_report_and_its_end(lead: User, browsing: Browsing, worker: None) -> None:
    page = browsing.page()
    sign_in(page, lead)
    start_a_collaboration(page)
    publish_a_release(page)
    add_theories(page)
    assess(page)
    read_the_result(page)
    write_a_report(page)
    address = share_it(page)

    guest = browsing.page()
    read_without_an_account(guest, address)

    page.get_by_role("button", name="Revoke the harbour office").click()
    expect(page.get_by_role("status")).to_contain_text("The link is revoked")
    browsing.watch.expect(404)
    answer = guest.reload()
    assert answer is not None
    assert answer.status == 404
    expect(guest.get_by_role("heading", level=1)).to_have_text("This link opens nothing")
    expect(guest.locator(".finding")).to_have_count(0)


def test_a_member_submits_a_curve_that_a_stranger_cannot_see(
    release: Release, theory: Theory, member: User, stranger: User, browsing: Browsing
) -> None:
    page = browsing.page(member)
    page.goto(theory.get_absolute_url())
    submit_a_curve(page)
    browsing.watch.expect(404)
    other = browsing.page(stranger)
    for address in (
        page.url,
        reverse("theories:new_curve", args=[theory.pk]),
        theory.get_absolute_url(),
        release.get_absolute_url(),
        reverse("assessments:new", args=[release.pk]),
    ):
        answer = other.goto(address)
        assert answer is not None
        assert answer.status == 404
        expect(other.get_by_role("heading", level=1)).to_have_text("Not here")


def test_what_waits_for_a_worker_is_cancelled_by_its_button(
    release: Release, curve: Curve, member: User, browsing: Browsing, redis_server: None
) -> None:
    page = browsing.page(member)
    page.goto(reverse("assessments:new", args=[release.pk]))
    page.get_by_role("button", name="Start the assessment").click()
    expect(page.get_by_text("Waiting for a worker").first).to_be_visible()
    with page.expect_response(re.compile("/progress$")):
        pass
    page.get_by_role("button", name="Cancel").click()
    expect(page.get_by_text("It was cancelled")).to_be_visible()
    assert Assessment.objects.get().status == Assessment.Status.CANCELLED


def test_a_curve_off_by_a_thousand_is_questioned_before_it_counts(
    measurement: Measurement, release: Release, theory: Theory, member: User, browsing: Browsing
) -> None:
    page = browsing.page(member)
    page.goto(reverse("theories:new_curve", args=[theory.pk]))
    x = np.linspace(0.4, 4.6, 200)
    upload(page.get_by_label("Curve", exact=True), "curve.csv", [x, 1000.0 * power(x)], "x,y")
    page.get_by_role("button", name="Read it").click()
    expect(page.get_by_role("heading", name="Look twice")).to_be_visible()
    page.get_by_role("button", name="Discard the draft").click()
    expect(page.get_by_role("status")).to_contain_text("The draft is gone.")
    assert not Curve.objects.exists()
