"""From older shapes of the file to the present one, a small step at a time."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldtool.jobfile.migrations import from_0

__all__ = ["STEPS", "migrate"]

Body = dict[str, Any]

STEPS: dict[int, Callable[[Body], Body]] = {0: from_0.step}
"""For each older shape, the step to the next one."""


def migrate(body: Body, shape: int, wanted: int) -> Body:
    """A document brought from one shape to the present one."""
    while shape < wanted:
        body = STEPS[shape](body)
        shape += 1
    return body
