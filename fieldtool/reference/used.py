"""Which figures an answer stands on: every look-up notes what it gave while somebody listens."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from functools import wraps
from typing import ParamSpec, TypeVar

__all__ = ["Asked", "figures_used", "noted"]

Asked = tuple[str, tuple[object, ...]]
"""A look-up's name and what it was asked for."""

P = ParamSpec("P")
R = TypeVar("R")

_LISTENING: ContextVar[dict[Asked, object] | None] = ContextVar("figures_used", default=None)


@contextmanager
def figures_used() -> Iterator[dict[Asked, object]]:
    """Everything looked up inside the block, by what was asked, in the order of asking; this thread's alone."""
    used: dict[Asked, object] = {}
    token = _LISTENING.set(used)
    try:
        yield used
    finally:
        _LISTENING.reset(token)


def noted(look_up: Callable[P, R]) -> Callable[P, R]:
    """A look-up that is worked out once for each question, and noted each time it is asked.

    What it looked up itself on the way is noted with it. Takes positional arguments; a failed look-up is not kept.
    """
    kept: dict[tuple[object, ...], tuple[R, dict[Asked, object]]] = {}

    @wraps(look_up)
    def ask(*args: P.args, **named: P.kwargs) -> R:
        key = (*args, *named.values())
        if key not in kept:
            with figures_used() as inner:
                kept[key] = (look_up(*args, **named), inner)
        found, inner = kept[key]
        used = _LISTENING.get()
        if used is not None:
            used.update(inner)
            used[(look_up.__name__, key)] = found
        return found

    return ask
