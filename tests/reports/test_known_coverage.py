"""Each result quotes how often its sets hold the truth."""

from typing import Any

import pytest

from fits.assessments.known_coverage import nearest
from fits.engine import VERSION
from fits.reports.known_coverage_words import known_coverage_table
from fits.reports.snapshot import Snapshot
from fits.reports.standalone import render_standalone


def having(computed: Snapshot, *, errors: str = "given", known: dict[str, Any] | None = None) -> Snapshot:
    release = {**computed.result["release"], "errors": errors}
    detail = {**computed.detail, "known_coverage": known or nearest(120, errors).document()}
    return Snapshot({**computed.result, "release": release}, detail, computed.context)


def test_a_result_carries_the_setting_nearest_to_it(computed: Snapshot) -> None:
    known = computed.detail["known_coverage"]
    assert known == nearest(120, "given").document()
    assert (known["engine"], known["points"], known["errors"]) == (VERSION, 200, "known")


def test_the_table_has_average_and_worst_for_each_set_and_level(computed: Snapshot) -> None:
    table = known_coverage_table(computed)
    assert table is not None
    assert table.levels == ("67 %", "90 %", "95 %", "99 %")
    names = ["published ball", "calibrated ball", "cautious ball", "exact set", "scale set"]
    assert [row.name for row in table.rows] == names
    exact = next(row for row in computed.detail["known_coverage"]["sets"] if row["name"] == "exact")
    shown = next(row for row in table.rows if row.name == "exact set").shares[2]
    assert shown == (f"{100 * exact['average'][2]:.1f}", f"{100 * exact['worst'][2]:.1f}")
    assert "n = 200, known errors" in table.caption
    assert "6 kinds" in table.caption


@pytest.mark.parametrize(
    ("errors", "words"),
    [
        ("given", "whatever n is"),
        ("covariance", "whatever n is"),
        ("estimate", "finer than the resolution"),
        ("estimate", "a calibration) stand beside the estimated one, they keep it nearly"),
        ("counts", "transformation"),
        ("profile", "no set is exact"),
    ],
)
def test_the_words_claim_no_more_than_holds_for_these_errors(
    computed: Snapshot, errors: str, words: str
) -> None:
    table = known_coverage_table(having(computed, errors=errors))
    assert table is not None
    assert words in table.sentences[-1]
    assert f"engine {VERSION}" in table.sentences[0]
    assert "1500 repeats" in table.sentences[0]


def test_the_page_shows_it(computed: Snapshot) -> None:
    page = render_standalone(computed.result, computed.detail, computed.context)
    assert "How often the sets hold the truth" in page
    assert page.count('<th scope="row">exact set</th>') == 1


def test_results_from_before_it_was_known_are_shown_without_it(computed: Snapshot) -> None:
    detail = {key: value for key, value in computed.detail.items() if key != "known_coverage"}
    old = Snapshot(computed.result, detail, computed.context)
    assert known_coverage_table(old) is None
    assert "How often the sets hold the truth" not in render_standalone(old.result, old.detail, old.context)


def test_a_frozen_report_keeps_what_was_known_when_it_was_made(computed: Snapshot) -> None:
    before = {**nearest(120, "given").document(), "engine": "0.9"}
    table = known_coverage_table(having(computed, known=before))
    assert table is not None
    assert "engine 0.9" in table.sentences[0]
