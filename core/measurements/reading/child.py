"""The child process that reads one upload: `python -m core.measurements.reading.child`."""

import dataclasses
import json
import resource
import sys
from typing import TYPE_CHECKING, Any, BinaryIO

from core.measurements.reading import limits
from core.user_error import UserError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Answer = tuple[dict[str, Any], list[NDArray[Any]]]


def set_limits() -> None:
    """Bound what this process may take; before NumPy is loaded, whose libraries set themselves up by it."""
    for kind, amount in (
        (resource.RLIMIT_AS, limits.CHILD_ADDRESS_SPACE),
        (resource.RLIMIT_CPU, limits.CHILD_CPU_SECONDS),
        (resource.RLIMIT_FSIZE, limits.CHILD_FILE_BYTES),
        (resource.RLIMIT_NOFILE, limits.CHILD_OPEN_FILES),
        (resource.RLIMIT_CORE, 0),
    ):
        hard = resource.getrlimit(kind)[1]
        bound = amount if hard == resource.RLIM_INFINITY else min(amount, hard)
        resource.setrlimit(kind, (bound, bound))


def answer(kind: str, content: bytes, file_name: str, arguments: dict[str, Any]) -> "Answer":
    """Read the upload as this kind."""
    if kind == "table":
        from core.measurements.reading.table import read_table

        table = read_table(content, file_name, **arguments)
        return {"file_name": table.file_name, "headers": table.headers}, [table.values, table.lines]
    if kind == "curve":
        from core.measurements.reading.curve import read_curve

        curve = read_curve(content, file_name, **arguments)
        return {}, [curve.x, curve.y]
    if kind == "covariance":
        from core.measurements.reading.covariance import check_positive_definite, read_covariance

        matrix = read_covariance(content, file_name, **arguments)
        check_positive_definite(matrix, file_name)
        return {}, [matrix]
    if kind == "windows":
        from core.measurements.reading.windows import read_windows

        return {}, [read_windows(content, file_name, **arguments)]
    if kind == "batch":
        return _batch(content, file_name)
    raise ValueError(f"nothing reads a {kind}")


def _batch(content: bytes, file_name: str) -> "Answer":
    """Each curve in words, and the numbers of those that were read."""
    from core.measurements.reading.batch import read_batch

    curves = read_batch(content, file_name)
    words = [
        {
            "name": read.name,
            "source": read.source,
            "sha256": read.sha256,
            "fault": None if read.fault is None else dataclasses.asdict(read.fault),
        }
        for read in curves
    ]
    arrays = [column for read in curves if read.curve for column in (read.curve.x, read.curve.y)]
    return {"curves": words}, arrays


def main(given: BinaryIO, out: BinaryIO) -> None:
    """Read the request, answer it."""
    set_limits()
    request = json.loads(given.readline())
    try:
        reply, arrays = answer(request["kind"], given.read(), request["file_name"], request["arguments"])
    except UserError as error:
        out.write(json.dumps({"error": dataclasses.asdict(error)}).encode() + b"\n")
        return
    import numpy as np

    out.write(json.dumps({**reply, "arrays": len(arrays)}).encode() + b"\n")
    for array in arrays:
        np.save(out, array, allow_pickle=False)


if __name__ == "__main__":
    main(sys.stdin.buffer, sys.stdout.buffer)
