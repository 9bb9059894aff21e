"""CSV files carry all digits and no formula."""

import csv
import io

import pytest

from fits.reports.exports import csv_text, ranking_csv
from fits.reports.snapshot import Snapshot


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t"])
def test_text_that_looks_like_a_formula_gets_an_apostrophe(start: str) -> None:
    text = csv_text(("name",), [(f"{start}HYPERLINK(1)",)])
    assert list(csv.reader(io.StringIO(text)))[1] == [f"'{start}HYPERLINK(1)"]


def test_negative_numbers_stay_numbers() -> None:
    assert csv_text(("y",), [(-1.5,)]) == "y\r\n-1.5\r\n"


def test_numbers_keep_their_last_bit() -> None:
    assert "0.1\r\n0.30000000000000004" in csv_text(("y",), [(0.1,), (0.1 + 0.2,)])


def test_the_ranking_has_a_row_for_each_curve(computed: Snapshot) -> None:
    rows = list(csv.DictReader(io.StringIO(ranking_csv(computed))))
    assert [row["curve"] for row in rows] == list(computed.names)
    assert float(rows[0]["distance"]) == computed.curves[0]["distance"]
    assert rows[-1]["exact_0.95"] == "outside"
