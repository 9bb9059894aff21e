"""Pages of results and reports: who sees what, and what is on them."""

import json
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from core.people.models import User
from core.theories.models import Curve, Theory
from fits.assessments import pipeline
from fits.assessments.models import Assessment
from fits.reports.models import Report

SignedIn = Callable[[User], Client]


def files_of(kind: str, key: int | str) -> list[str]:
    return [
        reverse(f"reports:{kind}_chart", args=[key, "curves", "svg"]),
        reverse(f"reports:{kind}_chart", args=[key, "ball", "csv"]),
        reverse(f"reports:{kind}_json", args=[key]),
        reverse(f"reports:{kind}_csv", args=[key]),
    ]


def test_a_member_reads_the_result_in_order(signed_in: SignedIn, member: User, done: Assessment) -> None:
    page = signed_in(member).get(done.get_absolute_url()).content.decode()
    parts = [
        "The one theory",
        "part-curves",
        "part-ranking",
        "part-ball",
        "part-trust",
        "part-meaning",
        "part-origin",
    ]
    assert [page.index(part) for part in parts] == sorted(page.index(part) for part in parts)
    assert "Parabolic floor" in page
    assert done.release.file_sha256 in page
    assert f"recompute {done.pk}" in page


def test_each_level_has_its_finding_and_one_shows(
    signed_in: SignedIn, member: User, done: Assessment
) -> None:
    page = signed_in(member).get(done.get_absolute_url(), {"level": "0.9"}).content.decode()
    assert '<p class="finding" data-level="0.9">' in page
    assert '<p class="finding" data-level="0.95" hidden>' in page


def test_strangers_and_visitors_see_nothing(
    signed_in: SignedIn, stranger: User, done: Assessment, report: Report, client: Client
) -> None:
    addresses = [done.get_absolute_url(), report.get_absolute_url()]
    addresses += files_of("assessment", done.pk) + files_of("report", report.pk)
    for address in addresses:
        assert signed_in(stranger).get(address).status_code == 404
        assert client.get(address).url.startswith(reverse("account_login"))  # type: ignore[attr-defined]


@pytest.mark.parametrize("kind", ["assessment", "report"])
def test_a_member_gets_the_files(
    signed_in: SignedIn, member: User, done: Assessment, report: Report, kind: str
) -> None:
    key = done.pk if kind == "assessment" else report.pk
    drawing, table, result, ranking = (signed_in(member).get(address) for address in files_of(kind, key))
    assert drawing["Content-Type"].startswith("image/svg+xml")
    assert table["Content-Disposition"] == 'attachment; filename="ball.csv"'
    assert json.loads(result.content) == done.result
    assert b"Parabolic floor" in ranking.content


def test_an_unknown_chart_or_form_is_not_found(signed_in: SignedIn, member: User, done: Assessment) -> None:
    client = signed_in(member)
    for name, form in (("nothing", "svg"), ("curves", "exe")):
        address = reverse("reports:assessment_chart", args=[done.pk, name, form])
        assert client.get(address).status_code == 404


def test_no_inline_script_or_style_is_on_the_page(
    signed_in: SignedIn, member: User, done: Assessment
) -> None:
    page = signed_in(member).get(done.get_absolute_url()).content.decode()
    assert "<style" not in page
    assert " style=" not in page
    assert page.count("<script") == page.count("<script src=") + page.count('type="application/json"')


def test_queries_do_not_grow_with_curves(
    signed_in: SignedIn,
    member: User,
    done: Assessment,
    curve: Curve,
    django_assert_num_queries: Any,
    django_assert_max_num_queries: Any,
) -> None:
    client = signed_in(member)
    with django_assert_max_num_queries(16) as counted:
        client.get(done.get_absolute_url())
    for number in range(3):
        theory = Theory.objects.create(
            collaboration=curve.theory.collaboration, name=f"Variant {number}", submitted_by=member
        )
        fields = (
            "measurement",
            "table",
            "file_name",
            "file_sha256",
            "points",
            "x_min",
            "x_max",
            "submitted_at",
        )
        values = {field: getattr(curve, field) for field in fields}
        more = Curve.objects.create(
            theory=theory, version=1, state=Curve.State.SUBMITTED, submitted_by=member, **values
        )
        done.curves.add(more)
    outcome = pipeline.compute(done, lambda stage, share: None)
    done.result, done.detail = outcome.result, outcome.detail
    done.save()
    with django_assert_num_queries(len(counted.captured_queries)):
        client.get(done.get_absolute_url())


def test_a_lead_takes_an_assessment_into_a_report_and_freezes_it(
    signed_in: SignedIn, lead: User, done: Assessment
) -> None:
    client = signed_in(lead)
    answer = client.post(reverse("reports:new", args=[done.pk]), {"title": "A finding"})
    draft = Report.objects.get()
    assert answer.url == draft.get_absolute_url()  # type: ignore[attr-defined]
    assert not draft.is_frozen
    client.post(reverse("reports:freeze", args=[draft.pk]), {"seen": draft.revision})
    report = Report.objects.get()
    assert report.is_frozen
    snapshot = report.parts.get().snapshot
    assert snapshot is not None
    assert snapshot["result"] == done.result
    assert snapshot["context"]["release"]["number"] == 1


def test_a_member_may_not_write_a_report(signed_in: SignedIn, member: User, done: Assessment) -> None:
    assert signed_in(member).get(reverse("reports:new", args=[done.pk])).status_code == 403


def test_a_report_outlives_its_assessment(
    signed_in: SignedIn, member: User, report: Report, done: Assessment
) -> None:
    done.delete()
    page = signed_in(member).get(report.get_absolute_url())
    assert b"What the first release says" in page.content


def test_an_assessment_without_result_cannot_be_reported(
    signed_in: SignedIn, lead: User, done: Assessment
) -> None:
    Assessment.objects.update(status=Assessment.Status.RUNNING)
    answer = signed_in(lead).post(reverse("reports:new", args=[done.pk]), {"title": "Too early"})
    assert answer.status_code == 400
    assert not Report.objects.exists()
