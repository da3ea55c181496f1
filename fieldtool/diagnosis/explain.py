"""What the readings say the circuit is: explanations, best first, with the test that would settle them.

Each explanation predicts every reading from the ring's own three networks (643.2.1) and is fitted within the
meter's tolerance; the simpler wins by the evidence itself. What reads alike is one class, and no more is claimed
than the readings bear.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from math import inf

import numpy as np

from fieldtool.answers import CircuitReading, Explanation, Odds, Settle
from fieldtool.diagnosis.classes import Class, classes, explained, least_spur_m, odds_of
from fieldtool.diagnosis.direct import (
    calculated,
    contacts,
    earth_off,
    no_joins,
    no_ring,
    open_points,
    radial,
    too_good,
    unlike,
)
from fieldtool.diagnosis.evidence import Evidence, gather
from fieldtool.diagnosis.frame import Frame, frame_of
from fieldtool.diagnosis.loops import loops
from fieldtool.diagnosis.search import search
from fieldtool.diagnosis.words import ALIKE, settle_by
from fieldtool.job.job import Job
from fieldtool.quantities.show import shorten

__all__ = ["explain"]

ROUGH = 2.5
"""Contacts may scatter this much more (squared) than they showed before their readings are called unreliable."""


def explain(job: Job, circuit_id: str, stage: str = "as_found") -> CircuitReading:
    """What the counted readings of one circuit say. Pure; the order of rows does not matter.

    Raises KeyError for an unknown circuit.
    """
    evidence = gather(job, circuit_id, stage)
    first = [*earth_off(evidence), *contacts(evidence), *_with_alike(no_ring(evidence)), *too_good(evidence)]
    shape: list[Explanation] = []
    ring = False
    smallest = None
    if _ring_read(evidence):
        frame = frame_of(evidence)
        shape, ring = _shape(frame, evidence)
        smallest = least_spur_m(frame, evidence)
    elif not first:
        shape = list(radial(evidence))
    found = _ranked(first, shape)
    leading = found[0] if found else None
    shown = ring and not any(item.id == "figures_calculated" for item in found[:1])
    whole = shown and evidence.complete
    nothing = leading is not None and leading.id == "nothing_fits"
    return CircuitReading(
        sentence=_sentence(evidence, found, whole),
        explanations=tuple(found),
        settle=_settle(evidence, found),
        shown_ring=whole,
        nothing_fits=nothing,
        remarks=_remarks(evidence, found),
        smallest_spur_m=smallest,
    )


def _ring_read(evidence: Evidence) -> bool:
    """True where there are ring readings to fit, and the ring is not open in all three."""
    ends = [value for value in (evidence.r1, evidence.rn, evidence.r2) if value is not None]
    if len(ends) == 3 and all(value == inf for value in ends):
        return False
    if evidence.legs == "wrong":
        return False
    if not evidence.names and len(ends) < 3:
        return False
    return (
        len(ends) == 3
        or inf in ends
        or len(evidence.ln) >= 3
        or (len(ends) >= 1 and len(evidence.ln) + len(evidence.le) >= 3)
    )


def _shape(frame: Frame, evidence: Evidence) -> tuple[list[Explanation], bool]:
    """The explanations of the dead readings, the loop readings taken into account; and whether it is a ring."""
    fits = search(frame, evidence)
    ranked = classes(frame, fits)
    if _absurd(ranked[0]):
        ranked = [item for item in ranked if item.key == "nothing_fits"]
    shape = explained(frame, evidence, ranked)
    best = ranked[0].best
    expected = frozenset(frame.cell(int(slot)) for slot in np.flatnonzero(np.isinf(best.shown)))
    given = {
        frame.cell(int(slot)): float(best.shown[slot])
        for slot in np.flatnonzero(frame.gone & np.isfinite(best.shown))
        if shape[0].id != "nothing_fits"
    }
    none = list(no_joins(evidence))
    points = none or [*_with_alike(open_points(evidence, expected)), *unlike(evidence, given)]
    ring = shape[0].healthy and _read_enough(evidence)
    if len({*evidence.ln, *evidence.le}) < 3 and shape[0].odds == "almost_certainly" and not evidence.complete:
        # From the ends alone a clip or a leg in another way is not ruled out.
        shape = [replace(item, odds="probably") if item.odds == "almost_certainly" else item for item in shape]
    if shape[0].healthy:
        shape = [_held_back(evidence, item) if item.healthy else item for item in shape]
        shape = _with_loops(frame, evidence, ranked, shape)
        ring = ring and shape[0].odds != "could_be"
    desk = list(calculated(evidence))
    sure = [item for item in desk if item.stops_ring]
    last = [replace(item, stands=False) for item in desk if not item.stops_ring]
    return [*points, *sure, *shape, *last], ring and not points


def _absurd(item: Class) -> bool:
    """True where even the best fit leaves more than chance would in one case of ten thousand."""
    best = item.best
    return item.key != "nothing_fits" and best.chi2 / ROUGH > best.used + 4.0 * (2.0 * best.used) ** 0.5 + 12.0


def _read_enough(evidence: Evidence) -> bool:
    return evidence.ends and (evidence.complete or len({*evidence.ln} & {*evidence.le}) >= 3)


def _held_back(evidence: Evidence, item: Explanation) -> Explanation:
    """No ring is more than its readings: almost certain only when read at every point, likely from three on."""
    if evidence.complete or item.odds == "could_be":
        return item
    return replace(item, odds="probably" if len({*evidence.ln, *evidence.le}) >= 3 else "could_be")


def _with_loops(
    frame: Frame, evidence: Evidence, ranked: Sequence[Class], shape: list[Explanation]
) -> list[Explanation]:
    """The loop readings' own explanation first, where they do not go as the ring gives."""
    found = loops(frame, evidence, ranked[0].best)
    if not found or found[0].shape.id == "as_worked_out":
        return shape
    items = classes(frame, found)
    items = [item for item in items if item.key != "nothing_fits"]
    best = items[0].best
    key = items[0].key
    if key == "one_loop_off":
        slot = next(iter(best.shape.hidden))
        point = frame.cell(slot)[1]
        over = float(frame.y[slot] - best.shown[slot])
        key = "high_loop" if over > 0 else "parallel_earth_path"
        return [_loop_words(evidence, shape[0], key, _lesser(odds_of(items, 0), shape[0].odds), over, point), *shape]
    over = float(np.median((frame.y - ranked[0].best.shown)[frame.live]))
    if key == "high_loop" and evidence.no_trip and over < 0.6:
        key = "no_trip_mode"
    told = _loop_words(evidence, shape[0], key, _lesser(odds_of(items, 0), shape[0].odds), over, "")
    alike = [replace(told, id=name, sentence=words) for name, words in ALIKE.get(key, ())]
    return [told, *alike, *shape]


def _lesser(one: Odds, other: Odds) -> Odds:
    """The more careful of two odds: nothing built on the ring is surer than the ring."""
    order: tuple[Odds, ...] = ("almost_certainly", "probably", "could_be")
    return max(one, other, key=order.index)


def _loop_words(evidence: Evidence, ring: Explanation, key: str, odds: Odds, over: float, point: str) -> Explanation:
    at = f" at {shorten(evidence.names[point], 15)}" if point else ""
    said = {
        "high_loop": f"Zs{at} is {over:.2f} Ω above Ze and R1+R2: a joint in the loop.",
        "no_trip_mode": f"Zs is {over:.2f} Ω above what is worked out: the no-trip test reads high.",
        "parallel_earth_path": f"A ring; Zs{at} is {-over:.2f} Ω lower: a parallel earth path, not counted.",
        "leg_not_connected": "Whole end to end, but Zs goes as along one leg: a leg is not connected.",
    }
    healthy = key in ("no_trip_mode", "parallel_earth_path")
    return replace(
        ring,
        id=key,
        group=key,
        odds=odds,
        sentence=said[key],
        reasoning=("Zs held against Ze and what the dead readings give", *ring.reasoning),
        where=(point,) if point else ring.where,
        healthy=healthy,
        stops_ring=not healthy,
    )


def _with_alike(items: Iterable[Explanation]) -> list[Explanation]:
    out: list[Explanation] = []
    for item in items:
        out.append(item)
        said = {one.id for one in out}
        out += [replace(item, id=key, sentence=words) for key, words in ALIKE.get(item.id, ()) if key not in said]
    return out


def _ranked(first: list[Explanation], shape: list[Explanation]) -> list[Explanation]:
    """Dangers that single readings show come first, then the shapes as their evidence ranks them."""
    hard = [item for item in first if item.danger or item.id == "too_good"]
    soft = [item for item in first if item not in hard]
    if shape and shape[0].stops_ring and not hard:
        return [*shape, *soft]
    return [*hard, *soft, *shape]


def _sentence(evidence: Evidence, found: list[Explanation], whole: bool) -> str:
    if not found:
        return evidence.so_far()
    leading = found[0]
    if leading.healthy and leading.id in ("intact_ring", "ring_with_spurs") and not whole:
        return f"So far like a ring; {evidence.still_open()}."
    return leading.sentence


def _settle(evidence: Evidence, found: list[Explanation]) -> Settle | None:
    if not found:
        return None
    leading = found[0]
    place = leading.where[0] if leading.where else evidence.circuit_id
    if leading.healthy and leading.id != "spur_from_spur":
        other = next((item for item in found if item.group != leading.group and item.stands), None)
        if other is None and leading.id == "ring_with_spurs":
            # A link reads like spurs side by side: where it comes near at all, say what would tell them apart.
            other = next((item for item in found if item.id == "bridged_ring"), None)
        if other is None:
            return settle_by(leading.id, place) if leading.id in ("no_trip_mode", "parallel_earth_path") else None
        return settle_by(other.id, other.where[0] if other.where else evidence.circuit_id)
    settle = settle_by(leading.id, place)
    return replace(settle, test=leading.test) if settle is not None and leading.test else settle


def _remarks(evidence: Evidence, found: list[Explanation]) -> tuple[tuple[str, str], ...]:
    """What is said beside each point's row: the fitted spur where there is one, else how it lies to the ring."""
    spurs = {
        item.place: item for one in found[:1] if one.healthy for item in one.inferred if item.what == "spur_length_m"
    }
    healthy = bool(found) and found[0].healthy
    out = []
    for point, words in evidence.remarks():
        if point in spurs:
            words = f"spur, about {spurs[point].value:.1f} m"
        elif healthy and words.startswith(("spur", "low")):
            words = "on the ring"
        out.append((point, words))
    return tuple(out)
