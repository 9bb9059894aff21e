"""Window matrices from .npy and from text: a grid of x, then a row of weights for each point."""

import numpy as np
import pytest

from core.measurements.reading.apart import read_windows_apart
from core.measurements.reading.limits import WINDOWS_TABLE
from core.measurements.reading.windows import read_windows, windows_of
from core.user_error import UserError
from tests.measurements.test_reading_covariance import npy, npy_with_header, text

N = 9
MATRIX = np.vstack([np.linspace(0.0, 1.0, 5), np.random.default_rng(1).uniform(0.1, 1.0, (N, 5))])


def refusal(content: bytes, points: int = N) -> UserError:
    with pytest.raises(UserError) as caught:
        read_windows(content, "../slit.npy", points)
    assert caught.value.file == "slit.npy"
    return caught.value


def changed(row: int, column: int, value: float) -> np.ndarray:
    matrix = MATRIX.copy()
    matrix[row, column] = value
    return matrix


@pytest.mark.parametrize(
    "content",
    [npy(MATRIX), npy(np.asfortranarray(MATRIX)), npy(MATRIX.astype(">f8")), text(MATRIX)],
    ids=["C order", "Fortran order", "big-endian", "text"],
)
def test_windows_are_read_from_npy_and_from_text(content: bytes) -> None:
    found = windows_of(read_windows(content, "slit.npy", N))
    assert np.array_equal(found.grid, MATRIX[0])
    assert np.array_equal(found.weights, MATRIX[1:])


def test_the_child_process_reads_the_same() -> None:
    assert np.array_equal(read_windows_apart(text(MATRIX), "slit.txt", N), MATRIX)


@pytest.mark.parametrize("shape", [(N, 5), (N + 2, 5), (N + 1,), (N + 1, 1), (1, N + 1, 5), ()])
def test_a_matrix_that_does_not_fit_the_points_is_refused(shape: tuple[int, ...]) -> None:
    fault = refusal(npy(np.ones(shape)))
    assert fault.code == "windows-shape"
    assert "9 rows of weights" in fault.remedy


def test_a_grid_that_does_not_increase_is_named_by_line_and_column() -> None:
    fault = refusal(b"# the slit\n" + text(changed(0, 3, 0.5)))
    assert (fault.code, fault.line, fault.column) == ("windows-grid", 2, 4)
    fault = refusal(npy(changed(0, 3, 0.2)))
    assert (fault.code, fault.line, fault.column) == ("windows-grid", None, 4)


def test_a_point_that_sees_nothing_is_named_by_line() -> None:
    matrix = MATRIX.copy()
    matrix[4] = 0.0
    fault = refusal(b"# the slit\n\n" + text(matrix))
    assert (fault.code, fault.line) == ("windows-blind", 7)
    assert "point 4" in fault.reason


@pytest.mark.parametrize(("value", "code"), [(np.nan, "not-a-number"), (np.inf, "infinite")])
def test_a_value_that_is_not_finite_is_named(value: float, code: str) -> None:
    fault = refusal(npy(changed(2, 4, value)))
    assert (fault.code, fault.column) == (code, 5)
    fault = refusal(text(changed(2, 4, value)))
    assert (fault.code, fault.line, fault.column) == (code, 3, 5)


def test_a_row_with_a_weight_too_few_is_named_by_line() -> None:
    rows = text(MATRIX).split(b"\n")
    rows[3] = rows[3].rsplit(b" ", 1)[0]
    assert (refusal(b"\n".join(rows)).code, refusal(b"\n".join(rows)).line) == ("ragged-row", 4)


@pytest.mark.parametrize("shape", [(N + 1, 500_000), (65536, 65536)])
def test_a_header_asking_for_more_than_is_allowed_is_refused_unread(shape: tuple[int, int]) -> None:
    header = f"{{'descr': '<f8', 'fortran_order': False, 'shape': {shape}, }}"
    fault = refusal(npy_with_header(header), shape[0] - 1)
    assert fault.code == "windows-too-large"


def test_a_header_announcing_more_than_follows_is_refused() -> None:
    header = f"{{'descr': '<f8', 'fortran_order': False, 'shape': ({N + 1}, 20000), }}"
    assert refusal(npy_with_header(header, b"12345678")).code == "npy-broken"


def test_a_negative_length_is_refused() -> None:
    header = f"{{'descr': '<f8', 'fortran_order': False, 'shape': ({N + 1}, -5), }}"
    assert refusal(npy_with_header(header)).code == "npy-broken"


def test_text_with_more_numbers_than_allowed_is_refused_before_they_are_read(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(np, "loadtxt", lambda *_, **__: pytest.fail("it was read"))
    row = b"1 " * 20_000 + b"\n"
    assert refusal(row * 501, 500).code == "too-many-cells"
    assert refusal(b"1 " * 20_001 + b"\n", 1).code == "too-many-columns"
    assert WINDOWS_TABLE.cells == 10_000_000


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (npy(np.array([[print]], dtype=object), allow_pickle=True), "npy-pickle"),
        (npy(np.zeros((N + 1, 5), dtype=complex)), "npy-type"),
        (b"\x93NUMPY\x01\x00\xff\xff" + b"{" * 70_000, "npy-broken"),
        (bytes(range(256)), "not-text"),
        (b"x,y\n1,2\n", "not-a-number"),
        (b"", "empty-file"),
    ],
)
def test_a_hostile_file_is_refused(content: bytes, code: str) -> None:
    assert refusal(content).code == code
