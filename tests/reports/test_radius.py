"""The radius that was chosen is the one that is drawn; verdicts do not depend on it."""

import dataclasses
from typing import Any

import pytest

from fits.reports.addresses import RouteAddresses
from fits.reports.figures import figure_of
from fits.reports.figures.figure import Band, Ring
from fits.reports.page import result_page
from fits.reports.snapshot import Snapshot
from fits.reports.verdict_words import explanations


@pytest.fixture
def cautious(computed: Snapshot) -> Snapshot:
    settings = {**computed.context["settings"], "radius": "cautious"}
    return dataclasses.replace(computed, context={**computed.context, "settings": settings})


def radii(snapshot: Snapshot, kind: str) -> list[float]:
    return [float(radius[kind]) for radius in snapshot.result["radii"]]


def test_results_older_than_the_choice_are_drawn_with_the_calibrated_radius(computed: Snapshot) -> None:
    assert "radius" not in computed.context["settings"]
    assert [computed.radius(level) for level in computed.levels] == radii(computed, "calibrated")


def test_rings_are_drawn_at_the_cautious_radius(cautious: Snapshot) -> None:
    figure = figure_of("ball", cautious)
    assert figure is not None
    rings = [layer.radius for layer in figure.layers if isinstance(layer, Ring)]
    assert rings == radii(cautious, "cautious")
    assert "cautious radii" in figure.caption


def test_the_band_is_drawn_at_the_cautious_radius(cautious: Snapshot) -> None:
    figure = figure_of("curves", cautious)
    assert figure is not None
    band = next(layer for layer in figure.layers if isinstance(layer, Band) and layer.level == "0.95")
    grid = cautious.detail["grid"]
    half_width = cautious.result["radii"][2]["cautious"] * grid["unit_band"][7]
    assert band.upper[7] == pytest.approx(grid["fit"][7] + half_width)
    assert "cautious ball" in figure.caption


def test_the_page_says_which_radius_is_drawn(cautious: Snapshot) -> None:
    assert ("radius drawn", "cautious") in result_page(cautious, RouteAddresses("assessment", 1))["settings"]


def test_verdicts_stay_those_of_the_exact_p_value(computed: Snapshot, cautious: Snapshot) -> None:
    def marks(snapshot: Snapshot) -> list[Any]:
        return [row.marks for row in result_page(snapshot, RouteAddresses("assessment", 1))["rows"]]

    assert marks(computed) == marks(cautious)


def test_where_the_cautious_ball_disagrees_it_is_the_one_that_is_explained(cautious: Snapshot) -> None:
    curve = dict(cautious.curves[0])
    sets = {kind: dict(levels) for kind, levels in curve["inside"].items()}
    sets["exact"]["0.95"] = False
    sets["calibrated"]["0.95"] = True
    curve |= {"distance": 0.0, "inside": sets}
    said = " ".join(explanations(cautious, curve, "0.95"))
    assert "The cautious ball says inside at 95 %" in said
    assert "The calibrated ball" not in said
