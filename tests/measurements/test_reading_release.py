"""Columns with roles, releases and curves: every refusal with its line and column."""

import numpy as np
import pytest

from core.measurements.reading.curve import read_curve
from core.measurements.reading.release import release_data
from core.measurements.reading.roles import guess_roles, problems_of_roles
from core.measurements.reading.table import Table, read_table
from core.user_error import UserError
from fits.engine.data import Axis, Data, ErrorSource

ROWS = [f"{x},{x * x},0.5" for x in range(1, 11)]


def table_of(*lines: str) -> Table:
    return read_table("\n".join(lines).encode(), "lake.csv")


def release(*lines: str, axis: Axis = Axis.LINEAR, source: ErrorSource = ErrorSource.GIVEN) -> Data:
    table = table_of(*lines)
    return release_data(table, guess_roles(table), axis=axis, source=source)


def refusal(*lines: str, axis: Axis = Axis.LINEAR, source: ErrorSource = ErrorSource.GIVEN) -> UserError:
    with pytest.raises(UserError) as caught:
        release(*lines, axis=axis, source=source)
    assert caught.value.file == "lake.csv"
    return caught.value


def test_columns_are_guessed_by_their_names_in_any_case() -> None:
    table = table_of("Y,LO,High,Sigma,shared:Tide Gauge,wind", "1,2,3,4,5,6")
    assert guess_roles(table) == ("y", "lo", "hi", "error", "shared:Tide Gauge", "")


@pytest.mark.parametrize(
    ("line", "roles"), [("1,2", ("x", "y")), ("1,2,3", ("x", "y", "error")), ("1,2,3,4", ("",) * 4)]
)
def test_columns_without_a_header_are_guessed_by_their_number(line: str, roles: tuple[str, ...]) -> None:
    assert guess_roles(table_of(line)) == roles


@pytest.mark.parametrize(
    ("roles", "codes"),
    [
        (("x", "y"), []),
        (("lo", "hi", "y"), []),
        (("", ""), ["columns-unmapped", "columns-unmapped"]),
        (("x", ""), ["columns-unmapped"]),
        (("x", "y", "y"), ["columns-double"]),
        (("x", "y", "lo"), ["half-a-bin"]),
        (("y", "hi"), ["half-a-bin"]),
        (("x", "y", "shared:a", "shared:a"), ["columns-double"]),
        (("x", "y", "shared:"), ["role-unknown"]),
        (("x", "y", "colour"), ["role-unknown"]),
    ],
)
def test_missing_and_double_roles_are_told(roles: tuple[str, ...], codes: list[str]) -> None:
    assert [problem.code for problem in problems_of_roles(roles)] == codes


def test_a_release_holds_the_numbers_of_its_columns() -> None:
    data = release("error,x,y,shared:tide", *(f"0.5,{x},{x * x},0.1" for x in range(10)))
    assert data.points == 10
    assert data.errors is not None
    assert data.errors.tolist() == [0.5] * 10
    assert data.y[3] == 9.0
    assert data.shared["tide"].tolist() == [0.1] * 10


def test_bins_without_x_stand_at_their_middle() -> None:
    data = release("lo,hi,y,error", *(f"{x},{x + 2},1,1" for x in range(8)))
    assert data.x.tolist() == [x + 1.0 for x in range(8)]
    assert data.low is not None


def test_an_error_of_zero_is_named() -> None:
    fault = refusal("# invented", "x,y,error", *ROWS[:4], "5,25,0", *ROWS[5:])
    assert (fault.code, fault.line, fault.column, fault.column_name) == ("error-not-positive", 7, 3, "error")


def test_a_reversed_bin_is_named() -> None:
    rows = [f"{x},{x + 1},1,1" for x in range(8)]
    rows[5] = "6,6,1,1"
    fault = refusal("lo,hi,y,error", *rows)
    assert (fault.code, fault.line, fault.column) == ("bin-reversed", 7, 1)


def test_fewer_than_eight_points_are_refused() -> None:
    assert refusal(*ROWS[:7]).code == "too-few-points"


def test_equal_x_throughout_are_refused() -> None:
    fault = refusal("x,y,error", *(["1,2,3"] * 8))
    assert (fault.code, fault.column) == ("all-x-equal", 1)


def test_x_of_zero_on_a_log_axis_is_named() -> None:
    fault = refusal("0,1,1", *ROWS, axis=Axis.LOG)
    assert (fault.code, fault.line, fault.column) == ("x-not-positive", 1, 1)


def test_half_a_count_is_named() -> None:
    fault = refusal("x,y", *(f"{x},3" for x in range(8)), "9,2.5", source=ErrorSource.COUNTS)
    assert (fault.code, fault.line, fault.column) == ("not-a-count", 10, 2)


def test_missing_errors_are_told() -> None:
    assert refusal("x,y", *(f"{x},3" for x in range(8))).code == "no-errors"


def test_a_curve_is_sorted_by_x() -> None:
    curve = read_curve(b"3,30\n1,10\n2,20\n", "flat.csv", "flat floor")
    assert (curve.name, curve.x.tolist(), curve.y.tolist()) == ("flat floor", [1, 2, 3], [10, 20, 30])


@pytest.mark.parametrize(
    "content",
    [b"frequency,power\n1,10\n2,20\n", b"y,f\n10,1\n20,2\n", b"note,y,x\n0,10,1\n0,20,2\n", b"1 10\n2 20\n"],
)
def test_a_curve_is_two_columns_or_names_them(content: bytes) -> None:
    curve = read_curve(content, "flat.csv", "flat floor")
    assert (curve.x.tolist(), curve.y.tolist()) == ([1, 2], [10, 20])


def test_a_repeated_x_of_a_curve_is_named_with_its_line() -> None:
    with pytest.raises(UserError) as caught:
        read_curve(b"x,y\n2,1\n1,1\n\n2,3\n", "../flat.csv", "flat floor")
    fault = caught.value
    assert (fault.code, fault.file, fault.line, fault.column) == ("repeated-x", "flat.csv", 5, 1)


@pytest.mark.parametrize("content", [b"1,2,3\n4,5,6\n", b"1\n2\n", b"x,x\n1,2\n3,4\n"])
def test_a_curve_with_unclear_columns_is_refused(content: bytes) -> None:
    with pytest.raises(UserError) as caught:
        read_curve(content, "flat.csv", "flat floor")
    assert caught.value.code == "columns-unmapped"


def test_a_covariance_that_the_engine_refuses_is_laid_to_its_file() -> None:
    table = table_of(*ROWS)
    with pytest.raises(UserError) as caught:
        release_data(table, guess_roles(table), covariance=np.eye(9), covariance_name="errors.npy")
    assert (caught.value.code, caught.value.file) == ("covariance-shape", "errors.npy")
