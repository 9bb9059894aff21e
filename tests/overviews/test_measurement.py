"""Data, survivors and history, on the page of a measurement."""

from collections.abc import Callable

from django.test import Client

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve
from fits.overviews.measurement import measurement_page
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


def test_the_newest_release_is_drawn_with_a_table_behind_it(
    signed_in: SignedIn, member: User, release: Release
) -> None:
    answer = signed_in(member).get(release.measurement.get_absolute_url())
    points, page = answer.context["figure"]["data"][0], answer.content.decode()
    assert len(points["x"]) == release.points
    assert 'data-figure="figure-data"' in page
    assert "<summary>The numbers</summary>" in page


def test_survivors_stand_by_rank_with_their_numbers(
    signed_in: SignedIn, member: User, make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4, rival: 1 / 2001})
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    assert "1 of 2 curves stays inside the 95&nbsp;% set of release 1" in page
    assert page.index("Parabolic floor</a> <a") < page.index("Flat floor</a> <a")
    assert "0.250" in page
    assert "&lt; 0.0005" in page


def test_inside_but_off_is_explained_where_it_stands(
    signed_in: SignedIn, member: User, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4}, scale_p_value=0.01)
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    assert "the scale set rejects it" in page


def test_the_history_runs_from_the_oldest_release_to_the_newest(
    make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.3})
    make.release(release.measurement, 2)
    make.assessment(make.release(release.measurement, 3), {rival: 0.2, curve: 0.001})
    first, second = measurement_page(release.measurement, make.lead, with_drafts=False).histories
    assert [first.theory_name, second.theory_name] == ["Flat floor", "Parabolic floor"]
    assert [standing and standing.word for standing in second.standings] == ["inside", None, "outside"]


def test_a_theory_that_dropped_out_stays_in_the_history_after_the_others(
    make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.3})
    make.assessment(make.release(release.measurement, 2), {rival: 0.2})
    names = [
        row.theory_name
        for row in measurement_page(release.measurement, make.lead, with_drafts=False).histories
    ]
    assert names == ["Flat floor", "Parabolic floor"]


def test_curves_that_were_not_judged_are_named(
    make: Maker, release: Release, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4})
    make.curve(curve.theory, curve.measurement, 2)
    unjudged = measurement_page(release.measurement, make.lead, with_drafts=False).unjudged
    assert [(row.theory_name, row.version) for row in unjudged] == [("Flat floor", 1), ("Parabolic floor", 2)]


def test_releases_stand_newest_first_with_note_and_file(
    signed_in: SignedIn, member: User, make: Maker, release: Release
) -> None:
    make.release(release.measurement, 2)
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    listed = page[page.index('id="releases"') :]
    assert listed.index("release 2") < listed.index("release 1")
    assert "note 2" in listed
    assert "merrow-2.csv" in listed


def test_a_running_assessment_shows_how_far_it_is(
    signed_in: SignedIn, member: User, make: Maker, release: Release
) -> None:
    running = make.assessment(release, {}, status="running")
    type(running).objects.filter(pk=running.pk).update(progress=0.5, stage="judging")
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    assert 'value="0.5"' in page
    assert "judging each curve" in page


def test_a_failed_assessment_says_why(
    signed_in: SignedIn, member: User, make: Maker, release: Release
) -> None:
    failed = make.assessment(release, {}, status="failed")
    type(failed).objects.filter(pk=failed.pk).update(failure="The curve ends before the data")
    page = signed_in(member).get(release.measurement.get_absolute_url()).content.decode()
    assert "The curve ends before the data" in page


def test_a_measurement_without_a_release_says_so(
    signed_in: SignedIn, member: User, measurement: Measurement
) -> None:
    page = signed_in(member).get(measurement.get_absolute_url()).content.decode()
    assert "No release is published yet." in page
