"""Leg currents and volt drops against the load flow of pandapower (Newton's method), to 0.1 %."""

from __future__ import annotations

import random
from typing import Any

import pytest

from fieldtool.network.layout import BOARD
from fieldtool.network.loads import flows
from tests.circuits import ring

pandapower = pytest.importorskip(
    "pandapower", reason="NOT CHECKED AGAINST pandapower: the extra `power` is not installed"
)

U0 = 230.0
GO_AND_RETURN = 2 * 0.00741
"""Line and neutral of 2.5 mm² at 20 °C [ohm/m], IEC 60228: one resistance of both in a single-line model."""


def their_flow(lengths: list[float], loads: dict[str, float]) -> tuple[dict[str, float], dict[str, float]]:
    """Volts lost at each point and current of each leg, from a three-phase single-line network of the same ohms.

    pandapower models balanced three-phase lines: a phase of it at U0 sqrt 3 with the loop's resistance carries
    what line and neutral of our circuit carry. Loads draw a fixed current (share of constant current: 100 %).
    """
    net = pandapower.create_empty_network(sn_mva=0.01)
    volts = U0 * 3**0.5 / 1e3
    nodes = [f"p{n}" for n in range(1, len(lengths))]
    bus = {node: pandapower.create_bus(net, vn_kv=volts, name=node) for node in (BOARD, *nodes)}
    pandapower.create_ext_grid(net, bus[BOARD], vm_pu=1.0)
    chain = [BOARD, *nodes, BOARD]
    legs = {}
    for n, metres in enumerate(lengths):
        legs[f"leg{n}"] = pandapower.create_line_from_parameters(
            net, bus[chain[n]], bus[chain[n + 1]], length_km=metres / 1e3, r_ohm_per_km=GO_AND_RETURN * 1e3,
            x_ohm_per_km=1e-9, c_nf_per_km=0.0, max_i_ka=1.0,
        )  # fmt: skip
    for node, amps in loads.items():
        pandapower.create_load(
            net, bus[node], p_mw=3 * U0 * amps / 1e6, q_mvar=0.0, const_i_p_percent=100.0, const_i_q_percent=100.0
        )
    pandapower.runpp(net, tolerance_mva=1e-12, calculate_voltage_angles=True)
    drops = {node: U0 * (1.0 - float(net.res_bus.vm_pu[number])) for node, number in bus.items() if node != BOARD}
    currents = {leg: float(net.res_line.i_ka[number]) * 1e3 for leg, number in legs.items()}
    return drops, currents


@pytest.mark.parametrize("seed", range(20))
def test_leg_currents_and_volt_drops_equal_a_load_flow(seed: int) -> None:
    rng = random.Random(seed)
    lengths = [rng.uniform(2, 20) for _ in range(rng.randint(4, 10))]
    layout = ring(lengths)
    loads = {node: rng.uniform(0.5, 13.0) for node in layout.nodes if rng.random() < 0.6} or {"p1": 10.0}
    ours = flows(layout, loads)
    drops, currents = their_flow(lengths, loads)
    for node in layout.nodes:
        assert ours.drop_v[node] == pytest.approx(drops[node], rel=1e-3)
    for run, amps in ours.run_a.items():
        assert abs(amps) == pytest.approx(currents[run], rel=1e-3, abs=2e-3)


def test_the_check_can_fail() -> None:
    lengths: list[Any] = [5.0, 10.0, 15.0]
    drops, _ = their_flow(lengths, {"p1": 10.0})
    assert flows(ring([5.0, 11.0, 15.0]), {"p1": 10.0}).drop_v["p1"] != pytest.approx(drops["p1"], rel=1e-3)
