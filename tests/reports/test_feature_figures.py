"""Charts of features: the numbers that go in are those that are drawn."""

import copy
import xml.etree.ElementTree as ET
from typing import Any

import plotly.graph_objects
import pytest

from fits.reports.charts import chart_of
from fits.reports.features.document import Features, Kind
from fits.reports.figures import FEATURE_BUILDERS, figure_of
from fits.reports.figures.features.contours import outlines
from fits.reports.figures.figure import Figure, LevelLine, Line, Marker, Points
from fits.reports.figures.plotly import plotly_json
from fits.reports.figures.svg import svg
from fits.reports.snapshot import Snapshot


def drawn(name: str, snapshot: Snapshot, *, level: str | None = None) -> Figure:
    figure = figure_of(name, snapshot, level=level)
    assert figure is not None
    return figure


def changed(snapshot: Snapshot, **parts: Any) -> Snapshot:
    """The same with other parts of its features."""
    assert snapshot.features is not None
    features = copy.deepcopy(dict(snapshot.features)) | parts
    return Snapshot(snapshot.result, snapshot.detail, snapshot.context, features)


def features_of(snapshot: Snapshot) -> Features:
    features = Features.of(snapshot)
    assert features is not None
    return features


class NoFiles:
    """Addresses of nothing."""

    def chart(self, figure: Figure, form: str) -> str:
        return f"{figure.name}.{form}"


def test_a_round_hill_has_a_round_contour() -> None:
    steps = [index / 20.0 for index in range(-40, 41)]
    price = [[(x * x + y * y) ** 0.5 for x in steps] for y in steps]
    (outline,) = outlines({"x": steps, "height": steps, "price": price}, 1.0)
    radii = [(x * x + y * y) ** 0.5 for x, y in zip(outline.x, outline.height, strict=True)]
    assert radii == pytest.approx([1.0] * len(radii), abs=2e-3)
    assert (outline.x[0], outline.height[0]) == (outline.x[-1], outline.height[-1])


def test_a_region_at_the_edge_of_its_map_is_closed() -> None:
    price = [[0.0, 0.0, 2.0], [0.0, 0.0, 2.0], [0.0, 0.0, 2.0]]
    (outline,) = outlines({"x": [0.0, 1.0, 2.0], "height": [0.0, 1.0, 2.0], "price": price}, 1.0)
    assert (outline.x[0], outline.height[0]) == (outline.x[-1], outline.height[-1])
    assert max(outline.x) == pytest.approx(1.5)


def test_a_map_without_numbers_has_no_contour() -> None:
    blank = [[None, None], [None, None]]
    assert outlines({"x": [0.0, 1.0], "height": [0.0, 1.0], "price": blank}, 1.0) == ()
    assert outlines({"x": [0.0, 1.0], "height": [0.0, 1.0], "price": [[0.0, 1.0]] * 2}, 0.0) == ()


def test_regions_lie_within_the_intervals_of_the_table(featured: Snapshot) -> None:
    lines = [layer for layer in drawn("regions", featured).layers if isinstance(layer, LevelLine)]
    features = features_of(featured)
    for feature in features.found(Kind.PEAK):
        height = feature.height("0.95")
        assert height is not None
        (place,) = feature.location("0.95")
        step = (feature.profile[1][0] - feature.profile[0][0]) * 1.5
        own = [line for line in lines if line.level == "0.95" and place.holds(sum(line.x) / len(line.x))]
        assert own
        for line in own:
            assert place.low - step <= min(line.x) <= max(line.x) <= place.high + step
            assert height.low - 0.1 <= min(line.y) <= max(line.y) <= height.high + 0.1


def test_each_level_has_a_dash_of_its_own_and_the_chosen_one_is_strong(featured: Snapshot) -> None:
    lines = [layer for layer in drawn("regions", featured).layers if isinstance(layer, LevelLine)]
    assert len({line.dash for line in lines}) == len({line.level for line in lines}) == 4
    traces = plotly_json(drawn("regions", featured, level="0.9"))["data"]
    strong = {
        t["meta"]["level"] for t in traces if t["meta"]["kind"] == "levelline" and t["line"]["width"] > 2
    }
    assert strong == {"0.9"}
    assert all(t["visible"] for t in traces if t["meta"]["kind"] == "levelline")


def test_without_a_map_the_box_of_both_intervals_is_drawn(featured: Snapshot) -> None:
    assert featured.features is not None
    peaks = [{**peak, "map": None} for peak in featured.features["peaks"]]
    figure = drawn("regions", changed(featured, peaks=peaks, dips=[]))
    line = next(layer for layer in figure.layers if isinstance(layer, LevelLine) and layer.level == "0.95")
    (low, high), (bottom, top) = peaks[0]["location"]["0.95"][0], peaks[0]["height"]["0.95"]
    assert (min(line.x), max(line.x), min(line.y), max(line.y)) == (low, high, bottom, top)


def test_own_peaks_of_a_curve_stand_on_it_inside_or_outside(featured: Snapshot) -> None:
    assert featured.features is not None
    figure = drawn("regions", featured)
    points = [layer for layer in figure.layers if isinstance(layer, Points) and layer.curve == "Flat floor"]
    own = {place["x"]: place["inside"] for place in featured.features["theories"][1]["peaks"]}
    peaks = [point for point in points if point.x[0] in own]
    assert len(peaks) == 3
    assert all(point.inside == own[point.x[0]] for point in peaks)
    assert {point.inside["0.95"] for point in peaks} == {True, False}


def test_prices_are_drawn_as_found_and_broken_where_unknown(featured: Snapshot) -> None:
    assert featured.features is not None
    peak = copy.deepcopy(dict(featured.features["peaks"][0]))
    peak["profile"]["price"][5] = None
    figure = drawn("peak_prices", changed(featured, peaks=[peak]))
    lines = [layer for layer in figure.layers if isinstance(layer, Line) and layer.label == "price of a peak"]
    assert [len(line.y) for line in lines] == [5, len(peak["profile"]["x"]) - 6]
    assert lines[1].y == tuple(peak["profile"]["price"][6:])
    assert figure.table.rows[5][2] is None


def test_radii_cross_the_charts_of_prices(featured: Snapshot) -> None:
    for name in ("peak_prices", "dip_prices", "ladder", "dip_ladder", "spacing", "harmonic"):
        lines = [layer for layer in drawn(name, featured).layers if isinstance(layer, LevelLine)]
        assert {line.level: line.y[0] for line in lines} == {
            level: featured.radius(level) for level in featured.levels
        }


def steps(*bounds: tuple[float, float | None]) -> list[dict[str, Any]]:
    curve = {"x": [0.0, 1.0], "y": [1.0, 2.0]}
    return [
        {
            "at_most": k,
            "price_lower": lower,
            "price_upper": upper,
            "demanded_level": 0.5,
            "witness": None if upper is None else curve,
        }
        for k, (lower, upper) in enumerate(bounds)
    ]


def test_the_ladder_marks_what_is_ruled_out_possible_and_undecided(featured: Snapshot) -> None:
    radius = featured.radius("0.95")
    count = steps((1.5 * radius, 1.6 * radius), (0.5 * radius, 1.5 * radius), (0.0, 0.1 * radius))
    figure = drawn("ladder", changed(featured, count=count))
    marks = {
        layer.marker: (layer.x, layer.y)
        for layer in figure.layers
        if isinstance(layer, Points) and layer.level == "0.95" and layer.label
    }
    assert marks[Marker.CROSS] == ((0.0,), (1.5 * radius,))
    assert marks[Marker.DOT] == ((1.0, 1.0), (0.5 * radius, 1.5 * radius))
    assert marks[Marker.CIRCLE] == ((2.0,), (0.1 * radius,))
    at = figure.table.columns.index("at 95 %")
    assert [row[at] for row in figure.table.rows] == ["ruled out", "undecided", "possible"]


def test_a_step_without_a_witness_reaches_to_the_top(featured: Snapshot) -> None:
    radius = featured.radius("0.95")
    figure = drawn("ladder", changed(featured, count=steps((0.5 * radius, None), (0.0, 0.0))))
    line = next(layer for layer in figure.layers if type(layer) is Line)
    assert line.y[0] == 0.5 * radius
    assert line.y[1] > featured.radius("0.99")
    assert figure.table.rows[0][2] == "none"


def test_the_last_ruled_out_and_the_first_possible_witness_are_drawn(featured: Snapshot) -> None:
    radius = featured.radius("0.95")
    count = steps((3.0, 3.1), (2.0, 2.1), (0.0, 0.1 * radius), (0.0, 0.0))
    figure = drawn("witnesses", changed(featured, count=count))
    labels = [layer.label for layer in figure.layers if isinstance(layer, Line) and layer.level == "0.95"]
    assert labels[0] == "at most 1 peak, 2.10 from the fit"
    assert labels[1].startswith("at most 2 peaks, ")
    assert len(labels) == 2


def test_neighbours_stand_at_their_distance(featured: Snapshot) -> None:
    figure = drawn("neighbours", featured)
    one, two = (features_of(featured).found(Kind.PEAK)[index].location("0.95")[0] for index in (0, 1))
    line = next(layer for layer in figure.layers if isinstance(layer, LevelLine) and layer.level == "0.95")
    assert min(line.x) == one.low
    assert max(line.y) == pytest.approx(two.high - one.low)
    assert min(line.y) == pytest.approx(two.low - one.high)


def test_the_key_names_each_line_once(featured: Snapshot) -> None:
    key = chart_of(drawn("regions", featured), NoFiles()).key
    labels = [entry.label for entry in key]
    assert labels == ["data", "fit", "at 67 %", "at 90 %", "at 95 %", "at 99 %"]
    assert len({entry.strokes for entry in key if entry.label.startswith("at")}) == 4


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_figures_are_valid_for_plotly(featured: Snapshot, name: str) -> None:
    plotly.graph_objects.Figure(plotly_json(drawn(name, featured)), skip_invalid=False)


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_drawings_are_xml_and_the_same_each_time(featured: Snapshot, name: str) -> None:
    first, second = (svg(drawn(name, featured)) for _ in range(2))
    assert first == second
    assert ET.fromstring(first).tag.endswith("svg")


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_tables_have_a_value_for_each_column(featured: Snapshot, name: str) -> None:
    table = drawn(name, featured).table
    assert table.rows
    assert {len(row) for row in table.rows} == {len(table.columns)}


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_without_features_there_is_nothing_to_draw(computed: Snapshot, name: str) -> None:
    assert figure_of(name, computed) is None


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_a_search_that_found_nothing_has_no_chart(featured: Snapshot, name: str) -> None:
    empty = changed(featured, peaks=[], dips=[], count=[], dip_count=[], spacing=None, harmonic=None)
    assert figure_of(name, empty) is None


@pytest.mark.parametrize("name", FEATURE_BUILDERS)
def test_radii_of_zero_and_a_log_axis_are_drawn(featured: Snapshot, name: str) -> None:
    assert featured.features is not None
    radii = [{**radius, "calibrated": 0.0} for radius in featured.features["radii"]]
    context = {**featured.context, "measurement": {**featured.measurement, "axis": "log"}}
    found = changed(featured, radii=radii).features
    figure = drawn(name, Snapshot(featured.result, featured.detail, context, found))
    assert svg(figure)
    plotly.graph_objects.Figure(plotly_json(figure), skip_invalid=False)
