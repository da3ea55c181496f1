"""One function over many things: here, over the cores, or over a cluster, in order and with few under way.

Only so many things are under way at once that memory stays flat however many there are. Whatever goes wrong with one
thing is that thing's answer and stops no other.
"""

from __future__ import annotations

import logging
import os
import signal
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import AbstractContextManager, contextmanager
from itertools import chain, islice
from multiprocessing import get_context
from typing import Any, TypeVar

from fieldtool.commands.arguments import Usage

__all__ = ["ALONE_BELOW", "cores", "on_cluster", "over_cores"]

T = TypeVar("T")
R = TypeVar("R")

ALONE_BELOW = 24
"""Fewer things than this are done here: starting helpers would take longer."""

_BATCH = 8
"""Things that go to a helper in one parcel."""

_PARCELS = 3
"""Parcels under way for each helper: one in hand, the next waiting, one coming back."""


def cores() -> int:
    """How many cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else (os.cpu_count() or 1)


def over_cores(
    each: Callable[[T], R], things: Iterable[T], lost: Callable[[T], R], *, helpers: int | None = None
) -> Iterator[R]:
    """``each`` of every thing, in order, by so many helper processes (one a core where not said).

    A helper that dies takes nothing with it: what it had in hand is done again one by one, and what kills a helper
    of its own is answered by ``lost``.
    """
    helpers = cores() if helpers is None else helpers
    rest = iter(things)
    first = list(islice(rest, ALONE_BELOW))
    if helpers <= 1 or len(first) < ALONE_BELOW:
        yield from map(each, chain(first, rest))
        return
    parcels = _parcels(chain(first, rest))
    broken = True
    while broken:
        line = _Line(each, parcels, helpers * _PARCELS)
        with _pool(helpers) as pool:
            try:
                for future in line.rolling(pool):
                    yield from future.result()
                broken = False
            except BrokenProcessPool:
                pool.shutdown(wait=True, cancel_futures=True)
        for parcel in line.parcels:
            yield from _again(each, parcel, lost)


def on_cluster(each: Callable[[T], R], things: Iterable[T], lost: Callable[[T], R], address: str) -> Iterator[R]:
    """``each`` of every thing, in order, by the workers of a Dask cluster; Usage where none answers at ``address``.

    What a worker died of is tried once more by itself, then answered by ``lost``.
    """
    with _cluster(address) as (executor, workers):
        line = _Line(each, _parcels(things), workers * _PARCELS)
        for future in line.rolling(executor):
            try:
                answers = future.result()
            except Exception:
                # ``each`` answers for its own mishaps: what comes up here is the cluster's.
                answers = [_once_more(executor, each, thing, lost) for thing in line.parcels[0]]
            yield from answers


@contextmanager
def _cluster(address: str) -> Iterator[tuple[Executor, int]]:
    try:
        from distributed import Client
    except ImportError:
        raise Usage("--scheduler needs a library that is not here: pip install 'fieldtool[cluster]'") from None
    logging.getLogger("distributed").setLevel(logging.CRITICAL)
    try:
        client = Client(address, timeout="10s", set_as_default=False)  # type: ignore[no-untyped-call]
    except (OSError, ValueError, TypeError):
        raise Usage(f"no cluster answers at {address}; give its scheduler's address, as tcp://HOST:8786") from None
    with client:
        workers = len(client.scheduler_info()["workers"])
        if not workers:
            raise Usage(f"the cluster at {address} has no workers")
        yield client.get_executor(pure=False), workers  # type: ignore[no-untyped-call]


def _pool(helpers: int) -> AbstractContextManager[ProcessPoolExecutor]:
    # Started afresh, not forked: the same on every platform, and no thread's lock is copied half held.
    return ProcessPoolExecutor(helpers, mp_context=get_context("spawn"), initializer=_leave_ctrl_c_to_the_command)


def _leave_ctrl_c_to_the_command() -> None:
    # A terminal sends it to every process; a helper would end with a traceback on the screen.
    signal.signal(signal.SIGINT, signal.SIG_IGN)


def _parcels(things: Iterable[T]) -> Iterator[list[T]]:
    rest = iter(things)
    while parcel := list(islice(rest, _BATCH)):
        yield parcel


class _Line:
    """Parcels handed out in order, so many under way; each comes back in its turn and is then let go.

    ``parcels`` are those under way, the one whose turn it is first.
    """

    def __init__(self, each: Callable[[T], R], parcels: Iterator[list[T]], most: int) -> None:
        self.each = each
        self.rest = parcels
        self.most = most
        self.parcels: deque[list[Any]] = deque()

    def rolling(self, executor: Executor) -> Iterator[Future[list[Any]]]:
        """The futures in the order of the parcels."""
        futures: deque[Future[list[Any]]] = deque()
        try:
            while True:
                for parcel in islice(self.rest, self.most - len(futures)):
                    # Noted before it is handed out, so that it is not lost where that fails.
                    self.parcels.append(parcel)
                    futures.append(executor.submit(_all, self.each, parcel))
                if not futures:
                    return
                yield futures[0]
                futures.popleft()
                self.parcels.popleft()
        finally:
            for future in futures:
                future.cancel()


def _all(each: Callable[[Any], Any], parcel: list[Any]) -> list[Any]:
    return [each(thing) for thing in parcel]


def _again(each: Callable[[T], R], parcel: list[T], lost: Callable[[T], R]) -> list[R]:
    """A parcel of a pool that broke, in a pool of its own; where that breaks too, each thing in one of its own."""
    try:
        with _pool(1) as pool:
            return pool.submit(_all, each, parcel).result()
    except BrokenProcessPool:
        if len(parcel) == 1:
            return [lost(parcel[0])]
        return [answer for thing in parcel for answer in _again(each, [thing], lost)]


def _once_more(executor: Executor, each: Callable[[T], R], thing: T, lost: Callable[[T], R]) -> R:
    try:
        return executor.submit(each, thing).result()
    except Exception:
        return lost(thing)
