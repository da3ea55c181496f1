"""Current-carrying capacity of a run as installed: tabulated value times every factor; the worst part governs."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from fieldtool.job.circuit import Run
from fieldtool.job.job import Job
from fieldtool.job.kinds import InstallMethod
from fieldtool.reference.look import Provenance, ca, cable, cg, ci, it_a
from fieldtool.reference.used import noted
from fieldtool.rules.engine import NotKnown
from fieldtool.rules.facts import Facts
from fieldtool.rules.needs import missing_for

__all__ = ["Capacity", "existing_capacity", "new_capacity"]


@dataclass(frozen=True, slots=True)
class Capacity:
    """Iz of one cable as installed [A], with its working and where the tabulated value stands."""

    amps: float
    working: str
    provenance: Provenance


@noted
def _capacity(
    key: str, method: InstallMethod, ambient_c: float, grouped: int, how: str, insulated_mm: float
) -> Capacity:
    kind = cable(key)
    it = it_a(kind.family, kind.rated_as_mm2, method)
    # Methods 100 to 103 have the insulation in them already (523.9): it is not counted twice.
    inside = 0.0 if method in ("100", "101", "102", "103") else insulated_mm
    factors = (ca(ambient_c).value, cg(grouped, how).value, ci(inside).value)
    amps = it.value * factors[0] * factors[1] * factors[2]
    text = (
        f"Iz = It {it.value:g} (method {method}) × Ca {factors[0]:g} × Cg {factors[1]:g} × Ci {factors[2]:.3g}"
        f" = {amps:.2f} A"
    )
    return Capacity(amps, text, it.provenance)


def existing_capacity(facts: Facts) -> Capacity:
    """Iz of the existing cable where it is least [A]; NotKnown until cable and method are seen."""
    return facts.once("existing capacity", lambda: _existing(facts))


def _existing(facts: Facts) -> Capacity:
    gaps = (*missing_for(facts, "circuit.cable"), *missing_for(facts, "install.method"))
    if gaps:
        raise NotKnown(*gaps)
    circuit, install = facts.circuit, facts.circuit.install
    method = install.method or "103"
    grouped = max(install.grouped_n, 2 if install.legs_together == "yes" else 1)
    found = [
        _capacity(
            circuit.cable or "unknown", method, install.ambient_c, grouped, install.grouping, install.insulated_mm
        )
    ]
    for run in _traced(facts.job, circuit.id):
        found.append(
            _capacity(
                run.cable or circuit.cable or "unknown",
                run.method or method,
                install.ambient_c if run.ambient_c is None else run.ambient_c,
                grouped if run.grouped_n is None else run.grouped_n,
                install.grouping,
                install.insulated_mm if run.insulated_mm is None else run.insulated_mm,
            )
        )
    return min(found, key=lambda item: item.amps)


def _traced(job: Job, circuit_id: str) -> Iterator[Run]:
    return (run for run in job.runs if run.circuit == circuit_id)


def new_capacity(facts: Facts) -> Capacity:
    """Iz of the new cable where it is least [A]; NotKnown until the request says how it lies."""
    gaps = missing_for(facts, "route.method")
    if gaps or facts.request is None:
        raise NotKnown(*gaps)
    route = facts.request.route
    keys = dict.fromkeys(run.cable for run in facts.new_runs if run.cable is not None)
    return min(
        (
            _capacity(key, route.method or "103", route.ambient_c, route.grouped_n, "bunched", route.insulated_mm)
            for key in keys
        ),
        key=lambda item: item.amps,
    )
