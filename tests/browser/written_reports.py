"""Reports at each stage of their writing, for the pages that browsers are shown."""

from playwright.sync_api import Page as BrowserPage

from fits.reports.models import Report, ReportPart
from fits.reports.services import (
    add_part,
    create_link,
    edit_part,
    freeze_report,
    start_later_version,
    start_report,
)
from tests.browser.survey import Survey

PASSPHRASE = "calm water & deep"


def draft(survey: Survey) -> int:
    """A draft of several parts, not all of whose theories are shown."""
    return _draft(survey).pk


def draft_part(survey: Survey) -> int:
    """Its part with an assessment."""
    return _draft(survey).parts.exclude(assessment=None).values_list("pk", flat=True)[0]


def later_draft(survey: Survey) -> int:
    """A draft that continues the survey's report."""
    return start_later_version(user=survey.lead, report=survey.report).pk


def frozen(survey: Survey) -> Report:
    """A frozen report of several pages."""
    report = _draft(survey)
    freeze_report(user=survey.lead, report=report, seen=report.revision)
    start = start_later_version(user=survey.lead, report=report)
    freeze_report(user=survey.lead, report=start, seen=start.revision)
    return start


def frozen_key(survey: Survey) -> int:
    """The key of one that has been continued."""
    report = frozen(survey).previous
    assert report is not None
    return report.pk


def locked_secret(survey: Survey) -> str:
    """The secret of a link that asks for a passphrase."""
    made = create_link(
        user=survey.lead, report=survey.report, label="", expires_at=None, passphrase=PASSPHRASE
    )
    return made.secret


def give_a_wrong_passphrase(page: BrowserPage) -> None:
    """Try to guess it."""
    page.get_by_label("Passphrase").fill("shallow")
    page.get_by_role("button", name="Open the report").click()


def give_no_heading_and_show_nothing(page: BrowserPage) -> None:
    """Take all the ticks away."""
    for box in page.get_by_role("checkbox").all():
        box.uncheck()
    page.get_by_role("button", name="Keep it").click()


def show_the_second_part(page: BrowserPage) -> None:
    """Go on to the next page of a report."""
    page.get_by_role("navigation", name="Parts of this report").get_by_role("link").first.click()
    page.wait_for_url("**?part=2")


def _draft(survey: Survey) -> Report:
    report = start_report(
        user=survey.lead,
        collaboration=survey.collaboration,
        title="What two gauges say of the floor",
        words="We asked *both* gauges.\n\n- one at the outflow\n- one at the narrows\n\n> Neither is new.",
        assessment=survey.done,
    )
    words = add_part(report=report, seen=report.revision)
    _write(
        words,
        heading="Between",
        words="# A pause\n\nWords alone, with `code` and [a link](https://merrow.example).",
    )
    report.refresh_from_db()
    again = add_part(report=report, seen=report.revision, assessment=survey.done)
    _write(again, heading="The same without the rest", shown=["Parabolic floor", "Flat floor"])
    report.refresh_from_db()
    return report


def _write(part: ReportPart, **fields: object) -> None:
    for name, value in fields.items():
        setattr(part, name, value)
    edit_part(part=part, seen=part.revision)
