"""Somebody else's change in the midst of one's own."""

import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

import pytest
from django.db import connection

from core.errors import UserError


@contextmanager
def meanwhile(
    monkeypatch: pytest.MonkeyPatch, owner: object, name: str, change: Callable[[], object]
) -> Iterator[list[str]]:
    """Another asks for `change` when `owner.name` is first called; the code of its refusal, if it is refused.

    It gets the time that it would need; where it has to wait for a lock, it ends when the block does.
    """
    refusals: list[str] = []

    def ask() -> None:
        try:
            change()
        except UserError as error:
            refusals.append(error.code)
        finally:
            connection.close()

    other = threading.Thread(target=ask)
    reached = getattr(owner, name)

    def with_other(*args: Any, **kwargs: Any) -> Any:
        monkeypatch.setattr(owner, name, reached)
        other.start()
        other.join(timeout=0.5)
        return reached(*args, **kwargs)

    monkeypatch.setattr(owner, name, with_other)
    try:
        yield refusals
    finally:
        other.join()
