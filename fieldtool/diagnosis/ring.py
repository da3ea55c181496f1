"""Explanations of a ring's own readings: whole, with spurs, open, with a joint, bridged, or not a ring at all."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from fieldtool.answers import Explanation, Inferred
from fieldtool.diagnosis.evidence import Evidence

__all__ = ["ring_explanations"]

_NAMES = {"r1": "line", "rn": "neutral", "r2": "earth"}
_IDS = {"r1": "open_line", "rn": "open_neutral", "r2": "open_cpc"}


def ring_explanations(evidence: Evidence) -> Iterator[Explanation]:
    """Every shape of a ring that these readings allow; nothing before r1, rn and r2 were read."""
    three = {"r1": evidence.r1, "rn": evidence.rn, "r2": evidence.r2}
    if any(value is None for value in three.values()):
        return
    broken = [key for key, value in three.items() if value == inf]
    if len(broken) == 3:
        yield _not_a_ring()
        return
    if broken:
        yield from _open(broken)
        return
    faults = [*_joint(evidence), *_bridge(evidence)]
    yield from faults
    if not faults:
        yield from _healthy(evidence)


def _not_a_ring() -> Explanation:
    return Explanation(
        "not_a_ring",
        "not_a_ring",
        "probably",
        "Not a ring here: open end to end in all three. Two radials, or legs in two ways.",
        reasoning=("r1, rn and r2 all read open",),
        stops_ring=True,
    )


def _open(broken: list[str]) -> Iterator[Explanation]:
    names = " and ".join(_NAMES[key] for key in broken)
    whole = " and ".join(_NAMES[key] for key in _NAMES if key not in broken)
    first = broken[0]
    danger = "r2" in broken
    yield Explanation(
        _IDS[first] if len(broken) == 1 else "open_several",
        "open",
        "almost_certainly",
        f"Ring open in {names}; whole in {whole}.",
        reasoning=tuple(f"{key} reads open" for key in broken),
        stops_ring=True,
        danger=danger,
    )


def _joint(evidence: Evidence) -> Iterator[Explanation]:
    r1, rn, r2 = evidence.r1 or 0.0, evidence.rn or 0.0, evidence.r2 or 0.0
    apart = abs(r1 - rn)
    if apart > max(0.05, 0.05 * max(r1, rn)):
        which = "line" if r1 > rn else "neutral"
        yield Explanation(
            f"joint_{which}",
            f"joint_{which}",
            "probably",
            f"A joint of about {apart:.2f} Ω in the {which}, or another size; place not shown.",
            reasoning=(f"r1 {r1:.2f}, rn {rn:.2f} Ω: {apart:.2f} apart",),
            inferred=(Inferred("joint_ohm", evidence.circuit_id, apart, max(0.0, apart - 0.05), apart + 0.05, "ohm"),),
            stops_ring=True,
        )
        return
    if evidence.line_per_m is None or evidence.cpc_per_m is None or r1 <= 0:
        return
    want = r1 * evidence.cpc_per_m / evidence.line_per_m
    over = r2 - want
    if over > max(0.1, 0.12 * want):
        yield Explanation(
            "joint_cpc",
            "cpc_high",
            "probably",
            f"Earth reads {over:.2f} Ω more than its size gives: a joint, or a smaller earth.",
            reasoning=(f"r2 {r2:.2f} against {want:.2f} Ω for the cable found",),
            stops_ring=over > 0.5 * want,
        )


def _bridge(evidence: Evidence) -> Iterator[Explanation]:
    """Neighbouring points, none of them seen as a spur, that all read above the ring: a link across it."""
    if not evidence.ordered:
        return
    slack = evidence.slack(evidence.flat)
    high = [
        index
        for index, point in enumerate(evidence.trunk)
        if point in evidence.ln and slack < evidence.ln[point] - evidence.flat < inf
    ]
    runs = [index for index in high if index + 1 in high or index - 1 in high]
    if len(runs) < 2:
        return
    first, last = evidence.trunk[runs[0]], evidence.trunk[runs[-1]]
    names = f"{evidence.names[first]} to {evidence.names[last]}"
    yield Explanation(
        "bridged_ring",
        "bridge_or_spurs",
        "probably" if len(runs) >= 3 else "could_be",
        f"A link across the ring near {names}, or spurs side by side: they read alike.",
        where=tuple(evidence.trunk[index] for index in runs),
        reasoning=("neighbouring points all read above the rest of the ring",),
        stops_ring=True,
    )


def _healthy(evidence: Evidence) -> Iterator[Explanation]:
    low, high = evidence.hump
    if any(value == inf for value in (*evidence.ln.values(), *evidence.le.values())):
        return
    slack = evidence.slack(evidence.flat)
    if any(value < evidence.flat - slack for value in evidence.ln.values()):
        return
    if any(value < low - evidence.slack(low) for value in evidence.le.values()):
        return
    if evidence.nothing_fits:
        return
    spurs = []
    for point in (*evidence.trunk, *evidence.spurs):
        ln, le = evidence.excess(point)
        if (ln is not None and ln > slack) or (le is not None and le > evidence.slack(high)):
            spurs.append(_spur(evidence, point, ln, le))
    seen = len({*evidence.ln, *evidence.le})
    odds = "almost_certainly" if evidence.complete else "probably" if seen >= 3 else "could_be"
    metres = evidence.metres
    about = f", about {metres:.0f} m" if metres is not None else ""
    count = len(evidence.spurs) if evidence.spurs else len(spurs)
    with_spurs = f", {count} spur{'s' if count != 1 else ''}" if count else ""
    inferred = list(spurs)
    if metres is not None:
        inferred.append(Inferred("ring_length_m", evidence.circuit_id, metres, metres * 0.93, metres * 1.07))
    yield Explanation(
        "ring_with_spurs" if spurs or evidence.spurs else "intact_ring",
        "ring",
        odds,  # type: ignore[arg-type]
        f"Shown to be a ring by these readings, all three wires{about}{with_spurs}.",
        where=tuple(item.place for item in spurs),
        inferred=tuple(inferred),
        reasoning=(
            f"L-N crossed is level at {evidence.flat:.2f} Ω, (r1+rn)/4",
            f"L-E crossed lies between {low:.2f} and {high:.2f} Ω, as its earth size gives",
        ),
        healthy=True,
    )


def _spur(evidence: Evidence, point: str, ln: float | None, le: float | None) -> Inferred:
    line = evidence.line_per_m or 0.00741
    cpc = evidence.cpc_per_m or line
    by_ln = None if ln is None else ln / (2 * line)
    by_le = None if le is None else le / (line + cpc)
    known = [value for value in (by_ln, by_le) if value is not None and value > 0]
    middle = sum(known) / len(known) if known else 0.0
    band = evidence.slack(evidence.flat) / (2 * line)
    return Inferred("spur_length_m", point, middle, max(0.0, middle - band), max(known, default=0.0) + band)
