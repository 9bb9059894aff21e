"""Writing a report: who may, what the pages do, and that two who write at once lose nothing."""

from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from core.people.models import Collaboration, Membership, Role, User
from fits.assessments.models import Assessment
from fits.reports.draft_forms import MOST_CHARACTERS
from fits.reports.models import Report, ReportPart
from fits.reports.services import add_part, edit_part, start_report

SignedIn = Callable[[User], Client]


@pytest.fixture
def draft(lead: User, collaboration: Collaboration, done: Assessment) -> Report:
    return start_report(user=lead, collaboration=collaboration, title="The floor", assessment=done)


@pytest.fixture
def second_lead(collaboration: Collaboration) -> User:
    user = User.objects.create_user("second@merrow.example", name="Sol Second")
    Membership.objects.create(user=user, collaboration=collaboration, role=Role.LEAD)
    return user


def post(client: Client, route: str, pk: int, **data: Any) -> Any:
    return client.post(reverse(f"reports:{route}", args=[pk]), data)


def text(client: Client, route: str, pk: int, **query: Any) -> str:
    answer = client.get(reverse(f"reports:{route}", args=[pk]), query)
    assert answer.status_code == 200
    return str(answer.content.decode())


def headings(report: Report) -> list[str]:
    return list(report.parts.values_list("heading", flat=True))


def test_a_draft_is_there_for_leads_alone(
    signed_in: SignedIn, second_lead: User, member: User, stranger: User, draft: Report
) -> None:
    assert signed_in(second_lead).get(draft.get_absolute_url()).status_code == 200
    files = [reverse("reports:report_csv", args=[draft.pk]), reverse("reports:print", args=[draft.pk, "a4"])]
    for address in (draft.get_absolute_url(), *files):
        for user in (member, stranger):
            assert signed_in(user).get(address).status_code == 404


def test_a_student_reads_no_report(signed_in: SignedIn, collaboration: Collaboration, report: Report) -> None:
    student = User.objects.create_user("student@merrow.example")
    Membership.objects.create(user=student, collaboration=collaboration, role=Role.STUDENT)
    assert signed_in(student).get(report.get_absolute_url()).status_code == 403


def test_the_list_shows_drafts_to_leads_and_frozen_ones_to_readers(
    signed_in: SignedIn, lead: User, member: User, draft: Report, report: Report
) -> None:
    of_lead = text(signed_in(lead), "reports", draft.collaboration_id)
    of_member = text(signed_in(member), "reports", draft.collaboration_id)
    assert "The floor" in of_lead
    assert report.title in of_lead
    assert report.title in of_member
    assert "The floor" not in of_member


def test_the_page_of_an_assessment_names_its_drafts_to_leads_alone(
    signed_in: SignedIn, lead: User, member: User, done: Assessment, draft: Report
) -> None:
    assert draft.get_absolute_url() in text(signed_in(lead), "assessment", done.pk)
    assert draft.get_absolute_url() not in text(signed_in(member), "assessment", done.pk)


def test_an_empty_draft_is_begun_from_the_collaboration(
    signed_in: SignedIn, lead: User, member: User, collaboration: Collaboration
) -> None:
    assert post(signed_in(member), "new_draft", collaboration.pk, title="No").status_code == 403
    answer = post(signed_in(lead), "new_draft", collaboration.pk, title="A start")
    report = Report.objects.get()
    assert answer.url == report.get_absolute_url()
    assert not report.parts.exists()


def test_an_assessment_is_taken_into_a_draft_that_is_there(
    signed_in: SignedIn, lead: User, draft: Report, done: Assessment
) -> None:
    assert "The floor" in text(signed_in(lead), "new", done.pk)
    post(signed_in(lead), "new", done.pk, into=draft.pk)
    assert Report.objects.count() == 1
    assert draft.parts.count() == 2


def test_a_new_report_needs_a_title(signed_in: SignedIn, lead: User, done: Assessment) -> None:
    assert "needs a title" in post(signed_in(lead), "new", done.pk, title="").content.decode()
    assert not Report.objects.exists()


def test_parts_are_added_written_moved_and_removed(
    signed_in: SignedIn, lead: User, draft: Report, done: Assessment
) -> None:
    client = signed_in(lead)
    answer = post(client, "add_part", draft.pk, seen=draft.revision)
    words = draft.parts.get(assessment=None)
    assert answer.url == reverse("reports:part", args=[words.pk])
    post(client, "part", words.pk, heading="Before", words="*First.*", revision=0)
    draft.refresh_from_db()
    post(client, "add_part", draft.pk, seen=draft.revision, assessment=done.pk)
    assert headings(draft) == ["", "Before", ""]
    draft.refresh_from_db()
    post(client, "move_part", words.pk, seen=draft.revision, to="up")
    assert headings(draft) == ["Before", "", ""]
    draft.refresh_from_db()
    post(client, "move_part", words.pk, seen=draft.revision, to="up")
    assert headings(draft) == ["Before", "", ""]
    draft.refresh_from_db()
    post(client, "remove_part", words.pk, seen=draft.revision)
    assert headings(draft) == ["", ""]


@pytest.mark.parametrize("route", ["words", "part"])
def test_words_that_would_take_long_to_read_are_refused(
    signed_in: SignedIn, lead: User, draft: Report, route: str
) -> None:
    row = draft if route == "words" else draft.parts.get()
    words = "[" * (MOST_CHARACTERS + 1)
    page = post(signed_in(lead), route, row.pk, title="The floor", words=words, revision=row.revision)
    assert "at most 50000 characters" in page.content.decode()
    row.refresh_from_db()
    assert row.words == ""


def test_the_preview_shows_what_would_be_frozen(signed_in: SignedIn, lead: User, draft: Report) -> None:
    words = add_part(report=draft, seen=draft.revision)
    words.words = "<b>plain</b> *clear*"
    edit_part(part=words, seen=0)
    first = text(signed_in(lead), "preview", draft.pk)
    assert "Surface seiche power, release 1" in first
    assert "part-ranking" in first
    second = text(signed_in(lead), "preview", draft.pk, part=2)
    assert "&lt;b&gt;plain&lt;/b&gt; <em>clear</em>" in second
    assert "part-ranking" not in second


def test_an_empty_draft_has_a_preview(signed_in: SignedIn, lead: User, collaboration: Collaboration) -> None:
    report = start_report(user=lead, collaboration=collaboration, title="Empty")
    assert "Empty" in text(signed_in(lead), "preview", report.pk)


def with_two_theories(assessment: Assessment) -> None:
    assert assessment.result is not None
    one = assessment.result["curves"][0]
    assessment.result["curves"] = [one, one | {"name": "Flat floor", "rank": 2}]
    assert assessment.detail is not None
    drawn = assessment.detail["curves"][0]
    assessment.detail["curves"] = [drawn, drawn | {"name": "Flat floor"}]
    assessment.save()


def test_theories_are_chosen_by_checkboxes(
    signed_in: SignedIn, lead: User, draft: Report, done: Assessment
) -> None:
    with_two_theories(done)
    part = draft.parts.get()
    page = text(signed_in(lead), "part", part.pk)
    assert page.count('type="checkbox" name="shown"') == 2
    assert page.count("checked") == 2
    none = post(signed_in(lead), "part", part.pk, revision=0)
    assert "Show at least one" in none.content.decode()
    post(signed_in(lead), "part", part.pk, revision=0, shown=["Flat floor"])
    assert draft.parts.get().shown == ["Flat floor"]
    preview = text(signed_in(lead), "preview", draft.pk)
    assert "1 of the 2" in preview
    assert "Parabolic floor" not in preview
    files = [reverse(f"reports:report_{kind}", args=[draft.pk]) for kind in ("json", "csv")]
    files.append(reverse("reports:report_chart", args=[draft.pk, "curves", "csv"]))
    for address in files:
        assert b"Parabolic floor" not in signed_in(lead).get(address).content
    post(signed_in(lead), "part", part.pk, revision=1, shown=["Flat floor", "Parabolic floor"])
    assert draft.parts.get().shown is None


def test_two_leads_who_write_the_opening_words_at_once_lose_nothing(
    signed_in: SignedIn, lead: User, second_lead: User, draft: Report
) -> None:
    first, second = signed_in(lead), signed_in(second_lead)
    seen = [
        client.get(reverse("reports:words", args=[draft.pk])).context["form"]["revision"].value()
        for client in (first, second)
    ]
    post(first, "words", draft.pk, title="The floor", words="Of the first.", revision=seen[0])
    answer = post(second, "words", draft.pk, title="The floor", words="Of the second.", revision=seen[1])
    page = answer.content.decode()
    assert "somebody else has changed this" in page.lower()
    assert "Of the first." in page
    assert "Of the second." in page
    draft.refresh_from_db()
    assert draft.words == "Of the first."
    again = answer.context["form"]["revision"].value()
    post(second, "words", draft.pk, title="The floor", words="Of both.", revision=again)
    draft.refresh_from_db()
    assert draft.words == "Of both."


def test_two_leads_who_write_one_part_at_once_lose_nothing(
    signed_in: SignedIn, lead: User, second_lead: User, draft: Report
) -> None:
    part = draft.parts.get()
    post(signed_in(lead), "part", part.pk, heading="First", words="", revision=0)
    page = post(
        signed_in(second_lead), "part", part.pk, heading="Second", words="", revision=0
    ).content.decode()
    assert "Now stands here: “First”." in page
    assert 'value="Second"' in page
    assert draft.parts.get().heading == "First"


def test_two_leads_can_write_two_parts_at_once(
    signed_in: SignedIn, lead: User, second_lead: User, draft: Report
) -> None:
    add_part(report=draft, seen=draft.revision)
    one, two = draft.parts.all()
    post(signed_in(lead), "part", one.pk, heading="One", words="", revision=0)
    post(signed_in(second_lead), "part", two.pk, heading="Two", words="", revision=0)
    assert headings(draft) == ["One", "Two"]


@pytest.mark.parametrize("route", ["freeze", "discard", "add_part"])
def test_who_saw_an_older_draft_changes_nothing_by_a_button(
    signed_in: SignedIn, lead: User, second_lead: User, draft: Report, route: str
) -> None:
    seen = draft.revision
    part = draft.parts.get()
    post(signed_in(lead), "part", part.pk, heading="Changed meanwhile", words="", revision=0)
    answer = post(signed_in(second_lead), route, draft.pk, seen=seen)
    assert answer.status_code == 400
    assert not Report.objects.get().is_frozen
    assert ReportPart.objects.count() == 1


def test_a_discarded_draft_is_gone(signed_in: SignedIn, lead: User, draft: Report) -> None:
    post(signed_in(lead), "discard", draft.pk, seen=draft.revision)
    assert not Report.objects.exists()
