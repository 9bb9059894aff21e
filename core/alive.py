"""Whether the worker gets on with its work: a file that it touches.

A worker that hangs after a lost connection may still answer a ping, so that only finished work counts.
"""

import time

from django.conf import settings


def touch() -> None:
    """Say that the worker has just got something done."""
    settings.WORKER_ALIVE_FILE.touch()


def silence() -> float | None:
    """Seconds since the worker last got something done; None if it never did."""
    try:
        return max(0.0, time.time() - float(settings.WORKER_ALIVE_FILE.stat().st_mtime))
    except FileNotFoundError:
        return None
