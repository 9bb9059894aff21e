"""Features on the pages of results and reports: who sees, asks and cancels what."""

import csv
import io
import json
from collections.abc import Callable
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from core.people.models import User
from fits.assessments.features_document import contract_of
from fits.assessments.models import Assessment, FeaturePart, FeatureSearch
from fits.reports import page as result_pages
from fits.reports.models import Report
from fits.reports.services import create_link, create_report, freeze_report
from fits.reports.snapshot import Snapshot
from tests.reports.searches import running_search, stored_search

SignedIn = Callable[[User], Client]
FILES = ("features.json", "peaks.csv", "plots.json")


@pytest.fixture
def search(done: Assessment, featured: Snapshot, member: User) -> FeatureSearch:
    """What was found, in the fit's own windows."""
    assert featured.features is not None
    return stored_search(done, featured.features, member)


@pytest.fixture
def running(done: Assessment, featured: Snapshot, member: User) -> FeatureSearch:
    """A search under way."""
    assert featured.features is not None
    return running_search(done, featured.features, member)


@pytest.fixture
def frozen(lead: User, done: Assessment, search: FeatureSearch) -> Report:
    """A report with features."""
    return create_report(user=lead, assessment=done, title="With peaks", words="", search=search)


def ask_address(done: Assessment) -> str:
    return reverse("reports:ask_features", args=[done.pk])


def text_of(client: Client, address: str, **query: str) -> str:
    return client.get(address, query).content.decode()


def test_a_member_reads_the_features_between_ball_and_trust(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch
) -> None:
    page = text_of(signed_in(member), done.get_absolute_url())
    parts = ["part-ball", "part-features", "part-trust"]
    assert [page.index(part) for part in parts] == sorted(page.index(part) for part in parts)
    for said in ("the data demand at least 3 peaks", "Peak 3", "evenly spaced", "Dip 1"):
        assert said in page
    assert "a cloud of samples is not the answer" in page


def test_each_level_has_its_sentences_and_one_shows(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch
) -> None:
    page = text_of(signed_in(member), done.get_absolute_url(), level="0.9")
    assert '<p data-level="0.9">At 90\xa0% the data demand' in page
    assert '<p data-level="0.95" hidden>At 95\xa0% the data demand' in page


def test_without_a_search_a_member_is_offered_one(
    signed_in: SignedIn, member: User, done: Assessment
) -> None:
    page = text_of(signed_in(member), done.get_absolute_url())
    assert "No peaks or dips were sought so far" in page
    assert ask_address(done) in page


def test_a_report_without_features_says_nothing_of_them(
    signed_in: SignedIn, member: User, report: Report
) -> None:
    assert "part-features" not in text_of(signed_in(member), report.get_absolute_url())


def test_a_report_keeps_the_features(
    signed_in: SignedIn, member: User, frozen: Report, search: FeatureSearch
) -> None:
    search.delete()
    page = text_of(signed_in(member), frozen.get_absolute_url())
    assert "the data demand at least 3 peaks" in page
    assert "Seek in other windows" not in page


def test_whoever_holds_the_link_sees_them(client: Client, lead: User, frozen: Report) -> None:
    secret = create_link(user=lead, report=frozen, label="", expires_at=None).secret
    assert "the data demand at least 3 peaks" in text_of(client, reverse("reports:shared", args=[secret]))
    for name in FILES:
        assert client.get(reverse("reports:shared_features", args=[secret, name])).status_code == 200


@pytest.mark.parametrize("kind", ["assessment", "report"])
def test_a_member_gets_the_files(
    signed_in: SignedIn, member: User, done: Assessment, frozen: Report, featured: Snapshot, kind: str
) -> None:
    key = done.pk if kind == "assessment" else frozen.pk
    document, table, plots = (
        signed_in(member).get(reverse(f"reports:{kind}_features", args=[key, name])) for name in FILES
    )
    assert featured.features is not None
    found = json.loads(document.content)
    assert found["peaks"] == contract_of(featured.features)["peaks"]
    assert set(found) == {"schema", "radii", "peaks", "count", "spacing"}
    rows = list(csv.DictReader(io.StringIO(table.content.decode())))
    assert {(row["feature"], row["number"]) for row in rows} >= {("peak", "1"), ("peak", "3"), ("dip", "2")}
    assert float(rows[0]["location_low"]) == found["peaks"][0]["location"]["0.67"][0][0]
    assert set(json.loads(plots.content)) >= {"regions", "ladder", "spacing"}


@pytest.mark.parametrize("name", ["regions", "ladder", "neighbours"])
@pytest.mark.parametrize("form", ["svg", "csv"])
def test_charts_have_the_same_address_as_the_others(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch, name: str, form: str
) -> None:
    answer = signed_in(member).get(reverse("reports:assessment_chart", args=[done.pk, name, form]))
    assert answer.status_code == 200
    assert answer.content


def test_an_unknown_file_and_features_that_are_not_there_are_not_found(
    signed_in: SignedIn, member: User, done: Assessment, report: Report
) -> None:
    client = signed_in(member)
    for name in ("nothing.json", "features.json"):
        assert client.get(reverse("reports:assessment_features", args=[done.pk, name])).status_code == 404
        assert client.get(reverse("reports:report_features", args=[report.pk, name])).status_code == 404


def test_strangers_and_visitors_see_and_do_nothing(
    signed_in: SignedIn,
    stranger: User,
    client: Client,
    done: Assessment,
    running: FeatureSearch,
    frozen: Report,
) -> None:
    for name, key in (("assessment_features", done.pk), ("report_features", frozen.pk)):
        address = reverse(f"reports:{name}", args=[key, "features.json"])
        assert signed_in(stranger).get(address).status_code == 404
        assert client.get(address).url.startswith(reverse("account_login"))  # type: ignore[attr-defined]
    progress = reverse("reports:features_progress", args=[done.pk])
    assert signed_in(stranger).get(progress).status_code == 404
    for address in (ask_address(done), reverse("reports:cancel_features", args=[done.pk])):
        assert signed_in(stranger).post(address).status_code == 404
        assert client.post(address).url.startswith(reverse("account_login"))  # type: ignore[attr-defined]
    running.refresh_from_db()
    assert running.status == FeatureSearch.Status.RUNNING


def test_a_member_asks_for_windows(signed_in: SignedIn, member: User, done: Assessment) -> None:
    answer = signed_in(member).post(ask_address(done), {"windows": "0.9 to 2.1\n2.4:3.8\n"})
    search = FeatureSearch.objects.get()
    assert search.windows == [[0.9, 2.1], [2.4, 3.8]]
    assert search.requested_by == member
    assert answer.url == f"{done.get_absolute_url()}?search={search.pk}#part-features"  # type: ignore[attr-defined]


def test_a_lead_asks_for_the_fit_s_own_windows(signed_in: SignedIn, lead: User, done: Assessment) -> None:
    signed_in(lead).post(ask_address(done), {"windows": ""})
    assert FeatureSearch.objects.get().windows == []


@pytest.mark.parametrize(
    ("windows", "fault"),
    [
        ("0.9 to 2.1\nabc", "Line 2: “abc” is not two numbers with “to” between them."),
        ("1 to 2 to 3", "Line 1: “1 to 2 to 3” is not two numbers"),
        ("nan to 2", "Line 1: “nan to 2” is not two numbers"),
        ("2.1 to 0.9", "reversed"),
        ("0.9 to 99", "outside the data"),
        ("1.0 to 1.0001", "grid points"),
    ],
)
def test_bad_windows_are_named_and_nothing_is_kept(
    signed_in: SignedIn, member: User, done: Assessment, windows: str, fault: str
) -> None:
    page = signed_in(member).post(ask_address(done), {"windows": windows}).content.decode()
    assert fault in page
    assert windows in page
    assert '<details class="windows" open>' in page
    assert not FeatureSearch.objects.exists()


def test_a_search_under_way_shows_its_parts_failures_and_what_is_known(
    signed_in: SignedIn, member: User, done: Assessment, running: FeatureSearch
) -> None:
    part = signed_in(member).get(reverse("reports:features_progress", args=[done.pk]))
    text = part.content.decode()
    done_parts = running.parts.filter(status=FeaturePart.Status.DONE).count()
    assert f"{done_parts} of {running.parts.count()} parts done" in text
    assert "The number of dips could not be computed: An error of ours, recorded as a1b2c3." in text
    assert "the data demand at least 3 peaks" in text
    assert 'hx-trigger="every 2s"' in text
    assert "HX-Refresh" not in part


def test_once_it_has_ended_the_whole_page_is_fetched(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch
) -> None:
    part = signed_in(member).get(reverse("reports:features_progress", args=[done.pk]))
    assert part["HX-Refresh"] == "true"
    assert "hx-get" not in part.content.decode()


def test_a_member_cancels_a_search(
    signed_in: SignedIn, member: User, done: Assessment, running: FeatureSearch
) -> None:
    page = text_of(signed_in(member), done.get_absolute_url())
    address = reverse("reports:cancel_features", args=[done.pk])
    assert address in page
    assert signed_in(member).post(address).status_code == 302
    running.refresh_from_db()
    assert running.status == FeatureSearch.Status.CANCELLED


def test_failures_stay_on_the_page_of_the_result(
    signed_in: SignedIn, member: User, done: Assessment, running: FeatureSearch
) -> None:
    FeatureSearch.objects.update(status=FeatureSearch.Status.FAILED)
    page = text_of(signed_in(member), done.get_absolute_url())
    assert "recorded as a1b2c3" in page
    assert "How many dips the data demand was not computed." in page


def test_an_earlier_search_can_be_looked_at(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch, featured: Snapshot
) -> None:
    assert featured.features is not None
    found = {**featured.features, "peaks": featured.features["peaks"][:1]}
    later = stored_search(done, found, member, mark="t", windows=[[0.5, 1.2]])
    client = signed_in(member)
    newest = text_of(client, done.get_absolute_url())
    assert "Peak 3" not in newest
    assert f"?search={search.pk}#part-features" in newest
    earlier = text_of(client, done.get_absolute_url(), search=str(search.pk))
    assert "Peak 3" in earlier
    assert f"search={search.pk}" in earlier
    assert f"?search={later.pk}#part-features" in earlier
    chart = reverse("reports:assessment_chart", args=[done.pk, "peak_prices", "csv"])
    assert b"peak 3" not in client.get(chart).content
    assert b"peak 3" in client.get(chart, {"search": search.pk}).content


def test_a_report_freezes_the_search_that_was_shown(
    signed_in: SignedIn, lead: User, done: Assessment, search: FeatureSearch, running: FeatureSearch
) -> None:
    client = signed_in(lead)
    assert "is under way" in text_of(client, reverse("reports:new", args=[done.pk]))
    client.post(reverse("reports:new", args=[done.pk]), {"title": "A finding"})
    report = Report.objects.get()
    freeze_report(user=lead, report=report, seen=report.revision)
    frozen = (report.parts.get().snapshot or {})["features"]
    assert len(frozen["peaks"]) == 3
    assert frozen["complete"] is True


def test_large_charts_are_left_to_be_fetched(
    signed_in: SignedIn,
    member: User,
    done: Assessment,
    search: FeatureSearch,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(result_pages, "LARGEST_INLINE", 1000)
    page = text_of(signed_in(member), done.get_absolute_url())
    address = reverse("reports:assessment_features", args=[done.pk, "plots.json"])
    assert f'data-plots="{address}?search={search.pk}"' in page
    assert '<script id="feature-plots" type="application/json">{}</script>' in page


def test_no_inline_script_or_style_is_on_the_page(
    signed_in: SignedIn, member: User, done: Assessment, search: FeatureSearch, running: FeatureSearch
) -> None:
    page = text_of(signed_in(member), done.get_absolute_url())
    assert "<style" not in page
    assert " style=" not in page
    assert page.count("<script") == page.count("<script src=") + page.count('type="application/json"')


def test_queries_do_not_grow_with_parts_or_searches(
    signed_in: SignedIn,
    member: User,
    done: Assessment,
    search: FeatureSearch,
    featured: Snapshot,
    django_assert_num_queries: Any,
    django_assert_max_num_queries: Any,
) -> None:
    assert featured.features is not None
    client = signed_in(member)
    with django_assert_max_num_queries(18) as counted:
        client.get(done.get_absolute_url())
    more = {**featured.features, "peaks": 3 * featured.features["peaks"]}
    for mark in "tu":
        stored_search(done, more, member, mark=mark)
    with django_assert_num_queries(len(counted.captured_queries)):
        client.get(done.get_absolute_url())
