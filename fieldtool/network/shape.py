"""Which shape a circuit claims, before any network is built: light enough for the first paint."""

from __future__ import annotations

from typing import Literal

from fieldtool.job.job import Job

__all__ = ["labelled_shape"]


def labelled_shape(job: Job, circuit_id: str) -> Literal["ring", "radial"]:
    """The shape whose readings are asked for: as the end-to-end readings show it, else as labelled.

    A circuit of which nothing is known yet is asked for a ring's readings, which also prove it is none.
    """
    circuit = job.circuit(circuit_id)
    ends = [r for r in job.standing() if r.circuit == circuit_id and r.test in ("r1", "rn", "r2") and r.counts]
    if any(r.sign == "=" for r in ends):
        return "ring"
    if len(ends) >= 3 and all(r.sign == "open" for r in ends):
        return "radial"
    return "radial" if circuit.label_claims == "radial" else "ring"
