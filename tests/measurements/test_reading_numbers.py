"""One grammar of numbers, whichever way a file is read."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from core.measurements.reading import table as table_module
from core.measurements.reading.limits import DATA_TABLE
from core.measurements.reading.separator import cells_of, separator_of
from core.measurements.reading.table import read_table
from core.measurements.reading.text import text_lines
from core.user_error import UserError

FINITE = st.floats(allow_nan=False, allow_infinity=False)
FORMS = st.sampled_from(["{!r}", "{:.17e}", "{:+.17E}", "{:.17g}"])
COMMENT = st.sampled_from(["", " # windy", "#1,2;3", "  "])
TOKENS = st.text(alphabet="0123456789+-.eE", max_size=8) | st.sampled_from(
    [
        "1",
        "2.5",
        "-.5",
        "3.",
        "1e5",
        "1e-5",
        "nan",
        "inf",
        "1_0",
        "0x1",
        "1d5",
        "1e999",
        "１",
        "\xa01",
        "a",
        "",
    ]
)


@given(
    rows=st.integers(1, 4).flatmap(lambda k: st.lists(st.lists(FINITE, min_size=k, max_size=k), min_size=1)),
    separator=st.sampled_from([",", ";", "\t", " ", ", ", "  "]),
    form=FORMS,
    header=st.booleans(),
    comment=COMMENT,
    blank=st.sampled_from(["", "\n", "\n# between\n"]),
    ending=st.sampled_from(["\n", "\r\n"]),
)
def test_what_is_written_is_read_back_to_the_bit(
    rows: list[list[float]],
    separator: str,
    form: str,
    header: bool,
    comment: str,
    blank: str,
    ending: str,
) -> None:
    lines = [separator.join(form.format(value) for value in row) + comment + blank for row in rows]
    if header:
        lines.insert(0, separator.join(f"c{index}" for index in range(len(rows[0]))))
    table = read_table("\n".join(lines).replace("\n", ending).encode(), "lake.csv")
    assert table.values.tobytes() == np.array(rows).tobytes()
    assert bool(table.headers[0]) == header


def both_ways(content: bytes) -> tuple[NDArray[np.float64] | None, NDArray[np.float64] | None]:
    """The values by the quick and by the exact way, None where a way does not take the file."""
    text = text_lines(content, "lake.csv", DATA_TABLE)
    separator = separator_of(text.lines)
    headers = ("",) * len(cells_of(text.lines[0], separator))
    layout = table_module._Layout("lake.csv", separator, headers, 1)
    quick = table_module._read_quickly(text, layout, False)
    try:
        return quick, table_module._read_exactly(text, layout, False)
    except UserError:
        return quick, None


@given(
    rows=st.lists(st.lists(TOKENS, min_size=1, max_size=3), min_size=1, max_size=4),
    separator=st.sampled_from([",", ";", "\t", " ", ", "]),
)
def test_the_quick_and_the_exact_way_take_the_same_files(rows: list[list[str]], separator: str) -> None:
    content = "\n".join(["0" + separator + "0", *(separator.join(row) for row in rows)]).encode()
    quick, exact = both_ways(content)
    if exact is None:
        assert quick is None
    elif quick is not None:
        assert quick.tobytes() == exact.tobytes()


@pytest.mark.parametrize("content", [b"1,2\n3,4\n", b"1 2\n 3  4 \n", b"1;2 # a\n", b"1\t2\r\n", b"7\n8\n"])
def test_clean_files_go_the_quick_way(content: bytes) -> None:
    quick, exact = both_ways(content)
    assert quick is not None
    assert exact is not None
    assert np.array_equal(quick, exact)
