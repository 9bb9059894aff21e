"""Independent pieces of work over several processes, each with one thread of its own."""

import multiprocessing
import os
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor, as_completed
from typing import TypeVar

from threadpoolctl import threadpool_limits

Piece = TypeVar("Piece")
Found = TypeVar("Found")


def usable_cores() -> int:
    """How many cores this process may use."""
    return len(os.sched_getaffinity(0))


def in_parallel(
    work: Callable[[Piece], Found], pieces: Sequence[Piece], *, processes: int
) -> Iterator[tuple[int, Found]]:
    """Each piece's place and what was found, as they come; `work` and pieces must go through pickle.

    New processes are spawned, not forked: a fork of a process with threads can hang.
    """
    if processes == 1:
        for place, piece in enumerate(pieces):
            with threadpool_limits(limits=1):
                found = work(piece)
            yield place, found
        return
    pool = ProcessPoolExecutor(
        processes, mp_context=multiprocessing.get_context("spawn"), initializer=_one_thread
    )
    try:
        places = {pool.submit(work, piece): place for place, piece in enumerate(pieces)}
        for future in as_completed(places):
            yield places[future], future.result()
    finally:
        pool.shutdown(cancel_futures=True)


def _one_thread() -> None:
    threadpool_limits(limits=1)
