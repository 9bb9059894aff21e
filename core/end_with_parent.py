"""Run a command that ends when the process that started it does, even when that is killed.

    python core/end_with_parent.py PARENT_PID COMMAND [ARGUMENT …]

A program of its own, so that nothing of ours runs between fork and exec of a process with threads.
Linux alone can promise this; elsewhere the command is run as it is.
"""

import contextlib
import ctypes
import os
import signal
import sys

PR_SET_PDEATHSIG = 1


def main() -> None:
    """Ask the kernel for a signal at the parent's death, then become the command."""
    parent, command = int(sys.argv[1]), sys.argv[2:]
    if sys.platform == "linux":
        with contextlib.suppress(OSError, AttributeError):
            ctypes.CDLL(None).prctl(PR_SET_PDEATHSIG, signal.SIGTERM)
        if os.getppid() != parent:
            sys.exit("the parent died before it could be asked for")
    os.execvp(command[0], command)  # noqa: S606 - the commands are those of core.processes, no user's


if __name__ == "__main__":
    main()
