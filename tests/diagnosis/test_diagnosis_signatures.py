"""The signature sheet: a 60 m ring of 2.5/1.5 with points at 6, 12, 20, 30, 40, 48 and 55 m, Ze 0.20, one fault at a time.

Figures: nodal solutions written down beforehand, two places; a break or joint lies between points 3 and 4.
"""

from __future__ import annotations

import random
from collections.abc import Callable

import networkx as nx
import pytest

from fieldtool.answers import CircuitReading
from fieldtool.diagnosis.explain import explain
from tests.diagnosis.scoring import job_of
from tests.simulator.draw import Drawn, Meter, take
from tests.simulator.faults import _lay_again

GAPS = [6.0, 6.0, 8.0, 10.0, 10.0, 8.0, 7.0, 5.0]
RUN = 3
Change = Callable[[Drawn], object]


def _nothing(_: Drawn) -> None:
    """A sound ring."""


def sheet(change: Change = _nothing, gaps: list[float] = GAPS, r: tuple[float, float] = (2.5, 1.5)) -> Drawn:
    trunk = [f"p{number}" for number in range(1, len(gaps))]
    drawn = Drawn("sheet", random.Random(0), "ft_2_5", r, gaps, 1.0, nx.MultiGraph(), trunk, Meter())
    for index, gap in enumerate(gaps):
        drawn.lay(*drawn.run(index), gap)
    change(drawn)
    return take(drawn)


def read(drawn: Drawn, test: str) -> list[float | None]:
    return [row.get("value") for row in drawn.readings if row["test"] == test]


def ends(drawn: Drawn) -> list[float | None]:
    return [read(drawn, test)[0] for test in ("r1", "rn", "r2")]


def said(drawn: Drawn) -> CircuitReading:
    return explain(job_of(drawn), "c1")


def near(*values: float) -> object:
    return pytest.approx(list(values), abs=0.0101)


def test_healthy() -> None:
    drawn = sheet()
    assert ends(drawn) == near(0.44, 0.44, 0.73)
    assert read(drawn, "ln_cross") == near(*[0.22] * 7)
    assert read(drawn, "le_cross") == near(0.28, 0.28, 0.29, 0.29, 0.29, 0.28, 0.28)
    assert read(drawn, "zs") == near(0.31, 0.39, 0.46, 0.49, 0.46, 0.39, 0.29)
    reading = said(drawn)
    assert reading.leading is not None
    assert (reading.leading.id, reading.leading.odds, reading.shown_ring) == ("intact_ring", "almost_certainly", True)
    length = next(item for item in reading.leading.inferred if item.what == "ring_length_m")
    assert length.low < 60 < length.high


def test_spur_of_5_m_at_point_4() -> None:
    drawn = sheet(lambda drawn: drawn.hang("p4", 5.0))
    assert read(drawn, "ln_cross")[-1] == pytest.approx(0.30, abs=0.0101)
    assert read(drawn, "le_cross")[-1] == pytest.approx(0.39, abs=0.0101)
    assert read(drawn, "zs")[-1] == pytest.approx(0.59, abs=0.0101)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.where) == ("ring_with_spurs", ("s1",))
    spur = next(item for item in leading.inferred if item.place == "s1")
    assert spur.low < 5.0 < spur.high
    assert not leading.stops_ring


def _same(drawn: Drawn) -> None:
    drawn.joins_ln = drawn.joins_le = "same"


def test_same_end_joins() -> None:
    drawn = sheet(_same)
    assert read(drawn, "ln_cross") == near(0.08, 0.14, 0.20, 0.22, 0.20, 0.14, 0.07)
    assert read(drawn, "le_cross")[0] == pytest.approx(0.11, abs=0.0101)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.stops_ring, leading.test) == ("ends_joined_wrongly", True, "ln_cross")


def test_wrong_joins_of_step_3_alone_leave_step_2_as_it_is() -> None:
    leading = said(sheet(lambda drawn: setattr(drawn, "joins_le", "same"))).leading
    assert leading is not None
    assert (leading.id, leading.test) == ("ends_joined_wrongly", "le_cross")


def test_one_of_the_two_joins_left_off() -> None:
    drawn = sheet(lambda drawn: setattr(drawn, "joins_ln", "one"))
    assert read(drawn, "ln_cross") == near(*[0.44] * 7)
    assert [item.id for item in said(drawn).explanations][:1] == ["one_join_left_off"]
    drawn = sheet(lambda drawn: setattr(drawn, "joins_le", "two"))
    values = [value or 0.0 for value in read(drawn, "le_cross")]
    assert 0.44 < min(values) < max(values) < 0.74
    assert [item.id for item in said(drawn).explanations][:1] == ["one_join_left_off"]


def test_line_open() -> None:
    drawn = sheet(lambda drawn: drawn.part(RUN, "L"))
    assert ends(drawn)[0] is None
    assert read(drawn, "ln_cross") == near(*[0.44] * 7)
    assert read(drawn, "le_cross") == near(0.70, 0.67, 0.63, 0.59, 0.63, 0.67, 0.70)
    assert read(drawn, "zs") == near(0.31, 0.41, 0.51, 0.60, 0.51, 0.41, 0.29)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.odds) == ("open_line", "almost_certainly")
    assert "p4" in leading.where


def test_neutral_open_is_invisible_to_step_3_and_zs() -> None:
    drawn = sheet(lambda drawn: drawn.part(RUN, "N"))
    assert read(drawn, "zs") == near(0.31, 0.39, 0.46, 0.49, 0.46, 0.39, 0.29)
    assert read(drawn, "ln_cross") == near(*[0.44] * 7)
    assert [item.id for item in said(drawn).explanations][:1] == ["open_neutral"]


def test_cpc_open_is_a_danger() -> None:
    drawn = sheet(lambda drawn: drawn.part(RUN, "E"))
    assert read(drawn, "le_cross")[:4] == near(0.47, 0.50, 0.54, 0.59)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.danger) == ("open_cpc", True)


def test_line_and_cpc_open_in_different_runs() -> None:
    def change(drawn: Drawn) -> None:
        drawn.part(2, "L")
        drawn.part(5, "E")

    drawn = sheet(change)
    step3 = read(drawn, "le_cross")
    assert [value is None for value in step3] == [True, True, False, False, False, True, True]
    assert read(drawn, "zs") == near(0.32, 0.43, 0.74, 0.79, 0.83, 0.43, 0.30)
    assert [item.id for item in said(drawn).explanations][:1] == ["open_several"]


def test_all_three_open_in_one_run_is_one_class_with_two_radials() -> None:
    drawn = sheet(lambda drawn: [drawn.part(RUN, conductor) for conductor in "LNE"])
    assert ends(drawn) == [None, None, None]
    reading = said(drawn)
    ids = {item.id for item in reading.explanations if item.group == "not_a_ring"}
    assert {"not_a_ring", "two_radials", "open_all", "ring_in_two_ways", "crossed_rings"} <= ids
    assert reading.settle is not None
    assert reading.settle.test == "legs"


@pytest.mark.parametrize(
    "conductor, three, name",
    [("L", (0.74, 0.44, 0.73), "joint_line"), ("N", (0.44, 0.74, 0.73), "joint_neutral")],
)
def test_joint_of_0_30_ohm(conductor: str, three: tuple[float, float, float], name: str) -> None:
    drawn = sheet(lambda drawn: drawn.joint(RUN, conductor, 0.30))
    assert ends(drawn) == near(*three)
    assert read(drawn, "ln_cross")[3] == pytest.approx(0.29, abs=0.0151)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.stops_ring) == (name, True)
    ohm = next(item for item in leading.inferred if item.what == "joint_ohm")
    assert ohm.low < 0.30 < ohm.high


def test_joint_in_the_cpc_is_one_class_with_a_smaller_cpc() -> None:
    drawn = sheet(lambda drawn: drawn.joint(RUN, "E", 0.30))
    assert ends(drawn) == near(0.44, 0.44, 1.03)
    leading = said(drawn).leading
    assert leading is not None
    assert leading.group == "cpc_other"


def test_bridge_from_point_2_to_5() -> None:
    drawn = sheet(lambda drawn: drawn.lay("p2", "p5", 4.0))
    assert ends(drawn) == near(0.26, 0.26, 0.43)
    values = [value or 0.0 for value in read(drawn, "ln_cross")]
    assert values[0] == pytest.approx(0.13, abs=0.0101)
    assert max(values[2:4]) == pytest.approx(0.21, abs=0.0151)
    reading = said(drawn)
    assert {"bridged_ring", "ring_with_spurs"} & {item.id for item in reading.explanations[:3]}
    assert "bridged_ring" in [item.id for item in reading.explanations]
    assert reading.settle is not None


def test_cpc_of_1_0_and_of_equal_size() -> None:
    small = sheet(lambda drawn: _lay_again(drawn, lambda c, _: 1.0 if c == "E" else 2.5))
    assert ends(small) == near(0.44, 0.44, 1.09)
    equal = sheet(lambda drawn: _lay_again(drawn, lambda *_: 2.5))
    assert ends(equal) == near(0.44, 0.44, 0.44)
    for drawn, stops in ((small, True), (equal, False)):
        leading = said(drawn).leading
        assert leading is not None
        # A smaller earth may be a joint until the cable was seen; a larger one can be nothing worse.
        assert (leading.id, leading.stops_ring) == ("size_cpc", stops)


def test_leads_not_nulled() -> None:
    def change(drawn: Drawn) -> None:
        drawn.lead_ends = drawn.lead_points = 0.2

    assert [item.id for item in said(sheet(change)).explanations][:1] == ["leads_not_nulled"]


@pytest.mark.parametrize(
    "swap, name",
    [
        ({"L": "N", "N": "L"}, "line_neutral_swapped"),
        ({"L": "E", "E": "L"}, "line_earth_swapped"),
        ({"N": "E", "E": "N"}, "neutral_earth_swapped"),
    ],
)
def test_wires_changed_over_at_a_point(swap: dict[str, str], name: str) -> None:
    drawn = sheet(lambda drawn: drawn.swapped.update(p3=swap))
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.where, leading.danger) == (name, ("p3",), True)


def test_both_cpc_ends_joined_but_off_the_bar_pass_every_dead_test() -> None:
    drawn = sheet(lambda drawn: setattr(drawn, "zs_add", 600.0))
    assert read(drawn, "le_cross") == near(0.28, 0.28, 0.29, 0.29, 0.29, 0.28, 0.28)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.danger) == ("cpc_off_bar", True)


# The table of derived signatures of a ring of r1 = rn 0.52, r2 0.85 (about 70 m), points at every tenth.
TENTHS = [7.02] * 10


def test_table_of_derived_signatures() -> None:
    healthy = [value or 0.0 for value in read(sheet(gaps=TENTHS), "le_cross")]
    assert max(healthy) == pytest.approx(0.342, abs=0.0101)
    assert read(sheet(gaps=TENTHS), "ln_cross") == near(*[0.26] * 9)
    wrong = sheet(_same, gaps=TENTHS)
    assert read(wrong, "ln_cross") == near(0.09, 0.17, 0.22, 0.25, 0.26, 0.25, 0.22, 0.17, 0.09)
    broken = sheet(lambda drawn: drawn.part(0, "N"), gaps=TENTHS)
    assert read(broken, "ln_cross") == near(*[0.52] * 9)


@pytest.mark.parametrize(
    "sizes, cable, metres, rise", [((2.5, 1.5), "ft_2_5", 106, 0.07), ((4.0, 1.5), "ft_4", 100, 0.26)]
)
def test_the_hump_of_step_3_is_healthy(sizes: tuple[float, float], cable: str, metres: float, rise: float) -> None:
    """Published formula: 7 % for 2.5/1.5, 26 % for 4/1.5; IET article on the ring, March 2022."""
    drawn = sheet(gaps=[metres / 12] * 12, r=sizes)
    drawn.cable = cable
    values = [value or 0.0 for value in read(drawn, "le_cross")]
    per_m = {2.5: 7.41, 1.5: 12.1, 4.0: 4.61}
    r1, r2 = per_m[sizes[0]], per_m[sizes[1]]
    assert (r1 + r2) / 4 / (r1 * r2 / (r1 + r2)) - 1 == pytest.approx(rise, abs=0.02)
    assert max(values) > min(values)
    leading = said(drawn).leading
    assert leading is not None
    assert (leading.id, leading.healthy) == ("intact_ring", True)
