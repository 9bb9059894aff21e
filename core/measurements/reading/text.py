"""Bytes to lines: size, encoding and line length are settled before anything is split."""

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.limits import MAXIMUM_BYTES, SPARE_LINES, TableLimits
from core.user_error import UserError

BYTE_ORDER_MARK = b"\xef\xbb\xbf"
CONTROLS = bytes([*range(9), 11, 12, *range(14, 32), 127])
# What a clean table is written with. Whatever else stands in a file makes it be read with care.
NUMERIC = b"0123456789+-.eE,; \t\n"
SAVE_AS_TEXT = "Save the table as plain text in UTF-8, such as CSV"


@dataclass(frozen=True, eq=False)
class TextLines:
    """The lines that hold something, without comments.

    numbers  the number of each line in the file, counting from 1
    stray    every byte outside NUMERIC, in order
    """

    lines: list[str]
    numbers: NDArray[np.int64]
    stray: bytes


def refuse_oversize(content: bytes, file_name: str) -> None:
    """Refuse a file above the limit."""
    if len(content) > MAXIMUM_BYTES:
        size = f"{len(content) / 1024**2:.1f} MB are more than the {MAXIMUM_BYTES // 1024**2} MB allowed"
        raise UserError("file-too-large", size, "Thin the data or write fewer digits", file_name)


def text_lines(content: bytes, file_name: str, limits: TableLimits) -> TextLines:
    """The file's lines, or a refusal of what is no text or beyond the limits."""
    refuse_oversize(content, file_name)
    content = content.removeprefix(BYTE_ORDER_MARK)
    if b"\r" in content:
        content = content.replace(b"\r\n", b"\n").replace(b"\r", b"\n")
    _refuse_binary(content, file_name)
    _refuse_many_lines(content, file_name, limits)
    _refuse_long_line(content, file_name, limits)
    _refuse_other_encoding(content, file_name)
    if b"#" in content:
        content = re.sub(rb"#[^\n]*", b"", content)
    content = content.rstrip(b"\n")
    lines = content.decode("utf-8").split("\n")
    stray = content.translate(None, NUMERIC)
    blank = _blank_lines(content, lines)
    numbers = np.delete(np.arange(1, len(lines) + 1, dtype=np.int64), blank)
    if blank:
        lines = [lines[number - 1] for number in numbers.tolist()]
    return TextLines(lines, numbers, stray)


def _blank_lines(content: bytes, lines: list[str]) -> list[int]:
    """Indices of the lines that hold nothing. Only those are looked at that start as such a line may."""
    characters = np.frombuffer(content + b"\n", dtype=np.uint8)
    starts = np.concatenate([[0], np.flatnonzero(characters[:-1] == ord("\n")) + 1])
    first = characters[starts]
    suspects = np.flatnonzero((first <= ord(" ")) | (first >= 128))
    return [index for index in suspects.tolist() if not lines[index] or lines[index].isspace()]


def too_many_rows(file_name: str, rows: int, limits: TableLimits) -> UserError:
    """The refusal of a table that is too long."""
    reason = f"{rows} rows are more than the {limits.rows} allowed"
    return UserError("too-many-rows", reason, "Thin or bin the data", file_name)


def _refuse_binary(content: bytes, file_name: str) -> None:
    if len(content.translate(None, CONTROLS)) == len(content):
        return
    found = re.search(b"[" + re.escape(CONTROLS) + b"]", content)
    assert found is not None
    line = content.count(b"\n", 0, found.start()) + 1
    reason = f"is not text: it holds the control byte {found.group()[0]:#04x}"
    raise UserError("not-text", reason, SAVE_AS_TEXT, file_name, line)


def _refuse_other_encoding(content: bytes, file_name: str) -> None:
    try:
        content.decode("utf-8")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        reason = f"is not text in UTF-8: it holds the byte {content[error.start]:#04x}"
        raise UserError("not-text", reason, SAVE_AS_TEXT, file_name, line) from None


def _refuse_many_lines(content: bytes, file_name: str, limits: TableLimits) -> None:
    newlines = content.count(b"\n")
    if newlines > limits.rows + SPARE_LINES:
        raise too_many_rows(file_name, newlines, limits)


def _refuse_long_line(content: bytes, file_name: str, limits: TableLimits) -> None:
    ends = np.flatnonzero(np.frombuffer(content, dtype=np.uint8) == ord("\n"))
    lengths = np.diff(ends, prepend=-1, append=len(content)) - 1
    long = np.flatnonzero(lengths > limits.line_length)
    if long.size:
        first = int(long[0])
        reason = f"{lengths[first]} characters are more than the {limits.line_length} that a line may have"
        remedy = "Give each row a line of its own"
        raise UserError("line-too-long", reason, remedy, file_name, first + 1)
