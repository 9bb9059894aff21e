"""Many curves read from one upload: what comes out, what is refused, and what no upload can do."""

import io
import struct
import zipfile
from collections.abc import Callable, Mapping

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.measurements.reading import batch, limits
from core.measurements.reading.apart import read_batch_apart
from core.measurements.reading.batch import BatchCurve, read_batch
from core.user_error import UserError

CURVE = b"x,y\n1,10\n2,20\n3,30\n"
MEGABYTE = 1024**2


def packed(members: Mapping[str, bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", method) as archive:
        for name, content in members.items():
            archive.writestr(name, content)
    return buffer.getvalue()


def refused(content: bytes, name: str = "many.zip") -> UserError:
    with pytest.raises(UserError) as caught:
        read_batch(content, name)
    return caught.value


def test_what_cannot_be_seen_is_no_part_of_a_name() -> None:
    table = "x,Flat\u200b,\u202eDeep,\ufeff\n1,1,1,1\n2,2,2,2\n"
    assert [read.name for read in read_batch(table.encode(), "many.csv")] == ["Flat", "Deep", ""]


def faults(found: list[BatchCurve]) -> dict[str, str]:
    """By the name of each curve the code of its refusal, empty where it was read."""
    return {read.name: read.fault.code if read.fault else "" for read in found}


def test_each_file_of_an_archive_is_a_curve_named_by_it() -> None:
    found = read_batch(packed({"flat.csv": CURVE, "class/deep floor.v2.txt": b"3 1\n1 2\n"}), "many.zip")
    assert [(read.name, read.source) for read in found] == [
        ("flat", "flat.csv"),
        ("deep floor.v2", "class/deep floor.v2.txt"),
    ]
    assert found[1].curve is not None
    assert (found[1].curve.x.tolist(), found[1].curve.y.tolist()) == ([1, 3], [2, 1])


def test_each_column_of_a_table_is_a_curve_named_by_its_header() -> None:
    found = read_batch(b"x,flat,deep floor\n2,20,5\n1,10,6\n", "many.csv")
    assert [(read.name, read.source) for read in found] == [("flat", "column 2"), ("deep floor", "column 3")]
    assert found[1].curve is not None
    assert (found[1].curve.x.tolist(), found[1].curve.y.tolist()) == ([1, 2], [6, 5])


def test_columns_without_a_header_have_no_name() -> None:
    assert [read.name for read in read_batch(b"1,10,5\n2,20,6\n", "many.csv")] == ["", ""]


def test_a_theory_may_be_named_like_a_number() -> None:
    assert faults(read_batch(b"x,2D,3D\n1,10,5\n2,20,6\n", "many.csv")) == {"2D": "", "3D": ""}


def test_a_file_that_cannot_be_read_stands_in_no_other_ones_way() -> None:
    members = {"flat.csv": CURVE, "odd.csv": b"x,y\n1,10\n2,windy\n", "one.csv": b"1,2\n", "e.csv": b""}
    found = read_batch(packed(members), "many.zip")
    assert faults(found) == {"flat": "", "odd": "not-a-number", "one": "too-few-points", "e": "empty-file"}
    assert str(found[1].fault).startswith("line 3, column 2 (y): 'windy' is not a number")


def test_a_column_that_cannot_be_read_stands_in_no_other_ones_way() -> None:
    table = b"x,flat,odd,short\n1,10,windy,1\n2,20,21,\n3,30,,3\n"
    found = read_batch(table, "many.csv")
    assert faults(found) == {"flat": "", "odd": "not-a-number", "short": "not-a-number"}
    assert str(found[1].fault).startswith("line 2, column 3 (odd): 'windy' is not a number")
    assert str(found[2].fault).startswith("line 3, column 4 (short): the cell is empty")
    assert found[0].curve is not None
    assert found[0].curve.y.tolist() == [10, 20, 30]


@pytest.mark.parametrize(
    ("table", "code", "line"),
    [
        (b"x,flat\n1,10\nwindy,20\n", "not-a-number", 3),
        (b"x,flat\n1,windy\n2\n", "ragged-row", 3),
        (b"x,flat\n1,10\n2\n", "ragged-row", 3),
        (b"x\n1\n2\n", "no-curves", None),
        (b"", "empty-file", None),
        (bytes(range(256)), "not-text", 1),
    ],
)
def test_what_concerns_all_columns_refuses_the_table(table: bytes, code: str, line: int | None) -> None:
    fault = refused(table, "many.csv")
    assert (fault.code, fault.file, fault.line) == (code, "many.csv", line)


def test_a_name_that_would_be_cut_is_refused() -> None:
    assert list(faults(read_batch(b"x," + b"n" * 200 + b"\n1,2\n2,3\n", "many.csv")).values()) == [
        "name-too-long"
    ]


def test_folders_hidden_files_and_what_a_mac_adds_are_passed_over() -> None:
    members = {
        "class/": b"",
        "class/flat.csv": CURVE,
        "class/.hidden.csv": CURVE,
        ".git/config": b"",
        "__MACOSX/class/._flat.csv": b"",
    }
    assert faults(read_batch(packed(members), "many.zip")) == {"flat": ""}


def test_names_in_an_archive_are_shown_and_never_paths() -> None:
    members = {"../../etc/cron.d/tide.csv": CURVE, "/etc/passwd": CURVE, "C:\\lake\\flat.csv": CURVE}
    found = read_batch(packed(members), "many.zip")
    assert faults(found) == {"tide": "", "passwd": "", "flat": ""}


def test_control_characters_of_a_name_are_left_out() -> None:
    (read,) = read_batch(packed({"class\x07/fl\x1b[2Jat.csv": CURVE}), "many.zip")
    assert (read.name, read.source) == ("fl[2Jat", "class/fl[2Jat.csv")


def encrypted() -> bytes:
    """An archive whose second entry says that it is encrypted."""
    content = bytearray(packed({"flat.csv": CURVE, "secret.csv": CURVE}))
    for mark, offset in ((b"PK\x03\x04", 6), (b"PK\x01\x02", 8)):
        place = content.rindex(mark) + offset
        content[place] |= 1
    return bytes(content)


def lying() -> bytes:
    """An archive with an entry that unpacks to more than it announces."""
    content = bytearray(packed({"flat.csv": CURVE, "bomb.csv": b"1" * 5000}))
    for mark, offset in ((b"PK\x03\x04", 22), (b"PK\x01\x02", 24)):
        place = content.rindex(mark) + offset
        content[place : place + 4] = struct.pack("<I", 10)
    return bytes(content)


def cut_off() -> bytes:
    """An archive whose second entry is damaged."""
    content = bytearray(packed({"flat.csv": CURVE, "bad.csv": CURVE * 50}))
    place = content.rindex(b"PK\x03\x04") + 40
    content[place : place + 8] = b"\xff" * 8
    return bytes(content)


@pytest.mark.parametrize(
    ("make", "codes"),
    [
        (encrypted, {"flat": "", "secret": "encrypted"}),
        (lying, {"flat": "", "bomb": "broken"}),
        (cut_off, {"flat": "", "bad": "broken"}),
        (
            lambda: packed({"flat.csv": CURVE, "in.zip": packed({"a": CURVE})}),
            {"flat": "", "in": "nested-archive"},
        ),
        (
            lambda: packed({"flat.csv": CURVE, "in.csv": packed({"a": CURVE})}),
            {"flat": "", "in": "nested-archive"},
        ),
        (lambda: packed({"odd.csv": CURVE}, zipfile.ZIP_LZMA), {"odd": "unknown-compression"}),
    ],
    ids=["encrypted", "lying about its size", "damaged", "nested", "nested in disguise", "unusual packing"],
)
def test_a_hostile_entry_is_refused_by_itself(make: Callable[[], bytes], codes: dict[str, str]) -> None:
    assert faults(read_batch(make(), "many.zip")) == codes


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (packed({"bomb.csv": b"0" * (60 * MEGABYTE)}), "archive-too-large"),
        (packed({f"{n}.csv": b"0" * (6 * MEGABYTE) for n in range(10)}), "archive-too-large"),
        (packed({f"{n}.csv": b"" for n in range(501)}), "too-many-curves"),
        (CURVE, "not-an-archive"),
        (b"PK\x03\x04" + b"\x00" * 1000, "not-an-archive"),
        (b"", "not-an-archive"),
    ],
    ids=["bomb", "bomb in pieces", "501 files", "a table named zip", "nonsense", "nothing"],
)
def test_a_hostile_archive_is_refused(content: bytes, code: str) -> None:
    assert refused(content).code == code


def test_what_is_unpacked_is_counted_as_it_comes(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(batch, "MAXIMUM_BATCH_BYTES", 3 * len(CURVE))
    members = {f"{n}.csv": CURVE for n in range(3)}
    assert len(read_batch(packed(members), "many.zip")) == 3
    assert refused(packed(members | {"3.csv": CURVE})).code == "archive-too-large"


def test_a_hundred_thousand_entries_are_refused_before_any_is_looked_at(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    entry = b"PK\x01\x02" + b"\x00" * 42
    end = struct.pack("<4s4H2LH", b"PK\x05\x06", 0, 0, 0xFFFF, 0xFFFF, len(entry) * 100_000, 0, 0)
    monkeypatch.delattr(zipfile, "ZipFile")
    assert refused(entry * 100_000 + end).code == "too-many-curves"


def test_more_points_than_are_allowed_in_all_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(batch, "MAXIMUM_BATCH_POINTS", 5)
    assert refused(packed({"a.csv": CURVE, "b.csv": CURVE})).code == "too-many-points"


def test_in_the_child_process_the_same_comes_out() -> None:
    found = read_batch_apart(packed({"flat.csv": CURVE, "odd.csv": b"1,windy\n"}), "../many.zip")
    assert faults(found) == {"flat": "", "odd": "not-a-number"}
    assert found[0].curve is not None
    assert found[0].curve.y.tolist() == [10, 20, 30]
    with pytest.raises(UserError) as caught:
        read_batch_apart(packed({"bomb.csv": b"0" * (60 * MEGABYTE)}), "../many.zip")
    assert (caught.value.code, caught.value.file) == ("archive-too-large", "many.zip")


@settings(max_examples=30, deadline=None)
@given(
    st.lists(
        st.lists(st.floats(allow_nan=False, allow_infinity=False, width=64), min_size=4, max_size=4),
        min_size=1,
        max_size=5,
    )
)
def test_a_table_comes_back_to_the_last_bit(columns: list[list[float]]) -> None:
    header = ",".join(["x", *(f"theory {index}" for index in range(len(columns)))])
    rows = [",".join([str(x), *(repr(column[x]) for column in columns)]) for x in range(4)]
    found = read_batch("\n".join([header, *rows]).encode(), "many.csv")
    for read, column in zip(found, columns, strict=True):
        assert read.curve is not None
        assert np.array_equal(read.curve.y, np.array(column))


def test_the_limits_are_those_that_are_said() -> None:
    assert (limits.MAXIMUM_BATCH_CURVES, limits.MAXIMUM_BATCH_BYTES) == (500, 50 * MEGABYTE)
