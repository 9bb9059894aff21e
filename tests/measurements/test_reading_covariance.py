"""Covariance matrices from .npy and from text."""

import io
import struct
from typing import Any

import numpy as np
import pytest

from core.measurements.reading.covariance import check_positive_definite, read_covariance
from core.user_error import UserError

N = 9
MATRIX = 0.4 ** np.abs(np.subtract.outer(np.arange(N), np.arange(N)))


def npy(array: Any, *, allow_pickle: bool = False) -> bytes:
    buffer = io.BytesIO()
    np.save(buffer, array, allow_pickle=allow_pickle)
    return buffer.getvalue()


def npy_with_header(header: str, numbers: bytes = b"") -> bytes:
    encoded = header.encode().ljust(117) + b"\n"
    return b"\x93NUMPY\x01\x00" + struct.pack("<H", len(encoded)) + encoded + numbers


def text(matrix: Any) -> bytes:
    return "\n".join(" ".join(f"{float(value)!r}" for value in row) for row in matrix).encode()


def refusal(content: bytes, points: int = N) -> UserError:
    with pytest.raises(UserError) as caught:
        read_covariance(content, "../errors.npy", points)
    assert caught.value.file == "errors.npy"
    return caught.value


@pytest.mark.parametrize(
    "content",
    [npy(MATRIX), npy(np.asfortranarray(MATRIX)), npy(MATRIX.astype(">f8")), text(MATRIX)],
    ids=["C order", "Fortran order", "big-endian", "text"],
)
def test_a_covariance_is_read_from_npy_and_from_text(content: bytes) -> None:
    matrix = read_covariance(content, "errors.npy", N)
    assert matrix.dtype == np.float64
    assert np.array_equal(matrix, MATRIX)


def test_whole_numbers_make_a_covariance_too() -> None:
    assert read_covariance(npy(np.eye(N, dtype=np.int16)), "errors.npy", N).sum() == N


def test_a_header_asking_for_32_gib_is_refused_by_its_shape() -> None:
    header = "{'descr': '<f8', 'fortran_order': False, 'shape': (65536, 65536), }"
    assert refusal(npy_with_header(header)).code == "covariance-shape"


def test_a_header_announcing_more_than_follows_is_refused() -> None:
    header = "{'descr': '<f8', 'fortran_order': False, 'shape': (5000, 5000), }"
    fault = refusal(npy_with_header(header, b"12345678"), 5000)
    assert (fault.code, "200000000 bytes" in fault.reason) == ("npy-broken", True)


def test_bytes_after_the_matrix_are_refused() -> None:
    assert refusal(npy(MATRIX) + b"more").code == "npy-broken"


def test_a_pickle_is_refused_without_being_opened() -> None:
    class Opened:
        def __reduce__(self) -> tuple[Any, ...]:
            return (pytest.fail, ("the pickle was opened",))

    content = npy(np.array([[Opened()] * N] * N, dtype=object), allow_pickle=True)
    assert refusal(content).code == "npy-pickle"


@pytest.mark.parametrize("dtype", ["complex128", "bool", "U4", "datetime64[s]", "f8,f8"])
def test_what_is_no_real_number_is_refused(dtype: str) -> None:
    assert refusal(npy(np.zeros((N, N), dtype=dtype))).code == "npy-type"


@pytest.mark.parametrize(
    "header",
    [
        "{'descr': '<f8', 'fortran_order': False}",
        "{'descr': 'nonsense', 'fortran_order': False, 'shape': (9, 9), }",
        "__import__('os').getcwd()",
        "(" * 110,
        "",
    ],
)
def test_a_header_of_nonsense_is_refused(header: str) -> None:
    assert refusal(npy_with_header(header)).code == "npy-broken"


@pytest.mark.parametrize(
    "content", [b"\x93NUMPY", b"\x93NUMPY\x09\x00", b"\x93NUMPY\x02\x00\xff\xff\xff\xff{"]
)
def test_a_header_cut_off_is_refused(content: bytes) -> None:
    assert refusal(content).code == "npy-broken"


@pytest.mark.parametrize("shape", [(N,), (N, N + 1), (1, N, N), (N + 1, N + 1), ()])
def test_a_matrix_that_does_not_fit_the_points_is_refused(shape: tuple[int, ...]) -> None:
    assert refusal(npy(np.ones(shape))).code == "covariance-shape"


def test_text_that_does_not_fit_the_points_is_refused() -> None:
    assert refusal(text(MATRIX), 8).code == "covariance-shape"


def test_more_points_than_a_covariance_may_have_are_refused_unread() -> None:
    assert refusal(b"\0", 5001).code == "covariance-too-large"


@pytest.mark.parametrize(("value", "code"), [(np.nan, "not-a-number"), (np.inf, "infinite")])
def test_a_value_that_is_not_finite_is_named(value: float, code: str) -> None:
    matrix = MATRIX.copy()
    matrix[2, 4] = value
    fault = refusal(npy(matrix))
    assert (fault.code, fault.column) == (code, 5)
    assert "row 3" in fault.reason
    fault = refusal(b"# correlated\n" + text(matrix))
    assert (fault.code, fault.line, fault.column) == (code, 4, 5)


def test_an_asymmetric_matrix_is_refused_with_the_worst_cell() -> None:
    matrix = MATRIX.copy()
    matrix[2, 4] += 0.25
    fault = refusal(text(matrix))
    assert (fault.code, fault.line, fault.column) == ("covariance-asymmetric", 3, 5)
    assert "0.41" in fault.reason
    assert "0.16" in fault.reason


def test_a_matrix_that_is_not_positive_definite_is_refused_with_its_smallest_eigenvalue() -> None:
    matrix = np.eye(N)
    matrix[0, 0] = -0.25
    with pytest.raises(UserError) as caught:
        check_positive_definite(matrix, "errors.npy")
    assert caught.value.code == "covariance-not-positive-definite"
    assert "-0.25" in caught.value.reason
    check_positive_definite(MATRIX, "errors.npy")
