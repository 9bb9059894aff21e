"""What moved from release to release: chart, table, words."""

import csv
import io
from collections.abc import Callable

import pytest
from django.test import Client
from django.urls import reverse

from core.measurements.models import Measurement, Release
from core.people.models import User
from core.theories.models import Curve
from fits.assessments.models import Assessment
from fits.overviews.history import History
from fits.overviews.history_chart import MOST_LINES, drawn_histories, history_figure
from fits.overviews.history_part import history_of
from fits.reports.figures.figure import Figure, Line, Marker, Points
from tests.overviews.conftest import SETTINGS, Maker

SignedIn = Callable[[User], Client]
INSIDE, OUTSIDE = 0.4, 0.001


@pytest.fixture
def over(make: Maker, release: Release) -> Callable[..., list[Release]]:
    """Release after release, each with an assessment of these p-values; None: published, nothing assessed."""

    def made(*assessed: dict[Curve, float] | None) -> list[Release]:
        releases = [release]
        releases += [make.release(release.measurement, number) for number in range(2, len(assessed) + 1)]
        for row, p_values in zip(releases, assessed, strict=True):
            if p_values is not None:
                make.assessment(row, p_values)
        return releases

    return made


Over = Callable[..., list[Release]]


def history_in(measurement: Measurement, reader: User, name: str = "Parabolic floor") -> History:
    _, found = history_of(measurement, reader)
    return next(history for history in found if history.theory_name == name)


def figure_in(measurement: Measurement, reader: User, *chosen: int) -> Figure:
    releases, found = history_of(measurement, reader)
    figure = history_figure(found, releases, chosen)
    assert figure is not None
    return figure


@pytest.mark.parametrize(
    ("p_values", "changes", "left_at"),
    [
        ([INSIDE, INSIDE], ("inside at every release",), "–"),
        ([OUTSIDE, OUTSIDE], ("outside at every release",), "never in it; first judged at release 1"),
        ([INSIDE, OUTSIDE], ("inside at release 1", "moved outside at release 2"), "release 2"),
        ([OUTSIDE, INSIDE], ("outside at release 1", "came inside at release 2"), "–"),
        (
            [INSIDE, OUTSIDE, INSIDE, OUTSIDE, OUTSIDE],
            (
                "inside at release 1",
                "moved outside at release 2",
                "came inside at release 3",
                "moved outside at release 4",
            ),
            "release 4",
        ),
        (
            [INSIDE, None, OUTSIDE],
            ("inside at release 1", "not judged at release 2", "moved outside at release 3"),
            "release 3",
        ),
        ([INSIDE, None], ("inside at release 1", "not judged at release 2"), "–"),
        (
            [None, INSIDE, INSIDE],
            ("inside at every release that judged it", "not judged at release 1"),
            "–",
        ),
    ],
)
def test_what_changed_is_said_with_its_release(
    over: Over,
    lead: User,
    curve: Curve,
    p_values: list[float | None],
    changes: tuple[str, ...],
    left_at: str,
) -> None:
    [first, *_] = over(*(None if p is None else {curve: p} for p in p_values))
    history = history_in(first.measurement, lead)
    assert history.changes == changes
    assert history.left_at == left_at


# Of 2000 draws, 81 to 120 as far off as the curve do not settle on which side of 0.05 its p-value lies.
@pytest.mark.parametrize(
    ("p_values", "changes", "left_at"),
    [
        (
            [INSIDE, 0.049],
            ("inside at release 1", "moved outside at release 2, which 2000 draws leave open"),
            "release 2, which 2000 draws leave open",
        ),
        (
            [0.051, OUTSIDE],
            (
                "inside at release 1, which 2000 draws leave open",
                "moved outside at release 2, which 2000 draws leave open",
            ),
            "release 2, which 2000 draws leave open",
        ),
        (
            [INSIDE, 0.049, OUTSIDE],
            ("inside at release 1", "moved outside at release 2, which 2000 draws leave open"),
            "release 2, which 2000 draws leave open",
        ),
        (
            [INSIDE, 0.051, OUTSIDE],
            ("inside at release 1", "moved outside at release 3, which 2000 draws leave open"),
            "release 3, which 2000 draws leave open",
        ),
        (
            [OUTSIDE, 0.051],
            ("outside at release 1", "came inside at release 2, which 2000 draws leave open"),
            "–",
        ),
        (
            [0.049, 0.049],
            ("outside at every release, which 2000 draws leave open",),
            "never in it, which 2000 draws leave open; first judged at release 1",
        ),
        ([0.061, 0.04], ("inside at release 1", "moved outside at release 2"), "release 2"),
    ],
)
def test_what_the_draws_leave_open_is_not_said_as_settled(
    over: Over,
    lead: User,
    curve: Curve,
    p_values: list[float],
    changes: tuple[str, ...],
    left_at: str,
) -> None:
    [first, *_] = over(*({curve: p} for p in p_values))
    history = history_in(first.measurement, lead)
    assert history.changes == changes
    assert history.left_at == left_at


def test_the_sentence_that_names_who_left_says_what_is_open(
    signed_in: SignedIn, over: Over, member: User, curve: Curve
) -> None:
    over({curve: INSIDE}, {curve: 0.049})
    page = " ".join(signed_in(member).get(curve.measurement.get_absolute_url()).content.decode().split())
    assert "Parabolic floor</a> at release 2, which 2000 draws leave open.</p>" in page


def test_a_new_version_of_the_curve_is_said_too(over: Over, make: Maker, lead: User, curve: Curve) -> None:
    second = make.curve(curve.theory, curve.measurement, 2)
    over({curve: INSIDE}, {second: INSIDE}, {second: OUTSIDE})
    assert history_in(curve.measurement, lead).changes == (
        "inside at release 1",
        "version 2 of its curve in place of version 1 at release 2",
        "moved outside at release 3",
    )


def test_a_move_that_comes_with_a_new_version_says_so(
    over: Over, make: Maker, lead: User, curve: Curve
) -> None:
    second = make.curve(curve.theory, curve.measurement, 2)
    over({curve: OUTSIDE}, {second: INSIDE})
    assert history_in(curve.measurement, lead).changes == (
        "outside at release 1",
        "came inside with version 2 of its curve in place of version 1 at release 2",
    )


def test_a_withdrawn_release_moves_nobody_and_stays_in_the_history(
    over: Over, make: Maker, lead: User, curve: Curve
) -> None:
    _, second, _ = over({curve: INSIDE}, {curve: OUTSIDE}, {curve: INSIDE})
    make.withdrawn(second)
    history = history_in(curve.measurement, lead)
    assert history.changes == ("inside at every release",)
    assert [standing and standing.word for standing in history.standings] == ["inside", "outside", "inside"]


def test_a_withdrawn_release_is_not_the_newest_and_is_listed_with_its_reason(
    signed_in: SignedIn, over: Over, make: Maker, member: User, curve: Curve
) -> None:
    _, second = over({curve: INSIDE}, {curve: OUTSIDE})
    make.withdrawn(second, "The clock ran slow")
    page = signed_in(member).get(curve.measurement.get_absolute_url()).content.decode()
    assert "stays inside the 95&nbsp;% set of release 1" in page
    assert "The clock ran slow" in page
    assert ">release 2</a>, withdrawn</th>" in page


def test_the_page_names_who_left_and_at_which_release(
    signed_in: SignedIn, over: Over, member: User, curve: Curve, rival: Curve
) -> None:
    over({curve: INSIDE, rival: INSIDE}, {curve: INSIDE, rival: OUTSIDE})
    page = " ".join(signed_in(member).get(curve.measurement.get_absolute_url()).content.decode().split())
    assert "Flat floor</a> at release 2.</p>" in page
    assert '<td class="words">inside at every release</td>' in page


def test_a_line_a_theory_in_radii_and_in_entry_levels(
    over: Over, lead: User, curve: Curve, rival: Curve
) -> None:
    over({curve: 0.4, rival: 0.3}, {curve: 0.6, rival: 0.001})
    figure = figure_in(curve.measurement, lead)
    lines = [layer for layer in figure.layers if isinstance(layer, Line) and len(layer.x) == 2]
    drawn = {(line.label, line.panel): line.y for line in lines if line.label in {"Flat floor"}}
    # Distances of 0.5 with a radius of 0.5.
    assert drawn[("Flat floor", 0)] == (1.0, 1.0)
    [levels] = [line.y for line in lines if line.panel == 1 and line.y[1] > 0.99]
    assert levels == pytest.approx((0.7, 0.999))
    assert {line.y for line in lines if line.label == "edge of the 95 % set"} >= {
        (1.0, 1.0),
        (0.95, 0.95),
    }


def test_inside_and_outside_differ_by_shape(over: Over, lead: User, curve: Curve) -> None:
    over({curve: INSIDE}, {curve: OUTSIDE})
    points = [layer for layer in figure_in(curve.measurement, lead).layers if isinstance(layer, Points)]
    assert {(layer.marker, layer.x) for layer in points} == {
        (Marker.CIRCLE, (1.0,)),
        (Marker.CROSS, (2.0,)),
    }


def test_a_release_that_did_not_judge_it_breaks_its_line(over: Over, lead: User, curve: Curve) -> None:
    over({curve: INSIDE}, None, {curve: INSIDE}, {curve: INSIDE})
    lines = [
        layer.x
        for layer in figure_in(curve.measurement, lead).layers
        if isinstance(layer, Line) and layer.label == "Parabolic floor" and layer.panel == 0
    ]
    assert lines == [(1.0,), (3.0, 4.0)]


def test_without_a_radius_only_the_entry_level_is_drawn(make: Maker, release: Release, curve: Curve) -> None:
    make.assessment(release, {curve: INSIDE}, radius=None)
    make.assessment(make.release(release.measurement, 2), {curve: INSIDE}, radius=0.0)
    points = [
        layer for layer in figure_in(release.measurement, make.lead).layers if isinstance(layer, Points)
    ]
    assert {layer.panel for layer in points} == {1}


def test_that_a_radius_is_cautious_and_entry_levels_are_not_is_said(
    over: Over, lead: User, curve: Curve
) -> None:
    over({curve: INSIDE}, {curve: INSIDE})
    assert "cautious" not in figure_in(curve.measurement, lead).caption
    Assessment.objects.filter(release__number=2).update(settings=SETTINGS | {"radius": "cautious"})
    assert "The radius of release 2 is the cautious one" in figure_in(curve.measurement, lead).caption


def test_of_many_theories_those_that_moved_and_the_nearest_have_lines(
    over: Over, make: Maker, lead: User, measurement: Measurement
) -> None:
    curves = [make.curve(make.theory(f"Theory {number:02}"), measurement) for number in range(20)]
    over(dict.fromkeys(curves, INSIDE), {**dict.fromkeys(curves, INSIDE), curves[-1]: OUTSIDE})
    _, found = history_of(measurement, lead)
    names = [history.theory_name for history in drawn_histories(found)]
    assert len(names) == MOST_LINES
    assert names == [*(f"Theory {number:02}" for number in range(MOST_LINES - 1)), "Theory 19"]


def test_the_query_chooses_the_lines_and_never_more_than_there_are_colours(
    signed_in: SignedIn, over: Over, make: Maker, lead: User, measurement: Measurement
) -> None:
    curves = [make.curve(make.theory(f"Theory {number:02}"), measurement) for number in range(20)]
    over(dict.fromkeys(curves, INSIDE), dict.fromkeys(curves, INSIDE))
    chosen = "&".join(f"theory={curve.theory_id}" for curve in curves[5:])
    answer = signed_in(lead).get(f"{measurement.get_absolute_url()}?{chosen}&theory=nonsense")
    part = answer.context["history"]
    assert part.drawn == {curve.theory_id for curve in curves[5 : 5 + MOST_LINES]}
    assert f"theory={curves[5].theory_id}" in part.chart.svg


def test_the_page_draws_the_chart_and_has_a_still_one_for_who_runs_no_scripts(
    signed_in: SignedIn, over: Over, member: User, curve: Curve
) -> None:
    over({curve: INSIDE}, {curve: OUTSIDE})
    page = signed_in(member).get(curve.measurement.get_absolute_url()).content.decode()
    still = reverse("overviews:history_chart", args=[curve.measurement_id, "history", "svg"])
    assert 'data-figure="history-data"' in page
    assert '<script id="history-data" type="application/json">' in page
    assert f'src="{still}"' in page[page.index("<noscript><img") :]


def test_the_files_hold_the_chart_and_every_number(
    signed_in: SignedIn, over: Over, member: User, curve: Curve, rival: Curve
) -> None:
    over({curve: INSIDE, rival: INSIDE}, {curve: INSIDE})
    client = signed_in(member)

    def address(form: str) -> str:
        return reverse("overviews:history_chart", args=[curve.measurement_id, "history", form])

    drawing = client.get(address("svg"))
    assert drawing.headers["Content-Type"].startswith("image/svg+xml")
    assert "Parabolic floor" in drawing.content.decode()
    rows = list(csv.DictReader(io.StringIO(client.get(address("csv")).content.decode())))
    assert [(row["theory"], row["release"], row["at 95 %"]) for row in rows] == [
        ("Parabolic floor", "1", "inside"),
        ("Parabolic floor", "2", "inside"),
        ("Flat floor", "1", "inside"),
        ("Flat floor", "2", "not judged"),
    ]
    assert rows[0]["distance / radius"] == "0.5"


@pytest.mark.parametrize(("name", "form"), [("history", "png"), ("other", "svg")])
def test_no_other_file_is_there(
    signed_in: SignedIn, over: Over, member: User, curve: Curve, name: str, form: str
) -> None:
    over({curve: INSIDE})
    address = reverse("overviews:history_chart", args=[curve.measurement_id, name, form])
    assert signed_in(member).get(address).status_code == 404


def test_distances_that_differ_widely_stand_on_a_logarithmic_axis(
    make: Maker, release: Release, curve: Curve
) -> None:
    make.assessment(release, {curve: INSIDE}, radius=0.01)
    figure = figure_in(release.measurement, make.lead)
    assert figure.panels[0].y.log
    make.assessment(release, {curve: INSIDE}, radius=0.2)
    assert not figure_in(release.measurement, make.lead).panels[0].y.log
