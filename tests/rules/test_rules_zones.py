"""Which device protects a place: the plug fuse only beyond its unit, on the load side; the circuit's device before it."""

from __future__ import annotations

import pytest

from fieldtool.rules.facts import Facts as View
from fieldtool.verdict.check import edited, found_for
from fieldtool.ways.way import Refusal, every_way
from tests.jobs import Facts, ask_for, outlet, row, sample


def fcu_on_the_ring(body: Facts) -> None:
    row(body, "points", "p5").update(kind="fcu", fuse_a=13.0, name="hob unit")
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 4)])


def outlet_behind_it(body: Facts) -> None:
    fcu_on_the_ring(body)
    body["points"].append(
        {"id": "x1", "circuit": "c3", "kind": "single", "name": "hood", "behind": "p5", "spur_length_m": 2.0}
    )
    ask_for(body, at="x1")


def view(way: str, edit: object) -> View:
    job = sample("larch_row", edit)  # type: ignore[arg-type]
    request = job.requests[0]
    chosen = next(item for item in every_way() if item.key == way)
    facts = edited(job, request, chosen, found_for(job, "c3", None, request))
    assert not isinstance(facts, Refusal), facts.reason
    return facts


def test_the_unit_itself_is_protected_by_the_circuit_s_device() -> None:
    assert view("ring_to_radial", fcu_on_the_ring).protection("p5").fused is False


@pytest.mark.parametrize("way", ["spur_at_point", "ring_at_point", "ring_to_radial"])
def test_new_cable_from_the_unit_s_supply_side_is_not_protected_by_its_plug_fuse(way: str) -> None:
    assert view(way, fcu_on_the_ring).protection("w1").fused is False


def test_beyond_the_unit_the_plug_fuse_protects() -> None:
    for edit in (fcu_on_the_ring, outlet_behind_it):
        found = view("beyond_fcu", edit).protection("w1")
        assert found.fused is True
        assert found.in_a == 13.0
    assert view("beyond_fcu", outlet_behind_it).protection("x1").place == "p5"
