"""Published worked examples, each with the page it was seen on; tolerance 0.01 Ω or 1 % unless the page rounds loosely."""

from __future__ import annotations

from math import sqrt

import pytest

from fieldtool.network.arrangements import end_to_end
from fieldtool.network.as_found import cable_ohms
from fieldtool.network.grid import r1_r2, solve
from fieldtool.quantities.show import round_limit_down
from fieldtool.reference.look import (
    ca,
    cg,
    constant,
    it_a,
    let_through_a2s,
    mv_per_a_m,
    r_ohm_per_m,
    usual_ze,
    zs_max_ohm,
)
from fieldtool.rules.volt_drop import conductor_factor
from tests.circuits import ring


def test_22_m_of_2_5_and_1_5() -> None:
    """Useful information for 2394, p 23 (forum): R1 0.163, R2 0.266, together 0.429."""
    ohms = cable_ohms("ft_2_5", 22)
    assert ohms is not None
    assert (ohms.line, ohms.cpc, ohms.line + ohms.cpc) == pytest.approx((0.163, 0.266, 0.429), abs=0.001)


def test_a_ring_of_r1_0_54_and_r2_0_90() -> None:
    """Calculating R1+R2 (forum): 0.36 mid ring; 0.3375 across the crossed pair at the board."""
    r1, r2 = 0.54, 0.90
    assert (r1 + r2) / 4 == pytest.approx(0.36)
    assert r1 * r2 / (r1 + r2) == pytest.approx(0.3375)
    metres = r1 / r_ohm_per_m(2.5).value
    assert r1_r2(solve(ring([metres / 2, metres / 2])))["p1"] == pytest.approx((r1 + r1 * 12.1 / 7.41) / 4, rel=1e-9)


def test_ring_length_from_its_readings_and_not_from_the_quarter_value() -> None:
    """Working out the length of a ring (forum): r1 = rn 1.15, r2 1.80 give 151 m; the quarter value would give 35 m."""
    per_m = r_ohm_per_m(2.5).value + r_ohm_per_m(1.5).value
    assert (1.15 + 1.80) / per_m == pytest.approx(151, abs=1)
    assert 1.15 / r_ohm_per_m(2.5).value == pytest.approx(155.2, abs=0.1)
    assert (1.15 + 1.80) / 4 / per_m == pytest.approx(37.8, abs=3)
    ends = end_to_end(ring([151.2 / 2, 151.2 / 2]))
    assert ends.line + ends.cpc == pytest.approx(2.95, abs=0.01)


def test_ring_volt_drop() -> None:
    """Voltage drop (forum): 40 m, 18 mV/A/m, a quarter; 5.76 V at 32 A, 4.68 V at the 26 A that the ring counts."""
    mv = mv_per_a_m("flat_twin", 2.5).value
    assert mv * 40 * 32 / 4000 == pytest.approx(5.76)
    assert mv * 40 * 26 / 4000 == pytest.approx(4.68)


@pytest.mark.parametrize(
    "current, seconds, k, needed",
    [
        (460.0, 0.1, 115.0, 1.26),  # Adiabatic equation (forum, cites BS EN 60898 Annex ZA)
        (200.0, 0.4, 115.0, 1.10),  # Linsley, Basic Electrical Installation Work, p 251, example 1
        (200.0, 0.1, 143.0, 0.44),  # Ring single-core cpc size (forum)
    ],
)
def test_adiabatic(current: float, seconds: float, k: float, needed: float) -> None:
    assert sqrt(current**2 * seconds) / k == pytest.approx(needed, abs=0.01)


def test_loop_limits() -> None:
    """Older breaker types (IET forum, 2013); 45 A breaker (forum); Earth loop table 17th edition p 2; Connections 2015."""
    assert zs_max_ohm("bs3871_2", 30).value / constant("loop.cmin").value == pytest.approx(1.095, abs=0.001)
    assert zs_max_ohm("bs60898_b", 45).value == pytest.approx(0.97, abs=0.005)
    assert zs_max_ohm("bs60898_b", 6).value / constant("loop.cmin").value == pytest.approx(7.67, abs=0.01)
    assert zs_max_ohm("bs88_3", 32).value * 0.8 == pytest.approx(0.728, abs=0.001)


def test_the_limits_the_trade_carries_in_its_head() -> None:
    """Common practice: 1.09 Ω for B32 and 1.75 Ω for B20 as measured limits, 0.8 × the unrounded book value."""
    assert zs_max_ohm("bs60898_b", 32).value * 0.8 == pytest.approx(0.8 * 230 * 0.95 / 160)
    assert round_limit_down(zs_max_ohm("bs60898_b", 32).value * 0.8, 2) == 1.09
    assert zs_max_ohm("bs60898_b", 20).value * 0.8 == pytest.approx(1.748)
    assert it_a("flat_twin", 2.5, "c").value == 27
    assert (constant("ring.device_a").value, constant("ring.device_most_a").value) == (30, 32)
    assert constant("ring.least_iz_a").value == 20


def test_the_trade_s_figures_for_metres() -> None:
    """Common practice: 5 m of 2.5/1.5 radial add about 0.1 Ω; 10 m of ring about 0.05 Ω at its middle."""
    ohms = cable_ohms("ft_2_5", 5)
    assert ohms is not None
    assert ohms.line + ohms.cpc == pytest.approx(0.1, abs=0.01)
    longer = r1_r2(solve(ring([35.0, 35.0])))["p1"] - r1_r2(solve(ring([30.0, 30.0])))["p1"]
    assert longer == pytest.approx(0.05, abs=0.005)


@pytest.mark.parametrize("i_dn_ma, ohms", [(30, 1667), (100, 500), (300, 167), (500, 100)])
def test_tt_limits(i_dn_ma: float, ohms: float) -> None:
    """Some advice on testing, p 2 (forum): 50 V over the rated current."""
    assert constant("rcd.touch_v").value / (i_dn_ma / 1000) == pytest.approx(ohms, abs=0.5)


def test_grouping_of_two_clipped_legs() -> None:
    """Grouping factors (newsgroup): 27 × 0.85 is 23 A."""
    assert it_a("flat_twin", 2.5, "c").value * cg(2, "single_layer").value * ca(30).value == pytest.approx(22.95)


def test_ring_106_m_and_radials_43_and_33_m() -> None:
    """On-site figures seen on forums: ring 106 m, B32 4 mm² 43 m with 26 A, B20 2.5 mm² 33 m, with Appendix 4's Ct."""
    limit = 230 * constant("voltdrop.other_share").value
    ring_m = limit * 4000 / (mv_per_a_m("flat_twin", 2.5).value * 26) / conductor_factor(13, 20)
    assert ring_m == pytest.approx(106, abs=1)
    radial_m = limit * 1000 / (mv_per_a_m("flat_twin", 4).value * 26) / conductor_factor(26, 37)
    assert radial_m == pytest.approx(43, abs=1)
    twenty_m = limit * 1000 / (mv_per_a_m("flat_twin", 2.5).value * 20) / conductor_factor(20, 27)
    assert twenty_m == pytest.approx(33, abs=1.5)


def test_43_m_of_2_5_and_its_nominal_ratio() -> None:
    """Continuity of ring conductors, stage one: r1 0.3, r2 0.5; the page rounds loosely, 10 %."""
    r1 = r_ohm_per_m(2.5).value * 43
    assert r1 == pytest.approx(0.3, rel=0.1)
    assert r1 * r_ohm_per_m(1.5).value / r_ohm_per_m(2.5).value == pytest.approx(0.5, rel=0.1)


def test_temperature_steps() -> None:
    """Zs values?, p 2 (forum): 20 to 70 °C is 20 %; IET forum: 10 to 70 °C is 1.25."""
    rate = constant("copper.per_degree").value
    assert 1 + rate * 50 == pytest.approx(constant("copper.running_70").value)
    assert (1 + rate * 50) / (1 + rate * -10) == pytest.approx(1.25)


def test_let_through_classes_prove_a_1_5_earth_only_to_3_ka() -> None:
    """BS EN 60898-1 Annex ZA; 10 kA cells of the 16 A band seen on a forum, the rest from memory."""
    bears = 115**2 * 1.5**2
    assert let_through_a2s("b", 32, 3000).value < bears < let_through_a2s("b", 32, 6000).value
    assert let_through_a2s("b", 16, 10000).value == 70000
    assert usual_ze("tn_c_s")[0].value == 0.35


def test_derived_stand_ins_of_our_own() -> None:
    """Ours, not external: Ze 0.35 + 0.36 = 0.71 within 1.0925; ring 2.5/1.5 B32, Ze 0.35: 174 m at 70 °C."""
    assert zs_max_ohm("bs60898_b", 32).value * 0.8 >= 0.35 + 0.36
    per_m = r_ohm_per_m(2.5).value + r_ohm_per_m(1.5).value
    metres = (zs_max_ohm("bs60898_b", 32).value - 0.35) * 4 / (per_m * 1.2)
    assert metres == pytest.approx(174, abs=1)
