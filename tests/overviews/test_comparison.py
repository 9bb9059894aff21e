"""Theories across measurements, and what the measurements say jointly."""

import csv
import io
from collections.abc import Callable

import pytest
from django.http import QueryDict
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import Collaboration, User
from core.theories.models import Curve
from fits.overviews.comparison import Comparison, MatrixRow, comparison_of
from tests.overviews.conftest import Maker

SignedIn = Callable[[User], Client]


@pytest.fixture
def gauge(make: Maker) -> Measurement:
    """A second measurement, before the first by name."""
    return make.measurement()


@pytest.fixture
def both(make: Maker, release: Release, curve: Curve, rival: Curve, gauge: Measurement) -> None:
    """Two theories on two measurements: 0.04 and 0.5, 0.02 and 0.6."""
    make.assessment(release, {curve: 0.04, rival: 0.02})
    curves = [make.curve(rival.theory, gauge), make.curve(curve.theory, gauge)]
    make.assessment(make.release(gauge, 1), {curves[0]: 0.6, curves[1]: 0.5})


@pytest.fixture
def compare(collaboration: Collaboration, lead: User) -> Callable[[str], Comparison]:
    return lambda query: comparison_of(collaboration, lead, QueryDict(query))


Compare = Callable[[str], Comparison]


def names(comparison: Comparison) -> list[str]:
    return [row.name for row in comparison.rows]


def row_of(comparison: Comparison, name: str = "Parabolic floor") -> MatrixRow:
    return next(row for row in comparison.rows if row.name == name)


@pytest.mark.usefixtures("both")
def test_the_joint_verdict_of_two_measurements_by_hand(compare: Compare) -> None:
    # √0.95 = 0.974679: each asks for p > 0.025321. 0.04 and 0.5 exceed it; 0.02 does not.
    held, rejected = row_of(compare("")), row_of(compare(""), "Flat floor")
    assert held.joint is not None
    assert rejected.joint is not None
    assert (held.joint.is_inside, rejected.joint.is_inside) == (True, False)
    # 1 − 0.96², 1 − 0.98²; entry levels are 1 − p here.
    assert held.joint.p_value == pytest.approx(0.0784)
    assert rejected.joint.p_value == pytest.approx(0.0396)
    assert held.joint.entry_level == pytest.approx(0.9216)
    assert (held.judged, held.p_value) == (2, "0.078")


@pytest.mark.usefixtures("both")
def test_each_cell_has_the_verdict_of_its_measurement_alone(compare: Compare) -> None:
    row = row_of(compare(""))
    assert [(cell.word, cell.standing and cell.standing.rank) for cell in row.cells] == [
        ("inside", 2),
        ("outside", 1),
    ]


@pytest.mark.usefixtures("both")
def test_the_level_is_chosen(compare: Compare) -> None:
    at_90, at_99 = row_of(compare("level=0.9")), row_of(compare("level=0.99"))
    assert at_90.joint is not None
    assert at_99.joint is not None
    assert (at_90.joint.is_inside, at_99.joint.is_inside) == (False, True)
    assert [cell.word for cell in at_99.cells] == ["inside", "inside"]
    assert compare("level=0.123").choice.level == "0.95"


@pytest.mark.usefixtures("both")
def test_only_the_measurements_that_are_included_count(compare: Compare, measurement: Measurement) -> None:
    row = row_of(compare(f"measurement={measurement.pk}"))
    assert row.joint is not None
    assert (row.judged, row.joint.is_inside) == (1, False)
    assert row.joint.p_value == pytest.approx(0.04)
    assert len(row.cells) == 1


def test_where_a_theory_is_not_judged_counts_for_nothing(
    compare: Compare, make: Maker, release: Release, curve: Curve, rival: Curve, gauge: Measurement
) -> None:
    make.assessment(release, {curve: 0.04})
    make.assessment(make.release(gauge, 1), {make.curve(make.theory("Third"), gauge): 0.5})
    assert row_of(compare("")).judged == 1
    assert [cell.word for cell in row_of(compare("")).cells] == ["no curve", "outside"]
    unjudged = row_of(compare(""), "Flat floor")
    assert unjudged.joint is None
    assert [cell.word for cell in unjudged.cells] == ["no curve", "not judged"]


def test_the_newest_release_that_is_not_withdrawn_counts(
    compare: Compare, make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: 0.4})
    second = make.release(release.measurement, 2)
    make.assessment(second, {curve: 0.001})
    assert [cell.word for cell in row_of(compare("")).cells] == ["outside"]
    make.withdrawn(second)
    assert [cell.word for cell in row_of(compare("")).cells] == ["inside"]


@pytest.mark.usefixtures("both")
def test_sorting_by_name_joint_verdict_and_measurement(
    compare: Compare, measurement: Measurement, gauge: Measurement
) -> None:
    flat_first, parabolic_first = ["Flat floor", "Parabolic floor"], ["Parabolic floor", "Flat floor"]
    assert names(compare("sort=name")) == flat_first
    assert names(compare("sort=-name")) == parabolic_first
    assert names(compare("sort=joint")) == parabolic_first
    assert names(compare("sort=-joint")) == flat_first
    assert names(compare(f"sort={measurement.pk}")) == parabolic_first
    assert names(compare(f"sort={gauge.pk}")) == flat_first
    assert names(compare(f"sort=-{gauge.pk}")) == parabolic_first
    assert names(compare("sort=nonsense")) == parabolic_first


@pytest.mark.usefixtures("both")
def test_what_is_not_judged_stands_last_either_way(compare: Compare, make: Maker) -> None:
    make.theory("A new one")
    assert names(compare("sort=joint"))[-1] == "A new one"
    assert names(compare("sort=-joint"))[-1] == "A new one"


@pytest.mark.usefixtures("both")
@pytest.mark.parametrize(
    ("query", "kept"),
    [
        ("text=FLAT", ["Flat floor"]),
        ("verdict=inside", ["Parabolic floor"]),
        ("verdict=outside", ["Flat floor"]),
        ("verdict=partly", ["A new one"]),
        ("text=floor&verdict=partly", []),
    ],
)
def test_filters(compare: Compare, make: Maker, query: str, kept: list[str]) -> None:
    make.theory("A new one")
    assert names(compare(query)) == kept


@pytest.mark.usefixtures("both")
def test_the_page_says_what_is_asked_and_what_is_assumed(
    signed_in: SignedIn, member: User, collaboration: Collaboration
) -> None:
    answer = signed_in(member).get(reverse("overviews:comparison", args=[collaboration.pk]))
    assert "jointly inside at 95\N{NO-BREAK SPACE}%" in answer.content.decode()
    page = " ".join(answer.content.decode().split())
    assert "Of 2 theories, 1 is jointly inside at 95 % and 1 jointly outside, over 2 measurements." in page
    assert "to exceed 0.0253 for m = 2." in page
    assert "taken as independent" in page
    assert 'aria-sort="ascending"' in page


@pytest.mark.usefixtures("both")
def test_a_cell_opens_its_assessment(
    signed_in: SignedIn, member: User, collaboration: Collaboration, release: Release
) -> None:
    page = signed_in(member).get(reverse("overviews:comparison", args=[collaboration.pk])).content.decode()
    [assessment] = release.assessments.all()
    assert f'href="{assessment.get_absolute_url()}">rank 1 of 2</a>' in page


def test_a_verdict_that_hangs_on_the_simulation_is_called_open(
    signed_in: SignedIn,
    make: Maker,
    member: User,
    collaboration: Collaboration,
    release: Release,
    curve: Curve,
) -> None:
    make.assessment(release, {curve: 0.051})
    page = signed_in(member).get(reverse("overviews:comparison", args=[collaboration.pk])).content.decode()
    assert ">open</span>" in page
    assert "An assessment with more draws settles it." in page


@pytest.mark.usefixtures("both")
def test_the_table_for_other_programmes_follows_what_is_chosen(
    signed_in: SignedIn, member: User, collaboration: Collaboration, measurement: Measurement
) -> None:
    address = reverse("overviews:comparison_csv", args=[collaboration.pk])
    answer = signed_in(member).get(f"{address}?sort=name&measurement={measurement.pk}")
    rows = list(csv.DictReader(io.StringIO(answer.content.decode())))
    assert [row["theory"] for row in rows] == ["Flat floor", "Parabolic floor"]
    assert rows[1]["joint verdict"] == "outside"
    assert float(rows[1]["joint p-value"]) == pytest.approx(0.04)
    assert rows[1]["Surface seiche power: rank"] == "1"
    assert not any(column.startswith("Gauge") for column in rows[1])


def test_names_are_written_as_plain_words(
    signed_in: SignedIn, make: Maker, member: User, collaboration: Collaboration, release: Release
) -> None:
    make.assessment(release, {make.curve(make.theory("<b>bold</b>"), release.measurement): 0.3})
    page = signed_in(member).get(reverse("overviews:comparison", args=[collaboration.pk])).content.decode()
    assert "<b>bold" not in page
    assert "&lt;b&gt;bold" in page


def test_nothing_to_compare_is_said(signed_in: SignedIn, member: User, collaboration: Collaboration) -> None:
    page = signed_in(member).get(reverse("overviews:comparison", args=[collaboration.pk])).content.decode()
    assert "There is nothing to compare yet" in page
