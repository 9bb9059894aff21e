"""Pairs that cannot both be inside, and the measurement that tells two theories apart best."""

from collections.abc import Callable

import pytest
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.overviews import pairs
from fits.overviews.pairs import MOST_SHOWN, pairs_page
from fits.overviews.separation import separation_page
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


@pytest.fixture
def third(make: Maker, measurement: Measurement) -> Curve:
    return make.curve(make.theory("Triangular floor"), measurement)


@pytest.fixture
def judged(make: Maker, release: Release, curve: Curve, rival: Curve, third: Curve) -> None:
    """A ball of radius 0.5; the curves are 1.2, 0.9 and 1.5 apart: first–second, first–third, second–third."""
    make.assessment(release, {curve: 0.4, rival: 0.3, third: 0.01}, radius=0.5, apart=[1.2, 0.9, 1.5])


@pytest.mark.usefixtures("judged")
def test_pairs_farther_apart_than_the_ball_is_wide_are_counted_and_listed(
    measurement: Measurement, lead: User
) -> None:
    page = pairs_page(measurement, lead)
    assert (page.pairs, page.apart) == (3, 2)
    assert [(pair.first.theory_name, pair.second.theory_name, pair.distance) for pair in page.shown] == [
        ("Flat floor", "Triangular floor", 1.5),
        ("Parabolic floor", "Flat floor", 1.2),
    ]
    assert page.shown[0].ratio_written == "1.50"


@pytest.mark.usefixtures("judged")
def test_the_pairs_of_one_theory_can_be_asked_for(measurement: Measurement, lead: User, curve: Curve) -> None:
    page = pairs_page(measurement, lead, str(curve.theory_id))
    assert (page.apart, page.matching) == (2, 1)
    assert [pair.second.theory_name for pair in page.shown] == ["Flat floor"]


def test_of_very_many_pairs_the_largest_are_listed(make: Maker, release: Release) -> None:
    curves = [make.curve(make.theory(f"Theory {number}"), release.measurement) for number in range(15)]
    make.assessment(
        release, dict.fromkeys(curves, 0.4), radius=0.5, apart=[2.0 + number for number in range(105)]
    )
    page = pairs_page(release.measurement, make.lead)
    assert (page.pairs, page.apart, len(page.shown)) == (105, 105, MOST_SHOWN)
    assert page.shown[0].distance == 106.0
    assert {page.shown[0].first.theory_name, page.shown[0].second.theory_name} == {"Theory 13", "Theory 14"}


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"apart": None}, "kept no distances between curves: assess again to see pairs."),
        ({"apart": [1.0], "radius": None}, "did not ask for the 95&nbsp;% level"),
        ({"apart": [1.0], "radius": 0.0}, "ball of release 1 is empty"),
        ({"apart": [1.2]}, "1 of 1 pair of curves cannot both be inside"),
        ({"apart": [0.2]}, "0 of 1 pair of curves cannot both be inside"),
    ],
)
def test_the_page_says_what_is_known(
    signed_in: SignedIn,
    member: User,
    make: Maker,
    release: Release,
    curve: Curve,
    rival: Curve,
    options: dict[str, list[float] | float | None],
    words: str,
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.3}, **options)  # type: ignore[arg-type]
    page = signed_in(member).get(reverse("overviews:pairs", args=[release.measurement_id]))
    assert words in page.content.decode()


def test_of_more_curves_than_distances_are_kept_of_it_does_not_help_to_assess_again(
    make: Maker,
    release: Release,
    collaboration: Collaboration,
    lead: User,
    curve: Curve,
    rival: Curve,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    make.assessment(release, {curve: 0.4, rival: 0.3})
    monkeypatch.setattr(pairs, "MOST_CURVES", 1)
    said = "judged 2 curves, and distances are kept of at most 1: assess fewer to see pairs"
    assert pairs_page(release.measurement, lead).no_distances == said
    found = separation_page(collaboration, lead, str(curve.theory_id), str(rival.theory_id))
    assert [words for _, words in found.unknown] == [said]


@pytest.fixture
def two_measurements(make: Maker, release: Release, curve: Curve, rival: Curve) -> Measurement:
    """The second separates them better, though their curves are nearer there: its ball is smaller."""
    make.assessment(release, {curve: 0.4, rival: 0.3}, radius=0.5, apart=[0.9])
    gauge = make.measurement()
    curves = [make.curve(curve.theory, gauge), make.curve(rival.theory, gauge)]
    make.assessment(make.release(gauge, 1), {curves[1]: 0.4, curves[0]: 0.001}, radius=0.2, apart=[0.6])
    return gauge


def test_the_measurement_with_most_widths_between_them_comes_first(
    two_measurements: Measurement, collaboration: Collaboration, lead: User, curve: Curve, rival: Curve
) -> None:
    page = separation_page(collaboration, lead, str(curve.theory_id), str(rival.theory_id))
    assert [(row.column.key, row.cannot_both) for row in page.rows] == [
        (two_measurements.pk, True),
        (curve.measurement_id, False),
    ]
    # 0.6/(2 · 0.2) and 0.9/(2 · 0.5).
    assert [row.ratio for row in page.rows] == [pytest.approx(1.5), pytest.approx(0.9)]
    assert [(row.first.word, row.second.word) for row in page.rows] == [
        ("outside", "inside"),
        ("inside", "inside"),
    ]


def test_the_page_says_it_in_a_sentence(
    signed_in: SignedIn,
    two_measurements: Measurement,
    collaboration: Collaboration,
    member: User,
    curve: Curve,
    rival: Curve,
) -> None:
    address = reverse("overviews:separation", args=[collaboration.pk])
    answer = signed_in(member).get(f"{address}?first={curve.theory_id}&second={rival.theory_id}")
    assert (
        f"{two_measurements}, release 1, separates Parabolic floor and Flat floor best: their curves are 0.600 "
        "error bars apart there, 1.50 times the width of its 95&nbsp;% ball, which cannot hold both."
    ) in answer.content.decode()


@pytest.mark.usefixtures("judged")
def test_any_pair_is_found_among_many_curves(
    collaboration: Collaboration, lead: User, curve: Curve, rival: Curve, third: Curve
) -> None:
    for first, second, distance in ((curve, rival, 1.2), (third, curve, 0.9), (rival, third, 1.5)):
        page = separation_page(collaboration, lead, str(first.theory_id), str(second.theory_id))
        assert [row.distance for row in page.rows] == [distance]


def test_where_it_is_not_known_the_reason_is_said(
    make: Maker, release: Release, collaboration: Collaboration, lead: User, curve: Curve, rival: Curve
) -> None:
    make.assessment(release, {curve: 0.4})

    def why() -> list[str]:
        found = separation_page(collaboration, lead, str(curve.theory_id), str(rival.theory_id))
        assert found.rows == ()
        return [words for _, words in found.unknown]

    assert why() == ["did not judge both"]
    make.assessment(release, {curve: 0.4, rival: 0.3})
    assert why() == ["is an older one and kept no distances between curves: assess again to see pairs"]
    make.assessment(release, {curve: 0.4, rival: 0.3}, radius=None, apart=[1.0])
    assert why() == ["has no radius at 95\N{NO-BREAK SPACE}%: that level was not asked for"]
    make.assessment(release, {curve: 0.4, rival: 0.3}, radius=0.0, apart=[1.0])
    assert why() == [
        "has an empty 95\N{NO-BREAK SPACE}% ball, which holds nothing: the errors should be checked"
    ]


@pytest.mark.parametrize("query", ["", "first=1", "first=nonsense&second=-3", "first=999999&second=999998"])
def test_without_two_theories_two_are_asked_for(
    signed_in: SignedIn, member: User, collaboration: Collaboration, rival: Curve, query: str
) -> None:
    address = reverse("overviews:separation", args=[collaboration.pk])
    assert "Choose two theories." in signed_in(member).get(f"{address}?{query}").content.decode()


def test_a_theory_is_not_compared_with_itself(
    signed_in: SignedIn, member: User, collaboration: Collaboration, curve: Curve
) -> None:
    address = reverse("overviews:separation", args=[collaboration.pk])
    answer = signed_in(member).get(f"{address}?first={curve.theory_id}&second={curve.theory_id}")
    assert "Choose two different theories." in answer.content.decode()
