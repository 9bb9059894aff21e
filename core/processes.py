"""The processes of a site on a single machine: started together, watched, ended together."""

import contextlib
import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from types import FrameType, TracebackType
from typing import Self

from django.conf import settings

from core.user_error import UserError

SECONDS_TO_END = 10.0
BETWEEN_LOOKS = 0.1
LINES_SHOWN = 12


@dataclass(frozen=True)
class Child:
    """A process that ends with this one."""

    name: str
    process: subprocess.Popen[bytes]
    log: Path

    def ask_to_end(self) -> None:
        """Ask it to end; its own children are its business."""
        with contextlib.suppress(ProcessLookupError):
            self.process.terminate()

    def end(self, *, seconds: float = SECONDS_TO_END) -> None:
        """End it: ask, wait, then kill what is left of its group."""
        self.ask_to_end()
        with contextlib.suppress(subprocess.TimeoutExpired):
            self.process.wait(seconds)
        with contextlib.suppress(ProcessLookupError):
            os.killpg(self.process.pid, signal.SIGKILL)
        self.process.wait()


def start(name: str, command: Sequence[str]) -> Child:
    """Start a command that ends with this process; what it says goes to HOME/logs.

    It gets a session of its own, so that Ctrl-C in a terminal reaches this process alone, which then ends all
    in order.
    """
    log = settings.HOME / "logs" / f"{name}.log"
    log.parent.mkdir(exist_ok=True)
    wrapper = Path(__file__).with_name("end_with_parent.py")
    with log.open("ab") as out:
        process = subprocess.Popen(  # noqa: S603 - the commands are our own
            [sys.executable, "-I", "-S", str(wrapper), str(os.getpid()), *command],
            stdin=subprocess.DEVNULL,
            stdout=out,
            stderr=subprocess.STDOUT,
            cwd=settings.BASE_DIR,
            start_new_session=True,
        )
    return Child(name, process, log)


def last_lines(log: Path, count: int = LINES_SHOWN) -> str:
    """How a log ends."""
    return "\n".join(log.read_text(errors="replace").splitlines()[-count:])


class ProcessEnded(Exception):
    """One of the processes ended by itself."""

    def __init__(self, child: Child) -> None:
        super().__init__(
            f"{child.name} ended by itself (exit code {child.process.returncode}). "
            f"{child.log} ends with:\n{last_lines(child.log)}"
        )


@dataclass
class Processes:
    """Processes that live and end together, in a `with` block; ended last started first."""

    children: list[Child] = field(default_factory=list)

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.end()

    def add(self, child: Child) -> Child:
        """Watch a child that has been started."""
        self.children.append(child)
        return child

    def restart(self, child: Child, command: Sequence[str]) -> Child:
        """End one child and start it anew."""
        child.end()
        self.children.remove(child)
        return self.add(start(child.name, command))

    def check(self) -> None:
        """Raise ProcessEnded if one of them has ended."""
        for child in self.children:
            if child.process.poll() is not None:
                raise ProcessEnded(child)

    def wait_until(self, condition: Callable[[], bool], *, seconds: float, what: str) -> None:
        """Wait for a condition while all of them live. Raises UserError when it takes too long."""
        end = time.monotonic() + seconds
        while not condition():
            self.check()
            if time.monotonic() > end:
                raise UserError("too-slow", f"waited {seconds:g} s in vain for {what}")
            time.sleep(BETWEEN_LOOKS)

    def end(self) -> None:
        """End all of them, the last started first; a second Ctrl-C kills at once."""
        patience = SECONDS_TO_END
        while self.children:
            child = self.children.pop()
            try:
                child.end(seconds=patience)
            except KeyboardInterrupt:
                patience = 0.0
                child.end(seconds=patience)


def refuse_taken_port(port: int) -> None:
    """Raise UserError if another program listens there."""
    with socket.socket(socket.AF_INET, socket.SOCK_STREAM) as probe:
        probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            probe.bind(("127.0.0.1", port))
        except OSError:
            raise UserError(
                "port-taken", f"port {port} is taken by another program", "Choose another by --port"
            ) from None


def end_like_ctrl_c_on_sigterm() -> None:
    """Have SIGTERM end this process the way Ctrl-C does, through its `with` blocks."""

    def interrupt(number: int, frame: FrameType | None) -> None:
        raise KeyboardInterrupt

    signal.signal(signal.SIGTERM, interrupt)
