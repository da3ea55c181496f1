"""What the readings say the circuit is: explanations, best first, with the test that would settle them.

Each explanation is a signature of the ring's own three networks (643.2.1): what the end-to-end readings, the
crossed readings at each point and the loop must be together. What reads alike is one class, and no more is claimed
than the readings bear.
"""

from __future__ import annotations

from fieldtool.answers import CircuitReading, Explanation, Settle
from fieldtool.diagnosis.evidence import Evidence, gather
from fieldtool.diagnosis.ring import ring_explanations
from fieldtool.diagnosis.slips import slip_explanations
from fieldtool.job.job import Job

__all__ = ["explain"]

_ODDS = {"almost_certainly": 0, "probably": 1, "could_be": 2}


def explain(job: Job, circuit_id: str, stage: str = "as_found") -> CircuitReading:
    """What the counted readings of one circuit say. Pure; the order of rows does not matter.

    Raises KeyError for an unknown circuit.
    """
    evidence = gather(job, circuit_id, stage)
    found = [*slip_explanations(evidence), *ring_explanations(evidence)]
    found.sort(key=lambda item: (_ODDS[item.odds], item.healthy, item.id))
    shown = any(item.id in ("intact_ring", "ring_with_spurs") and item.odds != "could_be" for item in found[:1])
    whole = shown and evidence.complete
    nothing = evidence.nothing_fits and not found
    return CircuitReading(
        sentence=_sentence(evidence, found, whole, nothing),
        explanations=tuple(found),
        settle=_settle(evidence, found),
        shown_ring=whole,
        nothing_fits=nothing,
        remarks=evidence.remarks(),
        smallest_spur_m=evidence.smallest_spur_m,
    )


def _sentence(evidence: Evidence, found: list[Explanation], whole: bool, nothing: bool) -> str:
    if nothing:
        return "Nothing fits: do not rely on these. Null the leads and repeat."
    if not found:
        return evidence.so_far()
    leading = found[0]
    if leading.healthy and whole:
        return leading.sentence
    if leading.healthy:
        return f"So far like a ring; {evidence.still_open()}."
    return leading.sentence


def _settle(evidence: Evidence, found: list[Explanation]) -> Settle | None:
    if not found:
        return None
    leading = found[0]
    tests = {
        "ends_joined_wrongly": ("ln_cross", "Swap the two pairs at the board and read the first point again."),
        "one_join_left_off": ("ln_cross", "Look at both joins at the board."),
        "bridged_ring": ("r1", "Part one leg inside the loop and read end to end again."),
        "open_line": ("le_cross", "L-E crossed at each point: the lowest pair is beside the break."),
        "open_neutral": ("rn", "Part at mid ring and read rn of each half."),
        "open_cpc": ("r2", "Part at mid ring and read r2 of each half."),
        "joint_line": ("r1", "Part at mid ring and read r1 of each half."),
        "joint_neutral": ("rn", "Part at mid ring and read rn of each half."),
        "joint_cpc": ("r2", "Look at the earth's size first, then halve the ring."),
        "leads_not_nulled": ("r1", "Null the leads and read r1 again."),
        "not_a_ring": ("legs", "Read between the legs of other ways: the ring may sit in two."),
        "high_loop": ("zs", "Read Zs again, high-current, at the terminals."),
    }
    if leading.id not in tests:
        return None
    test, sentence = tests[leading.id]
    return Settle(test, leading.where[0] if leading.where else evidence.circuit_id, sentence)
