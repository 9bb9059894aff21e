"""Many curves in one upload: a zip archive of curve files, or a table with a column for each curve.

Names in an archive are shown and never used as paths. Folders, hidden files and what a Mac adds are passed over.
What is wrong with one curve is said of that one; the others are read all the same.
"""

import hashlib
import io
import re
import zipfile
import zlib
from collections.abc import Iterator
from dataclasses import dataclass

from core.measurements.reading.batch_table import columns_of
from core.measurements.reading.curve import read_curve
from core.measurements.reading.limits import (
    MAXIMUM_ARCHIVE_ENTRIES,
    MAXIMUM_BATCH_BYTES,
    MAXIMUM_BATCH_CURVES,
    MAXIMUM_BATCH_POINTS,
    MAXIMUM_SOURCE_LENGTH,
)
from core.measurements.reading.names import safe_name, visible
from core.measurements.reading.text import refuse_oversize
from core.user_error import UserError
from fits.engine.data import CurveTable

ARCHIVE_STARTS = (b"PK\x03\x04", b"PK\x05\x06")
ENTRY_MARK = b"PK\x01\x02"
ARCHIVE_ENDINGS = (".zip", ".gz", ".tgz", ".bz2", ".xz", ".zst", ".7z", ".rar", ".tar", ".jar")
ENDING = re.compile(r"\.[A-Za-z][A-Za-z0-9]{0,5}$")
ENCRYPTED = 0x1
READABLE = (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED)
# What a broken archive makes zipfile raise.
BROKEN = (zipfile.BadZipFile, zlib.error, NotImplementedError, RuntimeError, EOFError, OSError, ValueError)
PIECE = 1024 * 1024


@dataclass(frozen=True, eq=False)
class BatchCurve:
    """One curve of an upload: read, or refused.

    name    of the theory, as it is given
    source  the file in the archive, or the column of the table
    sha256  of that file, or of the whole table
    """

    name: str
    source: str
    sha256: str
    curve: CurveTable | None = None
    fault: UserError | None = None


def read_batch(content: bytes, file_name: str) -> list[BatchCurve]:
    """Each curve of the upload, in order. A UserError where there is no telling one from another."""
    file_name = safe_name(file_name)
    refuse_oversize(content, file_name)
    is_archive = content.startswith(ARCHIVE_STARTS) or file_name.lower().endswith(".zip")
    curves = _of_archive(content, file_name) if is_archive else _of_table(content, file_name)
    found, points = [], 0
    for read in curves:
        found.append(read)
        points += 0 if read.curve is None else read.curve.x.size
        if points > MAXIMUM_BATCH_POINTS:
            reason = f"more than the {MAXIMUM_BATCH_POINTS} points allowed in all curves together"
            raise UserError("too-many-points", reason, "Thin the curves or send fewer at a time", file_name)
    return found


def _of_table(content: bytes, file_name: str) -> Iterator[BatchCurve]:
    sha256 = hashlib.sha256(content).hexdigest()
    for column in columns_of(content, file_name):
        yield BatchCurve(
            column.name, f"column {column.number}", sha256, curve=column.curve, fault=column.fault
        )


def _of_archive(content: bytes, file_name: str) -> Iterator[BatchCurve]:
    # Counted in the bytes: opening an archive builds something for each of its entries.
    if content.count(ENTRY_MARK) > MAXIMUM_ARCHIVE_ENTRIES:
        raise _too_many(file_name)
    try:
        archive = zipfile.ZipFile(io.BytesIO(content))
    except BROKEN as error:
        remedy = "Pack the files again, or give one text table"
        raise UserError("not-an-archive", "is no zip archive that can be read", remedy, file_name) from error
    with archive:
        entries = [entry for entry in archive.infolist() if _counts(entry)]
        if len(entries) > MAXIMUM_BATCH_CURVES:
            raise _too_many(file_name)
        if sum(entry.file_size for entry in entries) > MAXIMUM_BATCH_BYTES:
            raise _too_large(file_name)
        left = MAXIMUM_BATCH_BYTES
        for entry in entries:
            source = _shown_path(entry.filename)
            name = ENDING.sub("", safe_name(entry.filename)).strip()
            try:
                member = _unpacked(archive, entry, left, file_name)
            except UserError as error:
                if error.code == "archive-too-large":
                    raise
                yield BatchCurve(name, source, "", fault=error)
                continue
            left -= len(member)
            sha256 = hashlib.sha256(member).hexdigest()
            try:
                yield BatchCurve(name, source, sha256, curve=read_curve(member, entry.filename, name))
            except UserError as error:
                error.file = ""
                yield BatchCurve(name, source, sha256, fault=error)


def _unpacked(archive: zipfile.ZipFile, entry: zipfile.ZipInfo, left: int, file_name: str) -> bytes:
    """The bytes of one entry, at most so many as are left; counted as they come, whatever the entry announces."""
    if entry.flag_bits & ENCRYPTED:
        raise UserError("encrypted", "is encrypted", "Pack it without a password")
    if entry.filename.lower().endswith(ARCHIVE_ENDINGS):
        raise UserError("nested-archive", "is an archive in the archive", "Put its files in directly")
    if entry.compress_type not in READABLE:
        raise UserError(
            "unknown-compression", "is packed in an unusual way", "Pack it as common zip files are"
        )
    out = bytearray()
    try:
        with archive.open(entry) as member:
            while piece := member.read(PIECE):
                out += piece
                if len(out) > left:
                    raise _too_large(file_name)
    except BROKEN as error:
        raise UserError("broken", "is broken in the archive", "Pack the files again") from error
    if out.startswith(ARCHIVE_STARTS):
        raise UserError("nested-archive", "is an archive in the archive", "Put its files in directly")
    return bytes(out)


def _counts(entry: zipfile.ZipInfo) -> bool:
    parts = re.split(r"[/\\]", entry.filename)
    is_hidden = any(part.startswith(".") and part not in {".", ".."} for part in parts)
    return not entry.is_dir() and not is_hidden and "__MACOSX" not in parts


def _shown_path(path: str) -> str:
    plain = visible(path)
    return plain if len(plain) <= MAXIMUM_SOURCE_LENGTH else "…" + plain[1 - MAXIMUM_SOURCE_LENGTH :]


def _too_many(file_name: str) -> UserError:
    reason = f"holds more than the {MAXIMUM_BATCH_CURVES} curves allowed"
    return UserError("too-many-curves", reason, "Send them in several parts", file_name)


def _too_large(file_name: str) -> UserError:
    reason = f"holds more than the {MAXIMUM_BATCH_BYTES // 1024**2} MB allowed, unpacked"
    return UserError("archive-too-large", reason, "Thin the curves or send them in several parts", file_name)
