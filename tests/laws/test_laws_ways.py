"""What holds for every way alike: the order of the comparison, a new rule, a lengthened ring, a flattered loop."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldtool.network.grid import solve
from fieldtool.rules import engine
from fieldtool.rules.say import breaks
from fieldtool.verdict.compare import compare, existing
from tests.circuits import ring
from tests.jobs import Facts, ask_for, outlet, row, sample, set_reading
from tests.ways.test_ways_best_and_refused import SERVES


@settings(max_examples=25, deadline=None)
@given(
    metres=st.floats(0.5, 120), kind=st.sampled_from(["single", "twin", "appliance"]), count=st.integers(1, 3),
    at=st.sampled_from(["p1", "p3", "p5", "s1"]), cable=st.sampled_from(["ft_1_5", "ft_2_5", "ft_4"]),
    hidden=st.sampled_from(["in_zone", "off_zone"]), spare=st.integers(0, 2), zs=st.floats(0.3, 1.6),
)  # fmt: skip
def test_a_stopped_way_never_stands_above_one_that_may_be_done(
    metres: float, kind: str, count: int, at: str, cable: str, hidden: str, spare: int, zs: float
) -> None:
    def edit(body: Facts) -> None:
        more = {"load_a": 8.0} if kind == "appliance" else {}
        ask_for(body, attach="point", at=at, outlets=[outlet(f"w{n}", metres, kind=kind, **more) for n in range(count)])
        body["requests"][0]["route"].update(cable=cable, hidden=hidden)
        row(body, "boards", "b1")["spare_ways"] = spare
        set_reading(body, "zs", round(zs, 2), at)

    job = sample("larch_row", edit)
    ranked = [item for item in compare(job, job.requests[0]) if item.applies]
    order = [{"go": 0, "conditions": 0, "more": 1, "stop": 2}[item.outcome] for item in ranked]
    assert order == sorted(order)
    assert [item.rank for item in ranked] == sorted(item.rank for item in ranked)


@contextmanager
def one_more_rule() -> Iterator[None]:
    """A rule that nobody's way knows of, in the catalogue for as long as this lasts."""

    def nothing_may(facts: Any) -> Any:
        yield breaks(facts.circuit.id, "The new rule says no.", "Nothing can be done.")

    engine.catalogue()
    engine.rule("new_rule_of_a_test", "000.0", "Nothing may be added.")(nothing_may)
    engine.catalogue.cache_clear()
    try:
        yield
    finally:
        engine.CATALOGUE.pop("new_rule_of_a_test")
        engine.catalogue.cache_clear()


@pytest.mark.parametrize("way, name, edits", SERVES, ids=[case[0] for case in SERVES])
def test_a_new_rule_holds_for_every_way(way: str, name: str, edits: list[Any]) -> None:
    job = sample(name, *edits)
    before = next(item for item in compare(job, job.requests[0]) if item.way == way)
    assert before.outcome in ("go", "conditions")
    with one_more_rule():
        after = next(item for item in compare(job, job.requests[0]) if item.way == way)
        assert after.outcome == "stop"
        assert "new rule" in after.stopped_by
    again = next(item for item in compare(job, job.requests[0]) if item.way == way)
    assert again.outcome == before.outcome


@given(st.lists(st.floats(2, 25), min_size=4, max_size=8), st.data())
def test_a_spur_end_can_become_the_worst_place_when_a_ring_is_lengthened(lengths: list[float], data: Any) -> None:
    """Every point of a ring, spur ends too, is further by resistance when the ring is longer (Rayleigh's law)."""
    place = data.draw(st.integers(0, len(lengths) - 1))
    before = solve(ring(lengths))
    longer = [*lengths[:place], lengths[place] + 20.0, *lengths[place + 1 :]]
    after = solve(ring(longer))
    for node in before.layout.nodes:
        assert after.r_to_board_ohm[0, after.index[node]] >= before.r_to_board_ohm[0, before.index[node]] - 1e-12


def test_the_spur_end_is_what_stops_a_longer_ring() -> None:
    """A ring lengthened past its far point pushes the end of an old spur over first, not the new outlet."""

    def edit(body: Facts) -> None:
        ask_for(body, attach="between", at="p4", other="p5", outlets=[outlet("w1", 3.0)])
        row(body, "points", "s1")["spur_length_m"] = 18.0
        for test, value in (("ln_cross", 0.42), ("le_cross", 0.55), ("zs", 0.75)):
            set_reading(body, test, value, "s1")

    job = sample("larch_row", edit)
    found = next(item for item in compare(job, job.requests[0]) if item.way == "ring_between")
    assert found.verdict is not None
    zs = [f for f in found.verdict.findings if f.limit_key == "zs" and f.measured is not None]
    assert max(zs, key=lambda f: f.measured or 0.0).place == "s1"
    assert next(room for room in found.verdict.headroom if room.limit_key == "zs").place == "s1"


def test_a_live_loop_flattered_by_a_parallel_path_buys_nothing() -> None:
    """A lower Zs than the dead readings give (metalwork in parallel) is noted; the higher of the two is judged."""
    plain = sample("larch_row")
    flattered = sample("larch_row", lambda body: set_reading(body, "zs", 0.25, "p5"))
    worst = {}
    for name, job in (("plain", plain), ("flattered", flattered)):
        verdict = existing(job, "c3")
        worst[name] = next(f for f in verdict.findings if f.limit_key == "zs" and f.place == "p5")
    assert worst["flattered"].measured >= (worst["plain"].measured or 0.0) - 0.06
    assert worst["flattered"].measured > 0.25
    assert worst["flattered"].origin == "calculated"
