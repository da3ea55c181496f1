"""The headroom table: each cell is what the comparison says of the same request."""

from __future__ import annotations

import pytest

from fieldtool.verdict.compare import compare
from fieldtool.verdict.table import headroom_rows
from tests.jobs import Facts, ask_for, outlet, sample


def small(body: Facts) -> None:
    body["requests"] = []
    body["points"] = [point for point in body["points"] if point["id"] in ("p2", "p5", "s1", "p3")]
    kept = {point["id"] for point in body["points"]}
    body["readings"] = [r for r in body["readings"] if r.get("point") in (None, *kept)]
    body["runs"] = []
    body["loads"] = []


def test_every_point_has_its_row_and_a_spur_is_not_spurred_from() -> None:
    job = sample("larch_row", small)
    rows = list(headroom_rows(job, "c3"))
    assert [row[0].place for row in rows if row] == [*(point.id for point in job.points_of("c3")), "board"]
    spur = next(row for row in rows if row and row[0].place == "s1")
    assert {cell.outcome for cell in spur if cell.way in ("spur_at_point", "fused_spur")} == {"stop"}
    for row in rows:
        for cell in row:
            assert cell.metres is None or (cell.clear or 0.0) <= cell.metres


@pytest.mark.parametrize("point", ["p2", "p5"])
def test_a_cell_is_what_the_comparison_says_of_a_request_of_no_length(point: str) -> None:
    job = sample("larch_row", small)
    cells = {cell.way: cell for row in headroom_rows(job, "c3") for cell in row if cell.place == point}

    def asked(body: Facts) -> None:
        small(body)
        body["requests"] = [{"id": "q1", "circuit": "c3"}]
        ask_for(body, attach="point", at=point, outlets=[outlet("w1", 0.0, where="indoors")],
                route={"method": "c", "hidden": "in_zone", "metal_partition": "no"})  # fmt: skip

    other = sample("larch_row", asked)
    for answer in compare(other, other.requests[0]):
        cell = cells.get(answer.way)
        if (
            cell is None
            or answer.verdict is None
            or answer.way in ("ring_between", "spur_at_joint_box", "heavy_branch")
        ):
            continue
        rooms = [room.metres for room in answer.verdict.headroom if room.metres is not None]
        if cell.metres is not None:
            assert cell.metres == min(rooms)
