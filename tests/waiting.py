"""Waiting for a condition, so that no test guesses how long something takes."""

import time
from collections.abc import Callable
from typing import TypeVar

Value = TypeVar("Value")

BETWEEN_LOOKS = 0.05


def wait_until(look: Callable[[], Value | None], *, seconds: float = 20.0, what: str = "it") -> Value:
    """What `look` returns as soon as that is true; fails when it is not within the time."""
    end = time.monotonic() + seconds
    while True:
        value = look()
        if value:
            return value
        if time.monotonic() >= end:
            raise AssertionError(f"waited {seconds:g} s in vain until {what}")
        time.sleep(BETWEEN_LOOKS)
