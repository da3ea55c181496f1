"""The closed form of a ring's readings equals the nodal solution, whatever is wrong with the ring."""

from __future__ import annotations

from dataclasses import replace
from math import inf, log

import numpy as np
import pytest

from fieldtool.diagnosis.chain import FIXED, JOINT, LINK, LOG_T, ONE, RATIO, SAME, predict
from fieldtool.diagnosis.evidence import gather
from fieldtool.diagnosis.frame import frame_of
from fieldtool.diagnosis.shapes import Shape, specs_of
from fieldtool.network.arrangements import all_readings, crossed_right, crossed_wrong, end_to_end, one_join_left_off
from fieldtool.network.grid import r1_r2, solve
from fieldtool.network.layout import LayoutRun
from tests.circuits import ohms, ring
from tests.diagnosis.scoring import job_from

GAPS = [6.0, 9.0, 4.0, 12.0, 8.0, 11.0]
LINE, CPC = 0.00741, 0.0121
COUNT = len(GAPS) - 1


def chain(shape: Shape, joint: float = 0.3, link: float = 5.0) -> np.ndarray:
    points = [{"id": f"p{n}", "circuit": "c1", "walk_order": n} for n in range(1, COUNT + 1)]
    readings = [{"test": test, "point": f"p{n}", "value": 0.2} for test in ("ln_cross", "le_cross") for n in (1, 2, 3)]
    evidence = gather(job_from(points, readings, {"cable": "ft_2_5"}), "c1", "as_found")
    frame = frame_of(evidence)
    specs = specs_of(frame, [shape])
    theta = np.zeros(specs.mean.shape[1])
    theta[LOG_T], theta[RATIO] = log(sum(GAPS) * LINE), log(CPC / LINE)
    theta[JOINT], theta[LINK] = log(joint), log(link * LINE)
    theta[FIXED : FIXED + len(GAPS)] = np.log(GAPS)
    fixed = replace(specs, mean=theta[None, :], spread=np.zeros((1, len(theta))))
    return predict(frame, fixed, np.zeros((1, 1, len(theta))), full=True)[0, 0]


def points(values: dict[str, float]) -> list[float]:
    return [values[f"p{n}"] for n in range(1, COUNT + 1)]


CASES = [
    ("whole", Shape("", 0.0), {}),
    ("line open", Shape("", 0.0, open_run=(2, -1, -1)), {("leg2", "line"): inf}),
    ("cpc open", Shape("", 0.0, open_run=(-1, -1, 4)), {("leg4", "cpc"): inf}),
    ("joint in the neutral", Shape("", 0.0, joint_run=3, joint_of=1), {("leg3", "neutral"): 0.3}),
]


@pytest.mark.parametrize("shape, edits", [case[1:] for case in CASES], ids=[case[0] for case in CASES])
def test_closed_form_equals_nodal_solution(shape: Shape, edits: dict[tuple[str, str], float]) -> None:
    layout = ring(GAPS)
    runs = []
    for run in layout.runs:
        for (name, conductor), more in edits.items():
            if name == run.id:
                run = replace(run, ohms=replace(run.ohms, **{conductor: getattr(run.ohms, conductor) + more}))
        runs.append(run)
    layout = replace(layout, runs=tuple(runs))
    shown = chain(shape)
    whole = end_to_end(layout)
    assert list(shown[:3]) == pytest.approx([whole.line, whole.neutral, whole.cpc])
    for block, other in enumerate(("neutral", "cpc")):
        mine = shown[3 + block * COUNT : 3 + (block + 1) * COUNT]
        assert list(mine) == pytest.approx(points(all_readings(layout, crossed_right(other))))
    if not edits:
        assert list(shown[3 + 2 * COUNT : 3 + 3 * COUNT]) == pytest.approx(points(r1_r2(solve(layout))))


def test_slips_of_the_joins() -> None:
    layout = ring(GAPS)
    wrong = chain(Shape("", 0.0, join_ln=SAME, join_le=SAME))
    assert list(wrong[3 : 3 + COUNT]) == pytest.approx(points(all_readings(layout, crossed_wrong("neutral"))))
    assert list(wrong[3 + COUNT : 3 + 2 * COUNT]) == pytest.approx(points(all_readings(layout, crossed_wrong("cpc"))))
    off = chain(Shape("", 0.0, join_le=ONE))
    assert list(off[3 + COUNT : 3 + 2 * COUNT]) == pytest.approx(points(all_readings(layout, one_join_left_off("cpc"))))


def test_a_link_is_exactly_a_shorter_ring_with_a_row_of_spurs() -> None:
    layout = ring(GAPS)
    layout = layout.with_runs([LayoutRun("link", "p2", "p5", ohms(5.0), None, 5.0)])
    shown = chain(Shape("", 0.0, link=(1, 4)))
    whole = end_to_end(layout)
    assert list(shown[:3]) == pytest.approx([whole.line, whole.neutral, whole.cpc])
    assert list(shown[3 : 3 + COUNT]) == pytest.approx(points(all_readings(layout, crossed_right("neutral"))))
    assert list(shown[3 + COUNT : 3 + 2 * COUNT]) == pytest.approx(points(all_readings(layout, crossed_right("cpc"))))
    assert list(shown[3 + 2 * COUNT : 3 + 3 * COUNT]) == pytest.approx(points(r1_r2(solve(layout))))
