"""The peak memory of a fit, each measured in a process of its own.

Run as `python -m fits.management.bench.memory POINTS`: fits so many made-up points, none where 0, and prints its
largest resident size in bytes.
"""

import re
import subprocess
import sys
from pathlib import Path

from threadpoolctl import threadpool_limits

from fits.engine.data import validated_data
from fits.management.bench.case import AtMost, Row, fitted, made_up

POINTS = 1_000_000
ARRAYS = 3  # x, y, errors
ALLOWED_BYTES = 300 * 10**6


def peak_of_a_fit(scale: int) -> Row:
    """What a fit takes beyond what the libraries alone take, against 4 times its arrays and 300 MB."""
    points = POINTS // scale
    bound = 4 * ARRAYS * 8 * points + ALLOWED_BYTES
    taken = max(1, _peak_bytes(points) - _peak_bytes(0))
    name = (
        f"peak memory of the fit of {points} points, in bytes, not seconds, against 4 × its arrays + 300 MB"
    )
    return AtMost(1.0).row(name, float(taken), float(bound))


def _peak_bytes(points: int) -> int:
    command = [sys.executable, "-m", "fits.management.bench.memory", str(points)]
    # A fixed command of ours.
    return int(subprocess.run(command, check=True, capture_output=True, text=True).stdout)  # noqa: S603


def main(points: int) -> None:
    """Fit, and print. A small fit comes first either way: it loads the libraries and the compiled loops."""
    x, y, errors = made_up(100)
    with threadpool_limits(limits=1):
        fitted(validated_data(x, y, errors=errors))
        if points:
            x, y, errors = made_up(points)
            fitted(validated_data(x, y, errors=errors))
    # getrusage would count what the parent held when it started this process.
    status = Path("/proc/self/status").read_text(encoding="ascii")
    peak = re.search(r"VmHWM:\s+(\d+) kB", status)
    assert peak is not None
    sys.stdout.write(str(int(peak[1]) * 1024))


if __name__ == "__main__":
    main(int(sys.argv[1]))
