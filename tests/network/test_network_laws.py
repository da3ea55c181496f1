"""What the networks give against formulas written out: series, parallel, the ring's own, and Kirchhoff's laws."""

from __future__ import annotations

from math import inf

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldtool.network.arrangements import (
    all_readings,
    crossed_right,
    crossed_wrong,
    end_to_end,
    in_service,
    one_join_left_off,
)
from fieldtool.network.edits import is_bridge, lengthen, part, ring_runs, split_run, spur_nodes
from fieldtool.network.grid import Parted, r1_r2, r1_rn, resistance, solve, with_run, without
from fieldtool.network.layout import BOARD, Layout, LayoutRun, Ohms
from fieldtool.network.loads import flows
from fieldtool.network.problems import BadRun, Disconnected, NetworkProblem, NoSuchNode
from fieldtool.network.zones import zone_of
from tests.circuits import PER_M, drawn, ohms, ring

LINE, NEUTRAL, CPC = PER_M


def test_a_radial_adds_up() -> None:
    runs = (LayoutRun("a", BOARD, "p1", ohms(10)), LayoutRun("b", "p1", "p2", ohms(5)))
    found = r1_r2(solve(Layout("c", ("p1", "p2"), runs)))
    assert found["p2"] == pytest.approx((LINE + CPC) * 15)


def test_two_equal_runs_in_parallel_halve() -> None:
    runs = (LayoutRun("a", BOARD, "p1", ohms(10)), LayoutRun("b", BOARD, "p1", ohms(10)))
    assert r1_r2(solve(Layout("c", ("p1",), runs)))["p1"] == pytest.approx((LINE + CPC) * 5)


def test_a_ring_reads_x_one_minus_x_and_a_quarter_in_the_middle() -> None:
    total = 60.0
    found = r1_r2(solve(ring([15.0, 15.0, 20.0, 10.0])))
    for node, x in (("p1", 0.25), ("p2", 0.5), ("p3", 50 / 60)):
        assert found[node] == pytest.approx(x * (1 - x) * (LINE + CPC) * total)
    assert found["p2"] == pytest.approx((LINE + CPC) * total / 4)


def test_step_two_is_level_at_a_quarter_of_r1_and_rn() -> None:
    layout = ring([5.0, 12.0, 20.0, 8.0, 15.0])
    ends = end_to_end(layout)
    for value in all_readings(layout, crossed_right("neutral")).values():
        assert value == pytest.approx((ends.line + ends.neutral) / 4)


def test_step_three_follows_the_published_formula() -> None:
    """R(x) = r1·r2/(r1+r2) + x(1-x)(r1-r2)²/(r1+r2); the algebra is in a published note on stage 3 of the test."""
    lengths = [6.0, 14.0, 10.0, 20.0, 10.0]
    layout, total = ring(lengths), 60.0
    r1, r2 = LINE * total, CPC * total
    walked = 0.0
    found = all_readings(layout, crossed_right("cpc"))
    for number, metres in enumerate(lengths[:-1], start=1):
        walked += metres
        x = walked / total
        assert found[f"p{number}"] == pytest.approx(r1 * r2 / (r1 + r2) + x * (1 - x) * (r1 - r2) ** 2 / (r1 + r2))


@pytest.mark.parametrize("cpc_mm2, rise", [(1.5, 0.061), (1.0, 0.213)])
def test_the_hump_of_step_three_grows_with_the_difference_of_sizes(cpc_mm2: float, rise: float) -> None:
    rate = {1.5: 12.1, 1.0: 18.1}[cpc_mm2] / 1000
    r1, r2 = LINE * 60, rate * 60
    assert ((r1 + r2) / 4) / (r1 * r2 / (r1 + r2)) - 1 == pytest.approx((r1 - r2) ** 2 / (4 * r1 * r2))
    assert (r1 - r2) ** 2 / (4 * r1 * r2) == pytest.approx(rise, abs=0.001)


def test_wrong_pairs_climb_from_the_board() -> None:
    layout = ring([6.0] * 10)
    found = list(all_readings(layout, crossed_wrong("neutral")).values())
    for number, value in enumerate(found, start=1):
        x = number / 10
        assert value == pytest.approx(x * (1 - x) * (LINE + NEUTRAL) * 60)


def test_one_join_left_off_reads_double_everywhere() -> None:
    layout = ring([6.0] * 10)
    for value in all_readings(layout, one_join_left_off("neutral")).values():
        assert value == pytest.approx((LINE + NEUTRAL) * 60 / 2)


def test_a_spur_reads_higher_by_its_own_two_conductors() -> None:
    spur = LayoutRun("s", "p2", "s1", ohms(5))
    layout = ring([15.0] * 4).with_runs((spur,))
    found = all_readings(layout, crossed_right("cpc"))
    assert found["s1"] - found["p2"] == pytest.approx((LINE + CPC) * 5)


def test_the_same_crossing_in_service_is_r1_plus_r2() -> None:
    layout = ring([5.0, 20.0, 35.0])
    assert all_readings(layout, in_service("cpc")) == pytest.approx(r1_r2(solve(layout)))


def _broken(conductor: str) -> Layout:
    """A 60 m ring with points at 6, 12, 20, 30, 40, 48 and 55 m, one conductor open between 20 and 30 m."""
    layout = ring([6.0, 6.0, 8.0, 10.0, 10.0, 8.0, 7.0, 5.0])
    run = layout.run("leg3")
    values = {name: getattr(run.ohms, name) for name in ("line", "neutral", "cpc")} | {conductor: inf}
    return part(layout, "leg3").with_runs((LayoutRun("leg3", run.a, run.b, Ohms(**values), on_ring=True),))


def test_an_open_line_reads_double_in_step_two_and_has_its_valley_in_step_three() -> None:
    """Signature sheet, worked out by nodal analysis: step 2 level .44, step 3 lowest beside the break, .59."""
    layout = _broken("line")
    assert end_to_end(layout).line == inf
    assert {round(v, 2) for v in all_readings(layout, crossed_right("neutral")).values()} == {0.44}
    three = [round(v, 2) for v in all_readings(layout, crossed_right("cpc")).values()]
    assert three == [0.70, 0.67, 0.63, 0.59, 0.63, 0.67, 0.70]
    assert [round(0.2 + v, 2) for v in r1_r2(solve(layout)).values()][3] == 0.60


def test_an_open_neutral_hides_from_step_three_and_from_the_loop() -> None:
    layout, whole = _broken("neutral"), ring([6.0, 6.0, 8.0, 10.0, 10.0, 8.0, 7.0, 5.0])
    assert end_to_end(layout).neutral == inf
    assert all_readings(layout, crossed_right("cpc")) == pytest.approx(all_readings(whole, crossed_right("cpc")))
    assert r1_r2(solve(layout)) == pytest.approx(r1_r2(solve(whole)))


def test_an_open_earth_peaks_at_the_break() -> None:
    three = list(all_readings(_broken("cpc"), crossed_right("cpc")).values())
    assert [round(v, 2) for v in three[:4]] == [0.47, 0.50, 0.54, 0.59]


def test_a_bridge_shortens_all_three_alike_and_lifts_the_points_inside_it() -> None:
    """Signature sheet: a link of 4 m between the points at 12 and 40 m gives .26 .26 .43, .13 outside, .21 inside."""
    layout = ring([6.0, 6.0, 8.0, 10.0, 10.0, 8.0, 7.0, 5.0]).with_runs((LayoutRun("b", "p2", "p5", ohms(4)),))
    ends = end_to_end(layout)
    assert [round(v, 2) for v in (ends.line, ends.neutral, ends.cpc)] == [0.26, 0.26, 0.43]
    two = all_readings(layout, crossed_right("neutral"))
    assert round(two["p1"], 2) == 0.13
    assert max(round(two[p], 2) for p in ("p3", "p4")) == 0.21


def test_a_zero_length_run_merges_its_ends() -> None:
    layout = ring([10.0, 10.0, 10.0]).with_runs((LayoutRun("z", "p1", "p9", ohms(0)),))
    found = r1_r2(solve(layout))
    assert found["p9"] == pytest.approx(found["p1"])


def test_a_piece_that_is_not_reached_reads_open_and_is_named() -> None:
    layout = Layout(
        "c", ("p1", "p2", "p3"), (LayoutRun("a", BOARD, "p1", ohms(5)), LayoutRun("b", "p2", "p3", ohms(5)))
    )
    found = r1_r2(solve(layout))
    assert found["p1"] == pytest.approx((LINE + CPC) * 5)
    assert found["p2"] == found["p3"] == inf
    with pytest.raises(Disconnected, match="p2"):
        flows(layout, {"p2": 10})


def test_one_point_and_two_hundred_points_are_solved() -> None:
    one = Layout("c", ("p1",), (LayoutRun("a", BOARD, "p1", ohms(3)),))
    assert r1_r2(solve(one))["p1"] == pytest.approx((LINE + CPC) * 3)
    many = ring([0.5] * 201)
    assert r1_r2(solve(many))["p100"] == pytest.approx(100 / 201 * 101 / 201 * (LINE + CPC) * 100.5)


def test_bad_runs_and_places_have_their_own_errors() -> None:
    with pytest.raises(BadRun, match="0 or more"):
        solve(Layout("c", ("p1",), (LayoutRun("a", BOARD, "p1", Ohms(-1.0, 1.0, 1.0)),)))
    with pytest.raises(BadRun):
        solve(Layout("c", ("p1",), (LayoutRun("a", BOARD, "p1", Ohms(float("nan"), 1.0, 1.0)),)))
    with pytest.raises(NoSuchNode, match="p7"):
        resistance(solve(ring([5.0, 5.0])), "line", "p7", BOARD)
    with pytest.raises(NetworkProblem, match="two legs"):
        end_to_end(Layout("c", ("p1",), (LayoutRun("a", BOARD, "p1", ohms(3)),)))


def test_taking_out_and_adding_a_run_by_update_equals_solving_again() -> None:
    layout = ring([5.0, 12.0, 20.0, 8.0])
    taken = without(solve(layout), "leg1")
    assert not isinstance(taken, Parted)
    assert r1_r2(taken) == pytest.approx(r1_r2(solve(part(layout, "leg1"))))
    added = with_run(solve(layout), "p1", "p3", ohms(6))
    assert r1_r2(added) == pytest.approx(r1_r2(solve(layout.with_runs((LayoutRun("x", "p1", "p3", ohms(6)),)))))


def test_a_run_without_another_way_round_is_known_by_the_graph() -> None:
    layout = ring([5.0, 5.0, 5.0]).with_runs((LayoutRun("s", "p1", "s1", ohms(1e-9)),))
    found = without(solve(layout), "s")
    assert isinstance(found, Parted)
    assert found.nodes == ("s1",)
    assert is_bridge(layout, "s")
    assert spur_nodes(layout) == ("s1",)
    assert set(ring_runs(layout)) == {"leg0", "leg1", "leg2"}


def test_a_load_one_third_round_shares_one_third_to_two_thirds() -> None:
    """Common practice: the legs share in inverse proportion to their lengths."""
    found = flows(ring([20.0, 40.0]), {"p1": 30.0})
    assert sorted(found.leg_a.values()) == pytest.approx([10.0, 20.0])


def test_26_a_at_5_m_of_a_60_m_ring_puts_23_8_a_in_the_short_leg() -> None:
    found = flows(ring([5.0, 55.0]), {"p1": 26.0})
    assert max(found.leg_a.values()) == pytest.approx(26 * 55 / 60)


def test_a_plug_fuse_makes_a_zone_of_its_own() -> None:
    layout = Layout(
        "c", ("p1", "f1", "x1"),
        (LayoutRun("a", BOARD, "p1", ohms(5)), LayoutRun("b", "p1", "f1", ohms(1)), LayoutRun("d", "f1", "x1", ohms(4))),
        fuses=(("f1", 3.0),), behind=(("x1", "f1"),),
    )  # fmt: skip
    assert zone_of(layout, "x1").fuse_a == 3.0
    assert zone_of(layout, "f1").head == BOARD


@given(st.integers(0, 400))
def test_currents_balance_at_every_point(seed: int) -> None:
    layout = drawn(seed)
    loads = {node: 1.0 + number for number, node in enumerate(layout.nodes)}
    merged = {run.a for run in layout.runs if run.ohms.line == 0} | {run.b for run in layout.runs if run.ohms.line == 0}
    found = flows(layout, loads)
    for node in layout.nodes:
        if node in merged:
            continue
        into = sum(found.run_a[r.id] * (1 if r.b == node else -1) for r in layout.runs if node in (r.a, r.b))
        assert into == pytest.approx(loads[node], abs=1e-9)


@given(st.integers(0, 400), st.floats(1.0, 4.0))
def test_lengthening_an_existing_run_never_lowers_the_worst_r1_r2(seed: int, factor: float) -> None:
    """Rayleigh's monotonicity law: raising one resistance lowers no effective resistance."""
    layout = drawn(seed)
    longer = lengthen(layout, layout.runs[seed % len(layout.runs)].id, factor)
    assert max(r1_r2(solve(longer)).values()) >= max(r1_r2(solve(layout)).values()) - 1e-12


@given(st.integers(0, 400))
def test_the_order_of_runs_does_not_matter(seed: int) -> None:
    layout = drawn(seed)
    turned = Layout(layout.circuit, tuple(reversed(layout.nodes)), tuple(reversed(layout.runs)))
    assert r1_rn(solve(turned)) == pytest.approx(r1_rn(solve(layout)))


@given(st.floats(0.05, 0.95))
def test_splitting_a_run_changes_nothing_elsewhere(fraction: float) -> None:
    layout = ring([10.0, 20.0, 30.0])
    split = split_run(layout, "leg1", fraction, "jb")
    before, after = r1_r2(solve(layout)), r1_r2(solve(split))
    assert all(after[node] == pytest.approx(before[node]) for node in before)
