"""How far one could go from each point, and what a load there asks of the ring's legs: for the map."""

from __future__ import annotations

from fieldtool.answers import CircuitReading
from fieldtool.job.job import Job
from fieldtool.job.request import NewOutlet, Request, Route
from fieldtool.network.as_found import as_found
from fieldtool.network.loads import flows
from fieldtool.verdict.compare import judge
from fieldtool.ways.way import every_way

__all__ = ["heavier_leg", "reach"]

_LOAD_A = 20.0
"""Load taken at one point when the legs' shares are shown [A]: the ring rule's own floor (433.1.204)."""


def reach(job: Job, circuit_id: str, reading: CircuitReading | None = None) -> dict[str, float | None]:
    """Metres that a one-outlet unfused spur, or a branch on a radial, could have from each point [m].

    None where the way is stopped there. Each is the one checker's own answer for a request of no length.
    """
    ways = {way.key: way for way in every_way()}
    pattern = next((item for item in job.requests if item.circuit == circuit_id), None)
    route = pattern.route if pattern is not None else Route(method="c", hidden="in_zone", metal_partition="no")
    out: dict[str, float | None] = {}
    for point in job.points_of(circuit_id):
        request = Request(
            id="reach_q",
            circuit=circuit_id,
            at=point.id,
            outlets=(NewOutlet(id="reach_w", where="indoors"),),
            route=route,
        )
        for key in ("spur_at_point", "radial_end", "radial_branch", "beyond_fcu"):
            answer = judge(job, request, ways[key], reading)
            if not answer.applies or answer.verdict is None:
                continue
            stopped = any(
                f.outcome == "broken" and f.limit_key not in ("zs", "volt_drop") and f.rule.startswith(_PLACE)
                for f in answer.verdict.findings
            )
            metres = [room.metres for room in answer.verdict.headroom if room.metres is not None]
            out[point.id] = None if stopped else min(metres, default=None)
            break
    return out


_PLACE = ("spur_not_from_a_spur", "one_accessory", "terminals", "old_spur")
"""Rules that forbid the place itself, however short the cable."""


def heavier_leg(job: Job, circuit_id: str) -> dict[str, float]:
    """What the heavier leg at the board carries of 20 A taken at each point of a ring [A]."""
    found = as_found(job, circuit_id)
    if found.shape != "ring" or not found.known:
        return {}
    return {node: max(flows(found.layout, {node: _LOAD_A}).leg_a.values(), default=0.0) for node in found.layout.nodes}
