"""The own peaks of a theory, set against the windows of the data's."""

from typing import Any

from fits.reports.features.document import Features, Kind
from fits.reports.features.tables import theory_rows
from fits.reports.snapshot import Snapshot


def document(peaks: list[dict[str, Any]]) -> Features:
    """One window, 1 to 5, with the location interval 1.8 to 3.4."""
    found = {"window": [1.0, 5.0], "location": {"0.95": [[1.8, 3.4]]}}
    theories = [{"name": "Flat floor", "peaks": peaks, "dips": []}]
    return Features({"radii": [], "peaks": [found], "dips": [], "theories": theories})


def drawn(heights: dict[float, float]) -> Snapshot:
    """A curve through these heights."""
    line = {"x": list(heights), "y": list(heights.values())}
    return Snapshot(
        {"curves": [{"name": "Flat floor"}]},
        {"curves": [{"name": "Flat floor", "on_grid": line}]},
        {},
    )


def place(x: float, *, inside: bool | None = None, window: bool = True) -> dict[str, Any]:
    return {
        "x": x,
        "window": [1.0, 5.0] if window else None,
        "inside": None if inside is None else {"0.95": inside},
    }


def test_the_highest_of_a_window_is_judged_and_the_lesser_ones_are_named() -> None:
    features = document([place(2.0, inside=True), place(4.5, inside=False), place(7.25, window=False)])
    (row,) = theory_rows(drawn({2.0: 3.0, 4.5: 1.0, 7.25: 9.0}), features, "0.95", Kind.PEAK)
    (own,) = row.cells
    assert (own.x, own.sides[0].is_inside, own.lesser, row.elsewhere) == ("2.000", True, "4.500", "7.250")
    (row,) = theory_rows(drawn({2.0: 3.0, 4.5: 6.0, 7.25: 9.0}), features, "0.95", Kind.PEAK)
    assert (row.cells[0].x, row.cells[0].sides[0].is_inside, row.cells[0].lesser) == ("4.500", False, "2.000")


def test_what_is_not_known_has_no_side() -> None:
    (row,) = theory_rows(drawn({2.0: 3.0, 4.0: 1.0}), document([place(2.0)]), "0.95", Kind.PEAK)
    assert (row.cells[0].x, row.cells[0].sides) == ("2.000", ())


def test_a_theory_without_a_peak_in_the_window_has_none_there() -> None:
    (row,) = theory_rows(drawn({2.0: 3.0, 4.0: 1.0}), document([]), "0.95", Kind.PEAK)
    assert (row.cells[0].x, row.elsewhere) == ("", "")
