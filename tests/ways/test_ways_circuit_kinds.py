"""Circuits that are not the plain ring or radial of the books: each is answered, and never with more than it bears."""

from __future__ import annotations

from typing import Any

import pytest

from fieldtool.answers import WayAnswer
from fieldtool.diagnosis.explain import explain
from fieldtool.verdict.compare import compare
from tests.jobs import Facts, ask_for, drop_readings, outlet, row, sample

RING = (("board", "p1"), ("p1", "p2"), ("p2", "p4"), ("p4", "p5"), ("p5", "board"))


def run(number: int, a: str, b: str, metres: float, cable: str = "ft_2_5") -> Facts:
    return {"id": f"u{number}", "circuit": "c3", "a": a, "b": b, "length_m": metres, "cable": cable}


def four_points(body: Facts) -> None:
    keep = ("p1", "p2", "p4", "p5")
    body["points"] = [point for point in body["points"] if point["id"] in keep]
    body["readings"] = [r for r in body["readings"] if r.get("point") in (None, *keep)]
    body["loads"] = []
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 3)])


def mixed_sizes(body: Facts) -> None:
    four_points(body)
    body["runs"] = [run(n, a, b, 8.0, "ft_4" if n == 1 else "ft_2_5") for n, (a, b) in enumerate(RING)]


def ring_at_the_end_of_one_cable(body: Facts) -> None:
    four_points(body)
    row(body, "circuits", "c3").update(line_ends=1, neutral_ends=1, cpc_ends=1)
    for test in ("r1", "rn", "r2", "ln_cross", "le_cross"):
        drop_readings(body, test)
    loop = [("p1", "p2"), ("p2", "p4"), ("p4", "p5"), ("p5", "p1")]
    body["runs"] = [run(0, "board", "p1", 6.0, "ft_4"), *(run(n, a, b, 8.0) for n, (a, b) in enumerate(loop, start=1))]


def ring_and_radial_on_one_breaker(body: Facts) -> None:
    four_points(body)
    body["points"].append(
        {"id": "r9", "circuit": "c3", "kind": "twin", "name": "garage", "condition": "good", "accessible": "yes"}
    )
    body["runs"] = [*(run(n, a, b, 8.0) for n, (a, b) in enumerate(RING)), run(9, "board", "r9", 10.0)]
    row(body, "circuits", "c3").update(line_ends=3, neutral_ends=3, cpc_ends=3)


def former(device_a: float, cable: str) -> Any:
    def edit(body: Facts) -> None:
        circuit = row(body, "circuits", body["requests"][0]["circuit"])
        circuit["device"]["in_a"] = device_a
        circuit["cable"] = cable
        body["requests"][0]["route"]["cable"] = cable
        # Two 6 mm² conductors do not fit a socket's terminal: a joint box beside it is part of the work.
        body["requests"][0]["cures"] = ["joint_box"]
        for item in body["runs"]:
            item["cable"] = cable

    return edit


def answered(name: str, *edits: Any) -> dict[str, WayAnswer]:
    job = sample(name, *edits)
    request = job.requests[0]
    return {item.way: item for item in compare(job, request, explain(job, request.circuit)) if item.applies}


def test_a_ring_of_two_sizes_is_a_ring() -> None:
    assert answered("larch_row", mixed_sizes)["spur_at_point"].outcome in ("go", "conditions")


@pytest.mark.parametrize("edit, said", [
    (ring_at_the_end_of_one_cable, "a ring has two of each"),
    (ring_and_radial_on_one_breaker, ""),
], ids=["one cable to a ring", "ring and radial"])  # fmt: skip
def test_what_is_not_shown_to_be_a_plain_ring_goes_nowhere_before_it_is(edit: Any, said: str) -> None:
    ways = answered("larch_row", edit)
    for way in ("spur_at_point", "fused_spur", "ring_at_point"):
        assert ways[way].outcome in ("stop", "more")
        assert said in ways[way].stopped_by
    if edit is ring_and_radial_on_one_breaker:
        verdict = ways["spur_at_point"].verdict
        assert verdict is not None
        assert any("spur from the board?" in finding.says for finding in verdict.findings)


@pytest.mark.parametrize("device_a, cable, serves", [
    (32.0, "ft_6", True),  # a former cooker circuit: 6 mm² behind 32 A carries sockets (Appendix 15)
    (16.0, "ft_2_5", True),  # a former immersion heater circuit
    (32.0, "ft_2_5", False),  # 2.5 mm² does not carry 32 A as a radial (433.1.1)
], ids=["cooker 6 mm2 32 A", "immersion 2.5 mm2 16 A", "2.5 mm2 behind 32 A"])  # fmt: skip
def test_a_former_appliance_circuit_is_a_radial_by_its_own_cable(device_a: float, cable: str, serves: bool) -> None:
    ways = answered("mill_cottages", former(device_a, cable))
    assert (ways["radial_end"].outcome != "stop") is serves
