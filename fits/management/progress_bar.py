"""A line that says how far a command is, for a terminal only."""

import time
from typing import TextIO

WIDTH = 30


class ProgressBar:
    """Rewrites one line of a terminal; says nothing anywhere else."""

    def __init__(self, stream: TextIO, *, total: int, of: str) -> None:
        self.stream, self.total, self.of = stream, total, of
        self.is_shown = stream.isatty()
        self.started = time.monotonic()
        self.done = 0
        self._write()

    def advance(self) -> None:
        """One more is done."""
        self.done += 1
        self._write()

    def close(self) -> None:
        """Leave an empty line to whatever comes next."""
        if self.is_shown:
            self.stream.write("\r\033[K")
            self.stream.flush()

    def _write(self) -> None:
        if not self.is_shown:
            return
        filled = WIDTH * self.done // max(1, self.total)
        text = f"{self.done} of {self.total} {self.of}  {'=' * filled}{'.' * (WIDTH - filled)}"
        if self.done:
            left = (time.monotonic() - self.started) / self.done * (self.total - self.done)
            text += f"  {left / 60:.0f} min left" if left > 90 else f"  {left:.0f} s left"
        self.stream.write(f"\r\033[K{text}")
        self.stream.flush()
