"""The ceiling: could anybody tell this fault from these readings? The fit is told the true structure and begins there.

Where even that fit is outweighed by another class, the readings do not hold the answer and no search can find it.
"""

from __future__ import annotations

from dataclasses import replace
from math import log

import numpy as np

from fieldtool.diagnosis.chain import FIXED, GAP_SPREAD, LINK, LOG_T, ONE, SAME, TWO
from fieldtool.diagnosis.classes import classes, name_of
from fieldtool.diagnosis.evidence import gather
from fieldtool.diagnosis.frame import Frame, frame_of
from fieldtool.diagnosis.search import fitted, search
from fieldtool.diagnosis.shapes import COMMON, Shape, specs_of, start_of
from fieldtool.job.job import Job
from tests.simulator.draw import Drawn
from tests.simulator.faults import FAULTS

JOINS = {"crossed": 0, "same": SAME, "one": ONE, "two": TWO}


def true_shape(drawn: Drawn, frame: Frame) -> Shape | None:
    """The explanation that was drawn, as the fit writes it; None where no fit of the dead readings tells it."""
    shape = Shape("intact_ring", 0.0, spurs=frozenset(frame.points.index(name) for name in drawn.spurs))
    runs = len(frame.chain) + 1
    key = drawn.fault
    if key.startswith(("intact", "spur")):
        return shape
    if key.startswith(("ends joined", "one join")):
        name = "ends_joined_wrongly" if key.startswith("ends") else "one_join_left_off"
        ln, le = JOINS[drawn.joins_ln], JOINS[drawn.joins_le]
        return replace(shape, id=name, prior=COMMON[name] - (ln > 0 and le > 0), join_ln=ln, join_le=le)
    if "bridge" in drawn.truth:
        pairs = (runs - 2) * (runs - 3) / 2
        return replace(
            shape, id="bridged_ring", prior=COMMON["bridged_ring"] - log(max(1.0, pairs)), link=drawn.truth["bridge"]
        )
    if key in ("joint in the line", "joint in the neutral", "joint in the cpc"):
        of = ("line", "neutral", "cpc").index(key.split()[-1])
        name = f"joint_{key.split()[-1]}"
        return replace(shape, id=name, prior=COMMON["joint"] - log(runs), joint_run=drawn.truth["run"], joint_of=of)
    if key in ("line open", "neutral open", "cpc open"):
        of = ("line", "neutral", "cpc").index(key.split()[0])
        run = [-1, -1, -1]
        run[of] = drawn.truth["run"]
        return replace(
            shape, id=f"open_{key.split()[0]}", prior=COMMON["open"] - log(runs), open_run=(run[0], run[1], run[2])
        )
    if key.startswith("leads"):
        return replace(
            shape,
            id="leads_not_nulled",
            prior=COMMON["leads_not_nulled"],
            leads="all" if key.endswith("all") else "points",
        )
    if key == "mixed sizes of cpc":
        return replace(shape, id="mixed_sizes", prior=COMMON["mixed_sizes"] - log(5), mixed=len(drawn.gaps) // 2)
    return None


def separable(drawn: Drawn, job: Job) -> bool:
    """True where the fit that is told the truth is not outweighed by any other class."""
    evidence = gather(job, "c1", "as_found")
    frame = frame_of(evidence)
    shape = true_shape(drawn, frame)
    if drawn.fault == "figures calculated" and drawn.sizes[0] == drawn.sizes[1]:
        # An earth of equal size makes no hump, so figures without scatter look just like figures worked out.
        return False
    if shape is None:
        return True
    specs = specs_of(frame, [shape])
    at = start_of(frame, evidence, [shape], specs)
    total = sum(drawn.gaps) * drawn.rate("L")
    at[0, LOG_T] = (log(total) - specs.mean[0, LOG_T]) / specs.spread[0, LOG_T]
    if frame.chain:
        gaps = np.log(np.array(drawn.gaps))
        at[0, FIXED : FIXED + len(gaps)] = np.clip((gaps - gaps.mean()) / GAP_SPREAD, -2.5, 2.5)
    at[0, LINK] = 0.3 if shape.link[0] >= 0 else 0.0
    truth = fitted(frame, evidence, [shape], steps=6, start=at)[0]
    names = FAULTS[drawn.fault].names
    rivals = [
        item.weight
        for item in classes(frame, search(frame, evidence))
        if item.key == "nothing_fits" or not any(name_of(member) in names for member in item.members)
    ]
    return truth.score >= max(rivals, default=-1e9)
