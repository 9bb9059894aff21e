"""Reading uploads in a child process with limits, so that no file can exhaust or stop the server.

The child gets a file on its standard input (a line of JSON, then the upload) and answers in another on its
standard output (a line of JSON, then arrays as .npy). Both files are anonymous: they vanish with the call.
"""

import json
import logging
import os
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import IO, Any

import numpy as np
from numpy.typing import NDArray

from core.measurements.reading.batch import BatchCurve
from core.measurements.reading.limits import CHILD_WALL_SECONDS
from core.measurements.reading.names import safe_name
from core.measurements.reading.table import Table
from core.measurements.reading.text import refuse_oversize
from core.user_error import UserError
from fits.engine.data import CurveTable

logger = logging.getLogger(__name__)

CHECKOUT = Path(__file__).resolve().parents[3]
CHILD = "core.measurements.reading.child"
# Nothing of the server's environment, which may hold secrets, is passed on.
ENVIRONMENT = {
    "PATH": os.defpath,
    "LANG": "C.UTF-8",
    "OMP_NUM_THREADS": "1",
    "OPENBLAS_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
}


def read_table_apart(content: bytes, file_name: str) -> Table:
    """`read_table` in a child process."""
    reply, (values, lines) = _read("table", content, file_name)
    return Table(reply["file_name"], tuple(reply["headers"]), values, lines)


def read_curve_apart(content: bytes, file_name: str, name: str) -> CurveTable:
    """`read_curve` in a child process."""
    _, (x, y) = _read("curve", content, file_name, name=name)
    x.flags.writeable = y.flags.writeable = False
    return CurveTable(name, x, y)


def read_batch_apart(content: bytes, file_name: str) -> list[BatchCurve]:
    """`read_batch` in a child process."""
    reply, arrays = _read("batch", content, file_name)
    columns = iter(arrays)
    found = []
    for words in reply["curves"]:
        fault = words.pop("fault")
        if fault is not None:
            found.append(BatchCurve(**words, fault=UserError(**fault)))
            continue
        x, y = next(columns), next(columns)
        x.flags.writeable = y.flags.writeable = False
        found.append(BatchCurve(**words, curve=CurveTable(words["name"], x, y)))
    return found


def read_covariance_apart(content: bytes, file_name: str, points: int) -> NDArray[np.float64]:
    """`read_covariance` and `check_positive_definite` in a child process."""
    _, (matrix,) = _read("covariance", content, file_name, points=points)
    return matrix


def read_windows_apart(content: bytes, file_name: str, points: int) -> NDArray[np.float64]:
    """`read_windows` in a child process."""
    _, (matrix,) = _read("windows", content, file_name, points=points)
    return matrix


def _read(
    kind: str, content: bytes, file_name: str, **arguments: str | int
) -> tuple[dict[str, Any], list[NDArray[Any]]]:
    """What the child makes of the upload; a UserError where it refuses or does not survive it."""
    file_name = safe_name(file_name)
    refuse_oversize(content, file_name)
    request = {"kind": kind, "file_name": file_name, "arguments": arguments}
    with (
        tempfile.TemporaryFile() as given,
        tempfile.TemporaryFile() as answer,
        tempfile.TemporaryFile() as complaint,
    ):
        given.write(json.dumps(request).encode() + b"\n")
        given.write(content)
        given.seek(0)
        try:
            done = _run_child(given, answer, complaint)
        except subprocess.TimeoutExpired:
            logger.warning("reading a %s took longer than %d s", kind, CHILD_WALL_SECONDS)
            raise _unreadable(file_name) from None
        if done != 0:
            complaint.seek(max(0, complaint.seek(0, os.SEEK_END) - 2000))
            logger.warning(
                "reading a %s ended with %d: %s", kind, done, complaint.read().decode(errors="replace")
            )
            raise _unreadable(file_name)
        answer.seek(0)
        reply: dict[str, Any] = json.loads(answer.readline())
        if "error" in reply:
            raise UserError(**reply["error"])
        return reply, [np.load(answer, allow_pickle=False) for _ in range(reply["arrays"])]


def _run_child(given: IO[bytes], answer: IO[bytes], complaint: IO[bytes]) -> int:
    """Run the child to its end and give its exit code; killed when it takes too long."""
    done = subprocess.run(  # noqa: S603 - a fixed command without a shell
        [sys.executable, "-m", CHILD],
        stdin=given,
        stdout=answer,
        stderr=complaint,
        cwd=CHECKOUT,
        env=ENVIRONMENT,
        timeout=CHILD_WALL_SECONDS,
        check=False,
    )
    return done.returncode


def _unreadable(file_name: str) -> UserError:
    return UserError(
        "unreadable",
        "could not be read within the limits of memory and time",
        "Thin the table, or check that the file is what it should be",
        file_name,
    )
