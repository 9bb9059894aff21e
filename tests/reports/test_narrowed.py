"""Theories that are not shown leave nothing behind; what is said of the others stays true."""

import json
from collections.abc import Callable
from typing import Any

import pytest

from fits.assessments.notes import NoteCode
from fits.reports.exports import ranking_csv
from fits.reports.figures import BUILDERS, FEATURE_BUILDERS, figure_of
from fits.reports.figures.plotly import plotly_json
from fits.reports.narrowed import narrowed
from fits.reports.page import result_page
from fits.reports.printing import NoAddresses
from fits.reports.snapshot import Snapshot
from fits.reports.words import finding, shown_words

Tell = Callable[..., Snapshot]
FIVE = {
    "Alpha": (0.1, True, True),
    "Beta": (0.2, True, True),
    "Gamma": (0.3, True, False),
    "Delta": (0.9, False, False),
    "Epsilon": (1.4, False, False),
}


def test_a_hidden_theory_is_nowhere_in_what_is_kept(computed: Snapshot) -> None:
    hidden = "Two joined basins"
    shown = [name for name in computed.names if name != hidden]
    kept = json.dumps(narrowed(computed, shown).stored())
    assert hidden in json.dumps(computed.stored())
    assert hidden not in kept


def test_a_hidden_theory_is_on_no_page_chart_or_file(featured: Snapshot) -> None:
    hidden = featured.names[0]
    kept = narrowed(featured, featured.names[1:])
    charts = [figure_of(name, kept) for name in (*BUILDERS, *FEATURE_BUILDERS)]
    drawn = [json.dumps(plotly_json(chart)) for chart in charts if chart is not None]
    page = result_page(kept, NoAddresses())
    for text in (*drawn, ranking_csv(kept), json.dumps(kept.features), str({**page, "snapshot": None})):
        assert hidden not in text


def test_all_shown_is_the_result_itself(computed: Snapshot) -> None:
    assert narrowed(computed, None) is computed
    assert narrowed(computed, computed.names) is computed


def test_ranks_stay_and_the_report_says_among_how_many(told: Tell) -> None:
    kept = narrowed(told(FIVE), ["Beta", "Delta"])
    assert [curve["rank"] for curve in kept.curves] == [2, 4]
    assert shown_words(kept) == "2 of the 5 theories of this assessment are shown; ranks are among all 5."
    assert kept.result["curves_judged"] == 5
    lines = ranking_csv(kept).splitlines()
    assert lines[0].endswith("curves_judged")
    assert [line.split(",")[0] for line in lines[1:]] == ["2", "4"]
    assert lines[1].endswith(",5")


@pytest.mark.parametrize(
    ("shown", "said"),
    [
        (
            ["Beta", "Gamma", "Delta"],
            "Of the 3 theories shown, of 5 judged, 2 stay inside the 95 % set of release 3, though the scale set "
            "rejects Gamma; the closest of these is Beta, rank 2 of 5, at 0.2",
        ),
        (
            ["Alpha", "Beta"],
            "All 2 theories shown, of 5 judged, stay inside the 95 % set of release 3, which rules none",
        ),
        (
            ["Delta", "Epsilon"],
            "None of the 2 theories shown, of 5 judged, stays inside the 95 % set of release 3;",
        ),
        (
            ["Delta"],
            "The one theory shown, of 5 judged, Delta, rank 4 of 5, is outside the 95 % set of release 3, at",
        ),
    ],
)
def test_the_finding_speaks_of_those_shown_and_says_so(told: Tell, shown: list[str], said: str) -> None:
    assert finding(narrowed(told(FIVE), shown), "0.95").startswith(said)


def test_with_all_shown_the_finding_is_what_it_was(told: Tell) -> None:
    assert finding(told(FIVE), "0.95").startswith("Of 5 theories, 3 stay inside the 95 % set of release 3")


def test_an_order_that_nobody_asked_about_is_not_called_settled(told: Tell) -> None:
    unsettled = told(FIVE, settled=False)
    assert "the order of the first 5 is not settled" in finding(unsettled, "0.95")
    assert "order of the first two is not settled" in finding(narrowed(unsettled, ["Alpha", "Beta"]), "0.95")
    apart = finding(narrowed(told(FIVE), ["Alpha", "Gamma"]), "0.95")
    assert "whether the data settle the order of the first two shown was not judged" in apart


def test_a_row_does_not_name_the_neighbour_that_is_hidden(told: Tell, computed: Snapshot) -> None:
    first, _, last = computed.names
    three = told(dict.fromkeys(computed.names, (0.1, True, True)), settled=False)
    rows = result_page(narrowed(three, [first, last]), NoAddresses())["rows"]
    assert rows[0].unsettled_with == "the next in rank, which is not shown,"


def test_notes_on_curves_speak_of_those_shown(computed: Snapshot) -> None:
    names = computed.names
    curves = [curve | {"interpolation_error": 0.2} for curve in computed.curves]
    notes: list[dict[str, Any]] = [
        {
            "code": NoteCode.GRID_COARSE,
            "message": f"By: {names[0]}, 0.2; {names[1]}, 0.2. Give it on a finer grid.",
        },
        {"code": NoteCode.NO_LEFTOVER, "message": "Nothing is left over."},
    ]
    noted = Snapshot({**computed.result, "curves": curves, "notes": notes}, computed.detail, computed.context)
    found = narrowed(noted, [names[1]]).result["notes"]
    assert [note["message"] for note in found] == [
        f"By: {names[1]}, 0.2. Give it on a finer grid.",
        "Nothing is left over.",
    ]
