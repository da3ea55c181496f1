"""For each way: a case in which it serves, and one in which it is refused, with a supervisor's reason."""

from __future__ import annotations

from typing import Any

import pytest

from fieldtool.answers import WayAnswer
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.verdict.compare import compare
from tests.jobs import Facts, ask_for, drop_readings, outlet, row, sample


def answer(job: Job, way: str) -> WayAnswer:
    return next(item for item in compare(job, job.requests[0]) if item.way == way)


def spur_twin(body: Facts) -> None:
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 3)])


def between(body: Facts) -> None:
    ask_for(body, attach="between", at="p4", other="p5", outlets=[outlet("w1", 3)])


def at_board(body: Facts) -> None:
    ask_for(body, attach="board", at=None, outlets=[outlet("w1", 8)])


def two_outlets(body: Facts) -> None:
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 3), outlet("w2", 3)])


def appliance(body: Facts) -> None:
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 3, kind="appliance", load_a=8.7)])


def swap(body: Facts) -> None:
    ask_for(body, attach="point", at=None, outlets=[], swap="p2")


def moved(body: Facts) -> None:
    ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 2)], moved_to_m=2.0)


def branch(body: Facts) -> None:
    ask_for(body, attach="point", at="p2", outlets=[outlet("w1", 4)])


def radial_board(body: Facts) -> None:
    ask_for(body, attach="board", at=None, outlets=[outlet("w1", 6)])


def behind_fcu(body: Facts) -> None:
    body["points"].append(
        {"id": "f1", "circuit": "c3", "kind": "fcu", "name": "loft unit", "spur_from": "p4", "fuse_a": 13.0,
         "spur_length_m": 2.0, "condition": "good", "accessible": "yes"}
    )  # fmt: skip
    for test, value in (("ln_cross", 0.29), ("le_cross", 0.38), ("zs", 0.56)):
        body["readings"].append(
            {"id": f"y{test.replace('_', '')}", "test": test, "circuit": "c3", "point": "f1", "value": value,
             "raw": f"{value:.2f}", "at": "2026-11-26T11:50:00Z", "mode": "high_current", "instrument": "t1"}
        )  # fmt: skip
    ask_for(body, attach="point", at="f1", outlets=[outlet("w1", 4)])


SERVES: list[tuple[str, str, list[Any]]] = [
    ("spur_at_point", "larch_row", [spur_twin]),
    ("spur_at_joint_box", "larch_row", [between]),
    ("spur_at_board", "larch_row", [at_board]),
    ("fused_spur", "larch_row", [two_outlets]),
    ("fixed_appliance", "larch_row", [appliance]),
    ("beyond_fcu", "larch_row", [behind_fcu]),
    ("ring_between", "larch_row", [between]),
    ("ring_at_point", "larch_row", [two_outlets]),
    ("heavy_branch", "larch_row", [between]),
    ("outlet_moved", "larch_row", [moved]),
    ("ring_to_radial", "larch_row", [two_outlets]),
    ("ring_to_two", "larch_row", [two_outlets]),
    ("single_to_twin", "larch_row", [swap]),
    ("new_circuit", "larch_row", [at_board]),
    ("radial_end", "mill_cottages", []),
    ("radial_branch", "mill_cottages", [branch]),
    ("second_leg", "mill_cottages", [radial_board]),
    ("leave_it", "larch_row", [spur_twin]),
]


@pytest.mark.parametrize("way, name, edits", SERVES, ids=[case[0] for case in SERVES])
def test_a_way_serves_where_a_supervisor_would_allow_it(way: str, name: str, edits: list[Any]) -> None:
    found = answer(sample(name, *edits), way)
    assert found.applies
    assert found.verdict is not None, found.refused
    stops = [
        f"{f.rule}: {f.says}" for f in found.verdict.findings if f.outcome in ("broken", "cannot_tell") and not f.advice
    ]
    assert found.outcome in ("go", "conditions"), stops


def on_a_spur(body: Facts) -> None:
    ask_for(body, attach="point", at="s1", outlets=[outlet("w1", 3)])


def no_way_free(body: Facts) -> None:
    row(body, "boards", "b1")["spare_ways"] = 0


def no_room(body: Facts) -> None:
    row(body, "points", "p5")["cables"] = 3


def thin_cable(body: Facts) -> None:
    body["requests"][0]["route"]["cable"] = "ft_1_5"


def thinnest_cable(body: Facts) -> None:
    body["requests"][0]["route"]["cable"] = "ft_1_0"


def off_zone(body: Facts) -> None:
    body["requests"][0]["route"]["hidden"] = "off_zone"


def far(body: Facts) -> None:
    body["requests"][0]["outlets"][0]["metres"] = 300.0


def heavy_load(body: Facts) -> None:
    body["requests"][0]["outlets"][0]["load_a"] = 20.0


def box_of_a_twin(body: Facts) -> None:
    row(body, "points", "p2")["kind"] = "twin"


RING_SET = ("ze", "pfc", "polarity", "ir_ln", "r1", "rn", "r2", "ln_cross", "le_cross", "zs", "rcd_ms")
RADIAL_SET = ("ze", "pfc", "polarity", "ir_ln", "legs", "r1_r2", "zs", "rcd_ms")
NEEDED: dict[str, tuple[str, ...]] = {
    **dict.fromkeys(("spur_at_point", "spur_at_joint_box", "spur_at_board", "fused_spur", "fixed_appliance",
                     "beyond_fcu", "ring_between", "ring_at_point", "heavy_branch", "outlet_moved", "single_to_twin"),
                    RING_SET),
    # The device is changed, so the old one's trip time says nothing of the new.
    "ring_to_radial": RING_SET[:-1],
    "ring_to_two": RING_SET[:-1],
    "radial_end": RADIAL_SET,
    "radial_branch": RADIAL_SET,
    "second_leg": RADIAL_SET,
    "new_circuit": ("ze", "pfc"),
}  # fmt: skip
"""Readings without which no way may go; common practice of supervisors, after BS 7671 132.16 and 643."""


@pytest.mark.parametrize("way, test", [(way, test) for way, tests in NEEDED.items() for test in tests])
def test_no_way_goes_without_the_readings_that_it_needs(way: str, test: str) -> None:
    """Each reading taken out of a case in which the way serves: the verdict waits for it, and names it."""
    name, edits = next((case[1], case[2]) for case in SERVES if case[0] == way)
    found = answer(sample(name, *edits, lambda body: drop_readings(body, test)), way)
    assert found.outcome == "more"
    assert found.verdict is not None
    assert test in {gap.test for gap in found.verdict.missing}


def test_what_is_missing_is_asked_for_in_the_order_it_is_taken() -> None:
    """Survey, then dead tests, then live ones: 643.1's order within a visit."""

    def nothing_read(body: Facts) -> None:
        body["readings"] = []
        row(body, "circuits", "c3").pop("heat_seen", None)

    found = answer(sample("larch_row", spur_twin, nothing_read), "spur_at_point")
    assert found.verdict is not None
    asked = [gap.test for gap in found.verdict.missing]
    states = ["survey" if test == "survey" else TESTS[test].state for test in asked]
    assert states == sorted(states, key=("survey", "origin", "dead", "live").index)
    assert {"r1", "ln_cross", "zs"} <= set(asked)


REFUSED: list[tuple[str, str, list[Any], str]] = [
    ("spur_at_point", "larch_row", [on_a_spur], "spur"),
    ("spur_at_point", "larch_row", [two_outlets], "one"),
    ("spur_at_joint_box", "larch_row", [between, thin_cable], "2.5"),
    ("spur_at_board", "larch_row", [at_board, off_zone], "zone"),
    ("fused_spur", "larch_row", [on_a_spur], "spur"),
    ("fixed_appliance", "larch_row", [appliance, heavy_load], "13"),
    ("beyond_fcu", "larch_row", [spur_twin], "fused unit"),
    ("ring_between", "larch_row", [between, thin_cable], "2.5"),
    ("ring_at_point", "larch_row", [on_a_spur], "ring"),
    ("heavy_branch", "larch_row", [spur_twin], "neighbours"),
    ("outlet_moved", "larch_row", [spur_twin], "moved"),
    ("ring_to_radial", "mill_cottages", [], "not a ring"),
    ("ring_to_two", "larch_row", [two_outlets, no_way_free], "way"),
    ("single_to_twin", "larch_row", [swap, box_of_a_twin], "not a single"),
    ("new_circuit", "larch_row", [at_board, no_way_free], "way"),
    ("radial_end", "mill_cottages", [far], ""),
    ("radial_branch", "mill_cottages", [branch, off_zone], "zone"),
    ("second_leg", "mill_cottages", [radial_board, thinnest_cable], "20"),
]


@pytest.mark.parametrize("way, name, edits, reason", REFUSED, ids=[f"{case[0]}-{case[3] or 'far'}" for case in REFUSED])
def test_a_way_is_refused_with_its_reason(way: str, name: str, edits: list[Any], reason: str) -> None:
    found = answer(sample(name, *edits), way)
    assert found.outcome == "stop" or not found.applies
    assert reason in (found.refused or found.stopped_by)


def test_a_stopped_way_stays_in_the_list_and_never_stands_above_an_allowed_one() -> None:
    ranked = [item for item in compare(*_pair(sample("larch_row", two_outlets))) if item.applies]
    order = [{"go": 0, "conditions": 0, "more": 1, "stop": 2}[item.outcome] for item in ranked]
    assert order == sorted(order)
    assert any(item.outcome == "stop" for item in ranked)


def _pair(job: Job) -> tuple[Job, Any]:
    return job, job.requests[0]


def test_without_the_reading_at_the_attachment_no_ring_way_may_go() -> None:
    job = sample("larch_row", spur_twin, lambda body: drop_readings(body, "le_cross", "p5"))
    assert answer(job, "spur_at_point").outcome in ("more", "stop")
