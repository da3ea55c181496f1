"""Factors between units, from pint; the only module that imports it, and only when a factor is first needed.

No text typed by a person comes here: `entry` has already turned it into a unit name from `fields`.
"""

from __future__ import annotations

import threading
from functools import cache
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from pint import UnitRegistry

__all__ = ["UnitProblem", "factor", "warm"]

_LOCK = threading.Lock()
"""One registry, also when the warm-up thread and a first entry want it at the same moment."""


class UnitProblem(ValueError):
    """Two unit names that cannot be turned into each other by one factor."""


@cache
def _registry() -> UnitRegistry[float]:
    import pint

    return pint.UnitRegistry()


@cache
def factor(token_unit: str, si_unit: str) -> float:
    """How many ``si_unit`` make one ``token_unit``.

    Example: ``factor("milliohm", "ohm")`` is 0.001 [ohm per milliohm]. A unit to itself is 1 and needs no pint.
    The factor is cleared of binary noise beyond twelve figures. Raises UnitProblem for an unknown unit, two
    dimensions, or a scale with its own zero (a temperature), which has no factor.

    >>> factor("ohm", "ohm"), factor("milliohm", "ohm"), factor("kiloampere", "ampere")
    (1.0, 0.001, 1000.0)
    """
    if token_unit == si_unit:
        return 1.0
    with _LOCK:
        registry = _registry()
        try:
            one, two = (registry.Quantity(n, token_unit).to(si_unit) for n in (1.0, 2.0))
        except Exception as problem:  # pint's refusals share no base class narrower than this
            raise UnitProblem(f"{token_unit} cannot be turned into {si_unit}") from problem
    ratio = float(one.magnitude)
    if abs(float(two.magnitude) - 2.0 * ratio) > 1e-9 * abs(ratio):
        raise UnitProblem(f"{token_unit} and {si_unit} do not share their zero")
    return float(f"{ratio:.12g}")


def warm() -> None:
    """Load pint and its unit table now, so that the first entry with a unit does not wait (run it in a thread)."""
    factor("milliohm", "ohm")
