"""From fitted shapes to explanations: what reads alike is one class, with odds in words and every length banded."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from math import exp, hypot, inf, isfinite, log, sqrt

import numpy as np

from fieldtool.answers import Explanation, Inferred, Odds
from fieldtool.diagnosis.chain import CROSSED, JOINT, LINK, LOG_T, RATIO
from fieldtool.diagnosis.evidence import Evidence
from fieldtool.diagnosis.frame import Frame
from fieldtool.diagnosis.search import Fitted
from fieldtool.diagnosis.shapes import COMMON, RATIOS, SPUR
from fieldtool.diagnosis.words import ALIKE
from fieldtool.quantities.show import shorten

__all__ = ["Class", "classes", "explained", "inferred_of", "least_spur_m", "name_of", "odds_of"]

ALMOST, PROBABLY = log(20.0), log(3.0)
SHOWN = 10.0
"""An explanation is listed down to e^-10 of the leading one's weight."""

WARM = 0.98
"""Copper as it is usually met against 20 °C [-]: 15 °C; our assumption, its spread is in ``LENGTH_SHARE``."""

LENGTH_SHARE = 0.045
"""Spread of a length from temperature, meter gain and the cable's own tolerance [-]; our assumption."""

_FAMILY = {
    "joint_cpc": "cpc_other",
    "size_cpc": "cpc_other",
    "mixed_sizes": "cpc_other",
    "spur_from_spur": "ring_with_spurs",
}


@dataclass(frozen=True, slots=True)
class Class:
    """Explanations that read alike: their common log weight, and the best fit of each."""

    key: str
    weight: float
    members: tuple[Fitted, ...]

    @property
    def best(self) -> Fitted:
        """The best fit of the class."""
        return self.members[0]

    @property
    def id(self) -> str:
        """The id of its best member."""
        return name_of(self.best)


def name_of(item: Fitted) -> str:
    """The id of a fitted shape: a ring with spurs is an intact ring and its spurs."""
    if item.shape.id == "intact_ring" and item.shape.spurs:
        return "ring_with_spurs"
    if item.shape.id == "one_reading_off" and all(slot < 3 for slot in item.shape.hidden):
        return "end_slip"
    return item.shape.id


def classes(frame: Frame, found: Sequence[Fitted]) -> list[Class]:
    """The fitted shapes gathered into classes, heaviest first, with ``nothing_fits`` in its place among them."""
    groups: dict[str, list[Fitted]] = {}
    for item in found:
        name = name_of(item)
        groups.setdefault(_FAMILY.get(name, name), []).append(item)
    out = []
    for key, items in groups.items():
        items.sort(key=lambda item: -item.score)
        top = items[0].score
        out.append(Class(key, top + log(sum(exp(item.score - top) for item in items)), tuple(items)))
    out.append(Class("nothing_fits", _random(frame), (found[0],)))
    return sorted(out, key=lambda item: -item.weight)


def _random(frame: Frame) -> float:
    """Log weight of figures that have nothing to do with one another: anything from 0 to 3 ohm, or open."""
    used = frame.seen & ~frame.gone
    return float(COMMON["nothing_fits"] - np.log(3.0 / (2.507 * frame.sigma[used])).sum() - 3.0 * frame.gone.sum())


def odds_of(items: Sequence[Class], index: int) -> Odds:
    """Odds of one class against the best of the others, in words."""
    rest = max((item.weight for number, item in enumerate(items) if number != index), default=-1e9)
    ahead = items[index].weight - rest
    return "almost_certainly" if ahead >= ALMOST else "probably" if ahead >= PROBABLY else "could_be"


def least_spur_m(frame: Frame, evidence: Evidence) -> float | None:
    """The shortest spur that stands out of the scatter in nearly every case [m]: from the readings a point has."""
    if not evidence.ends:
        return None
    count = frame.count
    taken = [any(frame.seen[3 + block * count : 3 + (block + 1) * count]) for block in range(4)]
    if not any(taken):
        taken = [True, False, False, False]
    weight = (2.0, 1 + frame.ratio, 1 + frame.ratio, 2.0)
    per_m = sqrt(sum((w * frame.line_per_m) ** 2 for w, have in zip(weight, taken, strict=True) if have))
    # What a spur must bring, its own prior and its length's, and 1.65 spreads on top for 95 %.
    needed = sqrt(2 * (-SPUR + 1.5)) + 1.65
    sigma = hypot(frame.scatter, 0.003)
    return round(needed * sigma / per_m, 1)


def inferred_of(frame: Frame, evidence: Evidence, item: Fitted) -> tuple[Inferred, ...]:
    """Lengths and sizes that this fit implies, each with a band that holds it 95 times in 100."""
    out: list[Inferred] = []
    for point in sorted(item.shape.spurs):
        value, spread = item.spur_ohm(point)
        out.append(_metres("spur_length_m", frame.points[point], value, spread, frame.line_per_m))
    if item.shape.joint_run >= 0:
        ohm, spread = float(np.exp(item.theta[JOINT])), float(np.exp(item.theta[JOINT]) * item.spread[JOINT])
        band = 2 * hypot(spread, 0.015)
        out.append(Inferred("joint_ohm", evidence.circuit_id, ohm, max(0.0, ohm - band), ohm + band, "ohm"))
    total, spread = float(np.exp(item.theta[LOG_T])), float(np.exp(item.theta[LOG_T]) * item.spread[LOG_T])
    if item.shape.link[0] >= 0:
        link = float(np.exp(item.theta[LINK]))
        out.append(
            _metres("link_length_m", evidence.circuit_id, link, link * float(item.spread[LINK]), frame.line_per_m)
        )
    if evidence.line_per_m is not None and isfinite(total):
        out.append(_metres("ring_length_m", evidence.circuit_id, total, spread, frame.line_per_m))
    return tuple(out)


def _metres(what: str, place: str, ohm: float, spread: float, per_m: float) -> Inferred:
    value = ohm / per_m / WARM
    band = 2.2 * hypot(spread / per_m, LENGTH_SHARE * value)
    return Inferred(what, place, value, max(0.0, value - band), value + band)


def explained(frame: Frame, evidence: Evidence, items: Sequence[Class]) -> list[Explanation]:
    """The explanations to show, the leading class first, each followed by what reads just like it."""
    out: list[Explanation] = []
    top = items[0].weight
    near = {item.key for item in items if item.weight > top - PROBABLY}
    both = {"ring_with_spurs", "bridged_ring"} <= near
    for index, item in enumerate(items):
        if item.weight < top - SHOWN or len({one.group for one in out}) > 7:
            break
        odds = odds_of(items, index) if index == 0 else "could_be"
        group = "bridge_or_spurs" if both and item.key in ("ring_with_spurs", "bridged_ring") else item.key
        out += _members(frame, evidence, item, group, odds, item.weight > top - ALMOST)
    return out


def _members(
    frame: Frame, evidence: Evidence, item: Class, group: str, odds: Odds, stands: bool
) -> Iterable[Explanation]:
    first = _explanation(frame, evidence, item, item.best, group, odds, stands)
    said = {first.id}
    yield first
    for other in item.members[1:]:
        name = name_of(other)
        if name not in said and other.score > item.best.score - ALMOST and item.key != "nothing_fits":
            said.add(name)
            yield _explanation(frame, evidence, item, other, group, odds, stands)
    for key, words in ALIKE.get(first.id, ()):
        if key == "spur_from_spur" and (len(item.best.shape.spurs) < 2 or key in said):
            continue
        if key == "swapped_inside_cable" and item.best.shape.open_run[2] >= 0:
            continue
        if key not in said:
            yield replace(first, id=key, sentence=words, reasoning=("reads just like the line above",))


def _explanation(
    frame: Frame, evidence: Evidence, group: Class, item: Fitted, key: str, odds: Odds, stands: bool
) -> Explanation:
    name = "nothing_fits" if group.key == "nothing_fits" else name_of(item)
    where = _where(frame, group, item)
    if name == "ring_with_spurs" and _on_a_spur(evidence):
        name = "spur_from_spur"
    healthy = name in ("intact_ring", "ring_with_spurs", "spur_from_spur") or _larger_earth(frame, evidence, name)
    return Explanation(
        name,
        key,
        odds,
        _sentence(frame, evidence, item, name, where),
        where=where,
        inferred=() if name == "nothing_fits" else inferred_of(frame, evidence, item),
        reasoning=_reasons(frame, evidence, item, name),
        predicted=() if name == "nothing_fits" else _predicted(frame, item),
        stops_ring=not healthy,
        danger=name in ("open_cpc", "open_several") and (item.shape.open_run[2] >= 0 or name == "open_several"),
        healthy=healthy,
        stands=stands,
        test=_slip_in(item) if name in ("ends_joined_wrongly", "one_join_left_off") else "",
    )


def _larger_earth(frame: Frame, evidence: Evidence, name: str) -> bool:
    """True for an earth that reads less than its cable would give: a larger size, which no joint can be."""
    if name not in ("size_cpc", "mixed_sizes") or not evidence.r1 or evidence.r2 is None:
        return False
    return evidence.r2 / evidence.r1 < frame.ratio


def _slip_in(item: Fitted) -> str:
    """The step whose joins were made wrongly; the first of the two where both were."""
    return "ln_cross" if item.shape.join_ln != CROSSED else "le_cross"


def _on_a_spur(evidence: Evidence) -> bool:
    return any(parent in evidence.parents for parent in evidence.parents.values())


def _predicted(frame: Frame, item: Fitted) -> tuple[tuple[str, str, float], ...]:
    return tuple(
        (*frame.cell(int(slot)), round(float(item.shown[slot]), 3))
        for slot in np.flatnonzero(frame.seen)
        if isfinite(item.shown[slot])
    )


def _where(frame: Frame, group: Class, item: Fitted) -> tuple[str, ...]:
    shape = item.shape
    if group.key == "nothing_fits":
        return ()
    if shape.id in ("worn_contact", "one_reading_off"):
        return tuple(dict.fromkeys(cell for slot in sorted(shape.hidden) if (cell := frame.cell(slot)[1])))
    if shape.link[0] >= 0:
        return tuple(frame.points[frame.chain[place]] for place in shape.link)
    if shape.joint_run >= 0 or max(shape.open_run) >= 0:
        return _beside(frame, group)
    if shape.id == "intact_ring":
        return tuple(frame.points[point] for point in sorted(shape.spurs))
    return ()


def _beside(frame: Frame, group: Class) -> tuple[str, ...]:
    """Points next to the break or joint, where its place is told: the runs that hold 19 parts in 20 of the weight."""
    runs: dict[int, float] = {}
    top = group.best.score
    for item in group.members:
        run = item.shape.joint_run if item.shape.joint_run >= 0 else max(item.shape.open_run)
        runs[run] = runs.get(run, 0.0) + exp(item.score - top)
    total, held, kept = sum(runs.values()), 0.0, []
    for run, weight in sorted(runs.items(), key=lambda one: -one[1]):
        kept.append(run)
        held += weight
        if held > 0.95 * total:
            break
    if len(kept) > 2 or not frame.chain:
        return ()
    names = [
        frame.points[frame.chain[place]] for run in kept for place in (run - 1, run) if 0 <= place < len(frame.chain)
    ]
    return tuple(dict.fromkeys(names))


def _sentence(frame: Frame, evidence: Evidence, item: Fitted, name: str, where: tuple[str, ...]) -> str:
    named = " and ".join(shorten(evidence.names[point], 12) for point in where[:2])
    metres = float(np.exp(item.theta[LOG_T])) / frame.line_per_m if evidence.line_per_m is not None else None
    about = f", about {metres:.0f} m" if metres is not None else ""
    spurs = len(item.shape.spurs)
    with_spurs = f", {spurs} spur{'s' if spurs != 1 else ''}" if spurs else ""
    joint = float(np.exp(item.theta[JOINT]))
    place = f" near {named}" if where else "; place not shown"
    wires = [wire for wire, run in zip(("line", "neutral", "earth"), item.shape.open_run, strict=True) if run >= 0]
    three = (("line", evidence.r1), ("neutral", evidence.rn), ("earth", evidence.r2))
    whole = [wire for wire, value in three if wire not in wires and value is not None and value < inf]
    rest = f"; whole in {' and '.join(whole)}" if whole else ""
    leads = {"all": "Every reading", "points": "Every crossed reading", "ends": "Every end-to-end reading"}
    said = {
        "intact_ring": f"Shown to be a ring by these readings, all three wires{about}.",
        "ring_with_spurs": f"Shown to be a ring by these readings, all three wires{about}{with_spurs}.",
        "spur_from_spur": f"A ring{about}, with a spur hung on a spur: not to be extended.",
        "ends_joined_wrongly": "Readings climb from the board: each leg is joined to itself, not crossed.",
        "one_join_left_off": "Reads as one path, not two: one of the two cross joins is off.",
        "leads_not_nulled": f"{leads.get(item.shape.leads, 'Each')} is high alike: are the leads nulled?",
        "bridged_ring": f"A link across the ring, {named}; its true length is more.",
        "open_line": f"Ring open in line{place if where else ''}{rest}.",
        "open_neutral": f"Ring open in neutral{place if where else ''}{rest}.",
        "open_cpc": f"Ring open in earth{place if where else ''}{rest}.",
        "open_several": f"Ring open in {' and '.join(wires)}{rest}.",
        "joint_line": f"A joint of about {joint:.2f} Ω in the line, or another size{place}.",
        "joint_neutral": f"A joint of about {joint:.2f} Ω in the neutral, or another size{place}.",
        "joint_cpc": f"A joint of about {joint:.2f} Ω in the earth, or a smaller earth.",
        "size_cpc": f"The earth is of another size: r2/r1 {np.exp(item.theta[RATIO]):.2f}, as {_size(item)} gives.",
        "mixed_sizes": "The earth is not of one size all round: sizes are mixed.",
        "leg_not_connected": "Whole end to end, but in use it reads along one leg: a leg is off.",
        "worn_contact": f"{named} reads high alone, and not as a spur would: a worn contact?",
        "one_reading_off": f"One reading at {named} does not go with the rest: read it again.",
        "end_slip": "One end-to-end reading does not go with the rest: read it again.",
        "nothing_fits": "Nothing fits: do not rely on these. Null the leads and repeat.",
    }
    return shorten(said.get(name, name.replace("_", " ")), 74)


def _size(item: Fitted) -> str:
    ratio = float(np.exp(item.theta[RATIO]))
    nearest = min(RATIOS.items(), key=lambda one: abs(log(one[1] / ratio)))[0]
    return "an equal-size earth" if nearest == "1.0" else nearest


def _reasons(frame: Frame, evidence: Evidence, item: Fitted, name: str) -> tuple[str, ...]:
    if name == "nothing_fits":
        return ("no shape of circuit gives these readings within the meter's scatter",)
    slots = [
        int(slot)
        for slot in np.flatnonzero(frame.seen & ~frame.gone)
        if isfinite(item.shown[slot]) and slot not in item.shape.hidden
    ]
    worst = max(slots, key=lambda slot: abs(float(frame.y[slot] - item.shown[slot])), default=None)
    out = []
    if worst is not None:
        test, point = frame.cell(worst)
        label = {"ln_cross": "L-N crossed", "le_cross": "L-E crossed", "r1_r2": "R1+R2", "r1_rn": "R1+Rn"}.get(
            test, test
        )
        at = f" at {shorten(evidence.names[point], 15)}" if point else ""
        out.append(
            f"gives {len(slots)} readings within {abs(float(frame.y[worst] - item.shown[worst])):.2f} Ω; "
            f"worst {label}{at}: {frame.y[worst]:.2f} read, {item.shown[worst]:.2f}"
        )
    if name in ("intact_ring", "ring_with_spurs") and evidence.ends:
        low, high = evidence.hump
        out.append(f"L-N crossed of a whole ring: {evidence.flat:.2f}; L-E crossed {low:.2f} to {high:.2f} Ω")
    for slot in sorted(item.shape.hidden):
        test, point = frame.cell(slot)
        factor = float(frame.y[slot] / item.shown[slot]) if item.shown[slot] > 0 else 0.0
        for times in (0.01, 0.1, 10.0, 100.0):
            if abs(factor / times - 1) < 0.25:
                out.append(f"{frame.y[slot]:g} is about {times:g} times what the rest gives: a slip of the digits?")
    return tuple(out)
