"""Tables from text: what is taken, and what is refused with its place."""

import numpy as np
import pytest

from core.measurements.reading.limits import MAXIMUM_ROWS
from core.measurements.reading.names import safe_name
from core.measurements.reading.stored import from_bytes, to_bytes
from core.measurements.reading.table import read_table
from core.user_error import UserError


def refusal(content: bytes, file_name: str = "lake.csv") -> UserError:
    with pytest.raises(UserError) as caught:
        read_table(content, file_name)
    return caught.value


@pytest.mark.parametrize("separator", [",", ";", "\t", " ", "   ", ", ", " ; "])
def test_every_separator_gives_the_same_numbers(separator: str) -> None:
    rows = [["x", "y"], ["1", "2.5"], ["-3e-2", "+.5"]]
    content = "\n".join(separator.join(row) for row in rows).encode()
    table = read_table(content, "lake.csv")
    assert table.headers == ("x", "y")
    assert table.values.tolist() == [[1.0, 2.5], [-0.03, 0.5]]


def test_comments_and_blank_lines_are_skipped_and_lines_keep_their_numbers() -> None:
    content = b"# a made-up lake \xe2\x80\x94 invented\n\nx,y # names\n1,2\n   \n3,4 # windy\n"
    table = read_table(content, "lake.csv")
    assert table.headers == ("x", "y")
    assert table.lines.tolist() == [4, 6]
    assert table.values.tolist() == [[1, 2], [3, 4]]


@pytest.mark.parametrize("ending", [b"\n", b"\r\n", b"\r"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_line_endings_and_byte_order_mark_change_nothing(ending: bytes, mark: bytes) -> None:
    table = read_table(mark + ending.join([b"x,y", b"1,2", b"3,4", b""]), "lake.csv")
    assert table.headers == ("x", "y")
    assert table.lines.tolist() == [2, 3]


def test_columns_without_a_header_are_named_by_their_place() -> None:
    table = read_table(b"1 2\n3 4\n", "lake.txt")
    assert table.headers == ("", "")
    assert table.titles == ("column 1", "column 2")


def test_quoted_names_may_hold_the_separator() -> None:
    assert read_table(b'"x, per hour","y"\n1,2\n', "lake.csv").headers == ("x, per hour", "y")


@pytest.mark.parametrize(
    ("cell", "code", "said"),
    [
        ("", "not-a-number", "the cell is empty"),
        ("abc", "not-a-number", "'abc' is not a number"),
        ("nan", "not-a-number", "'nan' is not a number"),
        ("inf", "infinite", "'inf' is infinite"),
        ("-Infinity", "infinite", "'-Infinity' is infinite"),
        ("1e999", "infinite", "'1e999' is infinite"),
        ("=1+1", "not-a-number", "'=1+1' is not a number"),
        ('=HYPERLINK("http://lake.example")', "not-a-number", "'=HYPERLINK(\"http://lake.examp…'"),
        ("0x1F", "not-a-number", "'0x1F' is not a number"),
        ("1_000", "not-a-number", "'1_000' is not a number"),
        ("1d5", "not-a-number", "'1d5' is not a number"),
        ("١", "not-a-number", "'١' is not a number"),
        ("1.2.3", "not-a-number", "'1.2.3' is not a number"),
        ("\u202e7", "not-a-number", "'\\u202e7' is not a number"),
    ],
)
def test_a_cell_that_is_no_finite_number_is_named(cell: str, code: str, said: str) -> None:
    fault = refusal(f"x,y\n1,2\n3,{cell}\n5,bad\n".encode())
    assert (fault.code, fault.file, fault.line, fault.column) == (code, "lake.csv", 3, 2)
    assert fault.column_name == "y"
    assert said in fault.reason


@pytest.mark.parametrize("first", ["nan,inf", "=1+1,=2+2", "1_000,0x1F", "x,1"])
def test_a_first_line_with_values_is_no_header(first: str) -> None:
    assert refusal(f"{first}\n1,2\n".encode()).line == 1


@pytest.mark.parametrize(
    "content", [b"1,5;2,0\n", b"x;y\n1,5;2,0\n", b"1,5 2,0\n1,5 2,0\n", b"x\ty\n1,5\t2,0\n"]
)
def test_decimal_commas_are_refused_with_the_number_rewritten(content: bytes) -> None:
    fault = refusal(content)
    assert (fault.code, fault.column) == ("decimal-comma", 1)
    assert fault.remedy == "Write decimal points: 1.5"


def test_decimal_commas_between_commas_are_suspected_from_the_number_of_cells() -> None:
    fault = refusal(b"x,y\n1,5,2,0\n")
    assert (fault.code, fault.line) == ("ragged-row", 2)
    assert "decimal commas" in fault.remedy


def test_a_row_with_other_columns_than_the_first_is_named() -> None:
    fault = refusal(b"x,y\n1,2\n# windy\n1,2,3\n")
    assert str(fault) == ("lake.csv, line 4: 3 cells where line 1 has 2. Give every row the same columns")


def test_the_first_of_several_faults_is_named() -> None:
    assert refusal(b"x,y\n1,2\n1,a\n1\n").line == 3


@pytest.mark.parametrize("content", [b"", b"\n \n", b"# nothing\n", b"x,y\n", b"\xef\xbb\xbf"])
def test_a_file_without_rows_is_empty(content: bytes) -> None:
    assert refusal(content).code == "empty-file"


def test_more_columns_than_allowed_are_refused() -> None:
    assert refusal(b",".join([b"1"] * 201)).code == "too-many-columns"


def test_text_in_another_encoding_is_refused_with_its_line() -> None:
    fault = refusal("x,y\n1,2 # 5 °C\n".encode("latin-1"))
    assert (fault.code, fault.line) == ("not-text", 2)


def test_more_rows_than_allowed_are_refused_before_they_are_parsed() -> None:
    assert refusal(b"1\n" * (MAXIMUM_ROWS + 20_000)).code == "too-many-rows"


@pytest.mark.parametrize(
    ("given", "kept"),
    [
        ("../../etc/passwd", "passwd"),
        ("C:\\data\\lake.csv", "lake.csv"),
        ("lake\x00\n\u202e.csv", "lake.csv"),
        ("..", "unnamed"),
        ("", "unnamed"),
        ("a" * 300, "a" * 200),
    ],
)
def test_only_a_display_name_is_kept_of_a_file_name(given: str, kept: str) -> None:
    assert safe_name(given) == kept
    assert safe_name(kept) == kept


def test_stored_arrays_come_back_as_they_were() -> None:
    values = np.array([[1.0, -2.5e-300], [np.pi, 4.0]])
    assert np.array_equal(from_bytes(memoryview(to_bytes(values))), values)
