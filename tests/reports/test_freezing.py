"""What freezing takes up, what it refuses, and that nothing changes afterwards."""

import re
from collections.abc import Callable
from importlib import import_module

import pytest
from django.test import Client
from django.urls import reverse
from django.utils import timezone

from core.errors import UserError
from core.measurements.models import Measurement, Release
from core.people.log import Deed
from core.people.models import Collaboration, LogEntry, User
from fits.assessments.models import Assessment
from fits.reports.models import Paper, Printing, Report, ReportPart
from fits.reports.printing import html
from fits.reports.readable import with_place
from fits.reports.services import (
    add_part,
    create_link,
    discard_report,
    edit_part,
    edit_report,
    freeze_report,
    move_part,
    remove_part,
    renew_part,
    start_later_version,
    start_report,
)
from tests.meanwhile import meanwhile

SignedIn = Callable[[User], Client]
FREEZING = import_module("fits.reports.services.freeze_report")


@pytest.fixture
def draft(lead: User, collaboration: Collaboration, done: Assessment) -> Report:
    return start_report(
        user=lead, collaboration=collaboration, title="The floor", words="*So.*", assessment=done
    )


def frozen(report: Report, by: User) -> Report:
    freeze_report(user=by, report=report, seen=report.revision)
    return report


def refusal(report: Report, by: User) -> str:
    with pytest.raises(UserError) as refused:
        freeze_report(user=by, report=report, seen=report.revision)
    assert not Report.objects.get(pk=report.pk).is_frozen
    return refused.value.code


def test_a_frozen_report_and_its_parts_refuse_to_be_saved_and_deleted(lead: User, draft: Report) -> None:
    part = draft.parts.get()
    frozen(draft, lead)
    for row in (draft, part, Report.objects.get(), ReportPart.objects.get()):
        with pytest.raises(TypeError, match="never changes"):
            row.save()
        with pytest.raises(TypeError, match="never changes"):
            row.delete()
    with pytest.raises(TypeError, match="never changes"):
        ReportPart.objects.create(report=draft, order=9)


def test_no_service_changes_what_is_frozen(lead: User, draft: Report) -> None:
    part = draft.parts.get()
    frozen(draft, lead)
    before = Report.objects.values().get(), ReportPart.objects.values().get()
    for change in (
        lambda: edit_report(report=draft, seen=draft.revision),
        lambda: add_part(report=draft, seen=draft.revision),
        lambda: edit_part(part=part, seen=part.revision),
        lambda: move_part(part=part, seen=draft.revision, up=True),
        lambda: remove_part(part=part, seen=draft.revision),
        lambda: renew_part(part=part, seen=draft.revision),
        lambda: discard_report(user=lead, report=draft, seen=draft.revision),
        lambda: freeze_report(user=lead, report=draft, seen=draft.revision),
    ):
        with pytest.raises(UserError) as refused:
            change()
        assert refused.value.code == "report-frozen"
    assert (Report.objects.values().get(), ReportPart.objects.values().get()) == before


def test_words_are_rendered_once_and_for_all(
    lead: User, draft: Report, signed_in: SignedIn, monkeypatch: pytest.MonkeyPatch
) -> None:
    frozen(draft, lead)
    monkeypatch.setattr("fits.reports.report_pages.rendered", lambda words, below: "another library")
    page = signed_in(lead).get(draft.get_absolute_url()).content.decode()
    assert "<em>So.</em>" in page
    assert "another library" not in page


def test_who_wrote_it_and_where_stays_as_it_was_called(
    lead: User, draft: Report, signed_in: SignedIn
) -> None:
    frozen(draft, lead)
    name, place = str(lead), str(draft.collaboration)
    User.objects.filter(pk=lead.pk).update(name="Another Name")
    Collaboration.objects.update(name="Another place")
    page = signed_in(lead).get(draft.get_absolute_url()).content.decode()
    printed = html(with_place().get(pk=draft.pk))
    for text in (page, printed):
        assert re.search(rf"{name}, (<[^>]*>)?{place}", text)
        assert "Another Name, " not in text
    assert "Another" not in printed


def test_what_is_frozen_outlives_its_assessment(
    lead: User, draft: Report, done: Assessment, signed_in: SignedIn
) -> None:
    frozen(draft, lead)
    before = signed_in(lead).get(draft.get_absolute_url()).context["rows"]
    done.delete()
    assert signed_in(lead).get(draft.get_absolute_url()).context["rows"] == before


def test_nothing_in_it_is_refused(lead: User, collaboration: Collaboration) -> None:
    empty = start_report(user=lead, collaboration=collaboration, title="Empty")
    assert refusal(empty, lead) == "report-empty"


def test_an_assessment_that_is_not_done_is_refused(lead: User, draft: Report) -> None:
    Assessment.objects.update(status=Assessment.Status.RUNNING)
    assert refusal(draft, lead) == "assessment-not-done"


def test_a_sealed_measurement_is_refused(lead: User, draft: Report, done: Assessment) -> None:
    Measurement.objects.update(sealed_at=timezone.now())
    assert refusal(draft, lead) == "measurement-sealed"
    done = Assessment.objects.get(pk=done.pk)
    with pytest.raises(UserError) as refused:
        add_part(report=draft, seen=draft.revision, assessment=done)
    assert refused.value.code == "measurement-sealed"


def test_what_stands_at_a_desk_is_refused(lead: User, member: User, draft: Report) -> None:
    Assessment.objects.update(desk=member)
    assert refusal(draft, lead) == "assessment-at-desk"


def test_a_release_that_is_withdrawn_already_is_said_in_the_preview_and_in_the_frozen_words(
    lead: User, draft: Report, signed_in: SignedIn
) -> None:
    withdraw("The clock was wrong & late.", lead)
    preview = signed_in(lead).get(reverse("reports:preview", args=[draft.pk])).content.decode()
    frozen(draft, lead)
    words = draft.parts.get().words_html
    assert words in preview
    assert "Release 1 of Surface seiche power was withdrawn on" in words
    assert "The clock was wrong &amp; late." in words


def withdraw(reason: str, by: User) -> None:
    Release.objects.update(
        state=Release.State.WITHDRAWN, withdrawn_at=timezone.now(), withdrawn_by=by, withdrawal_reason=reason
    )


def test_a_release_withdrawn_afterwards_is_noticed_beside_the_frozen_words(
    lead: User, draft: Report, signed_in: SignedIn, client: Client
) -> None:
    frozen(draft, lead)
    secret = create_link(user=lead, report=draft, label="", expires_at=None).secret
    pages = draft.get_absolute_url(), f"/r/{secret}/"
    assert "was withdrawn" not in signed_in(lead).get(pages[0]).content.decode()
    withdraw("The clock was wrong.", lead)
    inside, outside = signed_in(lead).get(pages[0]), client.get(pages[1])
    for page in (inside, outside):
        assert "release 1 of Surface seiche power was withdrawn" in page.content.decode()
    # The reason is the collaboration's own.
    assert "The clock was wrong." in inside.content.decode()
    assert "The clock was wrong." not in outside.content.decode()
    assert "withdrawn" not in draft.parts.get().words_html


def test_theories_that_are_not_shown_are_not_even_kept(lead: User, draft: Report, done: Assessment) -> None:
    assert done.result is not None
    assert done.detail is not None
    for document in (done.result, done.detail):
        only = document["curves"][0]
        document["curves"] = [only, only | {"name": "Flat floor", "rank": 2}]
    done.save()
    part = draft.parts.get()
    part.shown = ["Parabolic floor"]
    edit_part(part=part, seen=part.revision)
    frozen(Report.objects.get(), lead)
    part.refresh_from_db()
    assert part.snapshot is not None
    assert [curve["name"] for curve in part.snapshot["result"]["curves"]] == ["Parabolic floor"]
    assert "Flat floor" not in str(part.snapshot)
    assert "of 2 judged" in part.finding


def test_freezing_asks_for_both_papers(lead: User, draft: Report) -> None:
    frozen(draft, lead)
    assert set(Printing.objects.values_list("paper", flat=True)) == set(Paper)


def test_what_leads_do_is_in_the_log_and_drafts_are_not_named_there(lead: User, draft: Report) -> None:
    other = start_report(user=lead, collaboration=draft.collaboration, title="Given up")
    discard_report(user=lead, report=other, seen=other.revision)
    frozen(draft, lead)
    told = {entry.deed: entry.about for entry in LogEntry.objects.all()}
    assert set(told) == {
        deed.name.lower() for deed in (Deed.WROTE_REPORT, Deed.DISCARDED_REPORT, Deed.FROZE_REPORT)
    }
    assert told["froze_report"] == "The floor"
    assert told["discarded_report"].startswith("draft ")


def test_a_later_version_takes_words_and_parts_and_points_back(
    lead: User, draft: Report, signed_in: SignedIn, client: Client
) -> None:
    frozen(draft, lead)
    later = start_later_version(user=lead, report=draft)
    assert (later.previous, later.words, later.is_frozen) == (draft, draft.words, False)
    assert later.parts.get().assessment == draft.parts.get().assessment
    frozen(later, lead)
    page = signed_in(lead).get(later.get_absolute_url()).content.decode()
    assert f'continues <a href="{draft.get_absolute_url()}">“The floor”</a>' in page
    assert "There is a later version" in signed_in(lead).get(draft.get_absolute_url()).content.decode()
    for report, said in (
        (later, "continues “The floor” of"),
        (draft, "There is a later version of this report"),
    ):
        secret = create_link(user=lead, report=report, label="", expires_at=None).secret
        shared = client.get(f"/r/{secret}/").content.decode()
        assert said in shared
        assert "/reports/" not in shared


def test_a_part_can_be_replaced_by_the_newest_assessment_of_the_newest_release(
    lead: User, draft: Report, done: Assessment, release: Release, signed_in: SignedIn
) -> None:
    release.pk, release.number = None, 2
    release.save()
    newer = Assessment.objects.create(
        release=release,
        settings=done.settings,
        seed=1,
        fingerprint="e" * 64,
        requested_by=lead,
        status=Assessment.Status.DONE,
        result=done.result,
        detail=done.detail,
    )
    client = signed_in(lead)
    page = client.get(draft.get_absolute_url()).content.decode()
    assert f"Replace by assessment {newer.pk}, release 2" in page
    part = draft.parts.get()
    client.post(f"/report-parts/{part.pk}/renew", {"seen": draft.revision})
    assert draft.parts.get().assessment == newer
    assert "Replace by" not in client.get(draft.get_absolute_url()).content.decode()


@pytest.mark.django_db(transaction=True)
def test_who_edits_a_part_while_it_is_frozen_is_told_and_changes_nothing(
    lead: User, draft: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    part = draft.parts.get()
    part.words = "Too late."
    with meanwhile(monkeypatch, FREEZING, "snapshot_of", lambda: edit_part(part=part, seen=0)) as refusals:
        frozen(draft, lead)
    assert refusals == ["report-frozen"]
    assert draft.parts.get().words == ""


def test_who_edits_a_part_that_is_taken_out_meanwhile_is_told(lead: User, draft: Report) -> None:
    part = draft.parts.get()
    remove_part(part=draft.parts.get(), seen=draft.revision)
    with pytest.raises(UserError) as refused:
        edit_part(part=part, seen=0)
    assert refused.value.code == "part-removed"


@pytest.mark.django_db(transaction=True)
def test_of_two_who_freeze_at_once_one_does(
    lead: User, draft: Report, monkeypatch: pytest.MonkeyPatch
) -> None:
    seen = draft.revision

    def also() -> None:
        freeze_report(user=lead, report=Report.objects.get(), seen=seen)

    with meanwhile(monkeypatch, FREEZING, "snapshot_of", also) as refusals:
        frozen(draft, lead)
    assert refusals == ["report-frozen"]
    assert LogEntry.objects.filter(deed="froze_report").count() == 1
    assert Printing.objects.count() == len(Paper)
