"""The loop readings against the ring that the dead readings give: as worked out, lower, higher, or along one leg."""

from __future__ import annotations

from dataclasses import replace
from math import log

import numpy as np

from fieldtool.diagnosis.chain import LOOP
from fieldtool.diagnosis.evidence import Evidence
from fieldtool.diagnosis.frame import Frame
from fieldtool.diagnosis.search import Fitted, fitted
from fieldtool.diagnosis.shapes import COMMON

__all__ = ["loops"]

NORMAL = "as_worked_out"
_SPAN_OHM = 0.5
"""Span in which a loop lowered by a parallel path may read [ohm]; our assumption."""


def loops(frame: Frame, evidence: Evidence, ring: Fitted) -> list[Fitted]:
    """Ways in which the loop readings can go with this ring, best first; empty where there are none to judge."""
    live = np.flatnonzero(frame.live)
    if not len(live) or ring.shape.id != "intact_ring":
        return []
    whole = frame.with_loop()
    base = replace(ring.shape, id=NORMAL, prior=0.0)
    shapes = [base, replace(base, id="high_loop", prior=-4.0, loop=True)]
    shapes += [replace(base, id="leg_not_connected", prior=COMMON["leg_not_connected"], off=leg) for leg in (1, 2)]
    if _below(frame, ring) > 0 and (len(frame.chain) >= 3 or evidence.r1_r2):
        hidden = frozenset(int(slot) for slot in live)
        shapes.append(replace(base, id="parallel_earth_path", prior=-3.0, hidden=hidden))
    left = np.where(frame.live, np.abs(frame.y - ring.shown) / frame.sigma, 0.0)
    worst = int(left.argmax())
    if left[worst] > 4 and len(live) > 1:
        shapes.append(replace(base, id="one_loop_off", prior=-5.0 - log(len(live)), hidden=frozenset({worst})))
    found = fitted(whole, evidence, shapes)
    loop = found[1]
    if loop.theta[LOOP] < 0:
        found[1] = replace(loop, shape=replace(loop.shape, id="parallel_earth_path"))
    # A lowered loop may read anything in its span, not anything within an ohm.
    return sorted(
        (
            replace(item, score=item.score + len(live) * log(1.0 / _SPAN_OHM))
            if item.shape.hidden and item.shape.id == "parallel_earth_path"
            else item
            for item in found
        ),
        key=lambda item: -item.score,
    )


def _below(frame: Frame, ring: Fitted) -> float:
    """How far the loops lie under what is worked out, in the middle of them [ohm]."""
    live = frame.live & np.isfinite(ring.shown)
    return float(np.median((ring.shown - frame.y)[live])) if live.any() else 0.0
