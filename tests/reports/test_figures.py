"""Figures: the numbers that go in are those that are drawn, on screen, on paper and in the table."""

import math
import xml.etree.ElementTree as ET

import plotly.graph_objects
import pytest

from fits.reports.figures import BUILDERS, figure_of
from fits.reports.figures.figure import Band, Figure, Line, Points, Ring
from fits.reports.figures.plotly import plotly_json
from fits.reports.figures.svg import svg
from fits.reports.snapshot import Snapshot


def drawn(name: str, snapshot: Snapshot, *, level: str | None = None, curve: str | None = None) -> Figure:
    figure = figure_of(name, snapshot, level=level, curve=curve)
    assert figure is not None
    return figure


def test_the_band_is_the_fit_and_the_radius_times_the_unit_band(computed: Snapshot) -> None:
    band = next(
        layer
        for layer in drawn("curves", computed).layers
        if isinstance(layer, Band) and layer.level == "0.9"
    )
    grid = computed.detail["grid"]
    assert band.upper[7] == pytest.approx(grid["fit"][7] + computed.radius("0.9") * grid["unit_band"][7])
    assert band.lower[7] == pytest.approx(grid["fit"][7] - computed.radius("0.9") * grid["unit_band"][7])


def test_residuals_are_in_error_bars(computed: Snapshot) -> None:
    figure = drawn("curves", computed)
    name = computed.names[1]
    layer = next(
        layer
        for layer in figure.layers
        if isinstance(layer, Points) and layer.panel == 1 and layer.curve == name
    )
    data = computed.detail["data"]
    expected = (data["y"][5] - computed.drawing(name)["at_data"][5]) / data["error"][5]
    assert layer.y[5] == pytest.approx(expected)


def test_every_curve_stands_at_its_distance_from_the_centre(computed: Snapshot) -> None:
    figure = drawn("ball", computed)
    for verdict in computed.curves:
        point = next(
            layer for layer in figure.layers if isinstance(layer, Points) and layer.label == verdict["name"]
        )
        assert math.hypot(point.x[0], point.y[0]) == pytest.approx(verdict["distance"])


def test_rings_are_the_calibrated_radii(computed: Snapshot) -> None:
    rings = {layer.level: layer.radius for layer in drawn("ball", computed).layers if isinstance(layer, Ring)}
    assert rings == {level: computed.radius(level) for level in computed.levels}


def test_misfit_by_scale_is_drawn_as_computed(computed: Snapshot) -> None:
    name = computed.names[0]
    line = next(
        layer for layer in drawn("scales", computed).layers if isinstance(layer, Line) and layer.curve == name
    )
    found = computed.drawing(name)["scales"]
    assert line.x == tuple(found["wider_than"])
    assert line.y == pytest.approx(found["p_value"])


def test_only_the_band_of_the_chosen_level_shows(computed: Snapshot) -> None:
    figure = drawn("curves", computed, level="0.99")
    shown = [layer.level for layer in figure.layers if isinstance(layer, Band) and figure.shows(layer)]
    assert shown == ["0.99"]


def test_only_the_chosen_curve_shows_in_the_misfit(computed: Snapshot) -> None:
    figure = drawn("misfit", computed, curve="Flat floor")
    assert {layer.curve for layer in figure.layers if figure.shows(layer)} == {"Flat floor"}


def test_a_curve_outside_is_dashed_and_crossed(computed: Snapshot) -> None:
    traces = plotly_json(drawn("curves", computed))["data"]
    outside = next(t for t in traces if t["name"] == "Flat floor")
    assert outside["meta"]["inside"]["0.95"] is False
    assert outside["line"]["dash"] == "dash"
    ball = plotly_json(drawn("ball", computed))["data"]
    assert next(t for t in ball if t["name"] == "Flat floor")["marker"]["symbol"] == "x"
    assert next(t for t in ball if t["name"] == "Parabolic floor")["marker"]["symbol"] == "circle"


@pytest.mark.parametrize("name", BUILDERS)
def test_figures_are_valid_for_plotly(computed: Snapshot, name: str) -> None:
    plotly.graph_objects.Figure(plotly_json(drawn(name, computed)), skip_invalid=False)


@pytest.mark.parametrize("name", BUILDERS)
def test_drawings_are_xml_and_the_same_each_time(computed: Snapshot, name: str) -> None:
    first, second = (svg(drawn(name, computed)) for _ in range(2))
    assert first == second
    assert ET.fromstring(first).tag.endswith("svg")


@pytest.mark.parametrize("name", BUILDERS)
def test_tables_have_a_value_for_each_column(computed: Snapshot, name: str) -> None:
    table = drawn(name, computed).table
    assert table.rows
    assert {len(row) for row in table.rows} == {len(table.columns)}


def test_names_are_text_in_a_drawing_and_in_plotly(computed: Snapshot) -> None:
    odd = "<b>x</b> & $y$"
    result = {**computed.result, "curves": [c | {"name": odd} for c in computed.curves[:1]]}
    detail = {**computed.detail, "curves": [computed.drawing(computed.names[0]) | {"name": odd}]}
    figure = drawn("ball", Snapshot(result, detail, computed.context))
    assert odd in "".join(ET.fromstring(svg(figure)).itertext())
    assert all("<b>" not in trace["name"] for trace in plotly_json(figure)["data"])


def test_without_leftover_there_are_no_quantiles(computed: Snapshot) -> None:
    detail = {**computed.detail, "leftover_quantiles": None}
    assert figure_of("quantiles", Snapshot(computed.result, detail, computed.context)) is None


def test_an_unknown_figure_is_none(computed: Snapshot) -> None:
    assert figure_of("nothing", computed) is None


def test_a_log_axis_and_an_empty_ball_are_drawn(computed: Snapshot) -> None:
    measurement = {**computed.measurement, "axis": "log"}
    radii = [
        {"level": level, "published": 0.0, "calibrated": 0.0, "cautious": 0.0}
        for level in (0.67, 0.9, 0.95, 0.99)
    ]
    snapshot = Snapshot(
        {**computed.result, "radii": radii}, computed.detail, {**computed.context, "measurement": measurement}
    )
    for name in BUILDERS:
        figure = drawn(name, snapshot)
        assert svg(figure)
        plotly.graph_objects.Figure(plotly_json(figure), skip_invalid=False)
