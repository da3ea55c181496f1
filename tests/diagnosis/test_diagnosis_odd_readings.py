"""Sparse, contradictory, repeated and impossible readings: a sensible, honest sentence, and never more than they bear."""

from __future__ import annotations

from math import isfinite
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldtool.answers import CircuitReading
from fieldtool.diagnosis.entry_check import remark
from fieldtool.diagnosis.explain import explain
from fieldtool.quantities.show import cells
from fieldtool.verdict.check import readings_to_judge_under
from tests.diagnosis.scoring import job_from

Rows = list[dict[str, Any]]
CIRCUIT = {"label_claims": "ring", "cable": "ft_2_5"}


def one(test: str, value: float | None, point: str | None = None) -> dict[str, Any]:
    return {"test": test, "point": point} | ({"sign": "open"} if value is None else {"value": value})


def ends(*values: float | None) -> Rows:
    return [one(test, value) for test, value in zip(("r1", "rn", "r2"), values, strict=True)]


def at(test: str, *values: float | None) -> Rows:
    return [one(test, value, f"p{number}") for number, value in enumerate(values, start=1)]


def said(readings: Rows, count: int = 6, walk: bool = True) -> CircuitReading:
    points = [
        {"id": f"p{number}", "circuit": "c1"} | ({"walk_order": number} if walk else {})
        for number in range(1, count + 1)
    ]
    return explain(job_from(points, readings, CIRCUIT), "c1")


def leading(reading: CircuitReading) -> str:
    return reading.leading.id if reading.leading is not None else ""


HEALTHY = ends(0.44, 0.44, 0.73)
FLAT = at("ln_cross", *[0.22] * 6)
HUMP = at("le_cross", 0.28, 0.29, 0.29, 0.29, 0.29, 0.28)


def test_nothing_read_says_nothing() -> None:
    assert said([]) == CircuitReading("")


@pytest.mark.parametrize(
    "readings",
    [HEALTHY[:1], HEALTHY[:2], HEALTHY, HEALTHY + FLAT[:1], HEALTHY + FLAT, FLAT, HUMP[:4]],
    ids=["r1", "two ends", "ends", "one point", "step 2 only", "no ends", "step 3 only"],
)
def test_sparse_readings_never_show_a_ring(readings: Rows) -> None:
    reading = said(readings)
    assert not reading.shown_ring
    assert reading.sentence
    assert all(item.odds != "almost_certainly" for item in reading.explanations if item.healthy)


def test_healthy_readings_show_a_ring_and_say_what_they_cannot_show() -> None:
    reading = said(HEALTHY + FLAT + HUMP)
    assert reading.shown_ring
    assert "Shown to be a ring" in reading.sentence
    assert reading.smallest_spur_m is not None
    assert 1.5 < reading.smallest_spur_m < 3.5


def test_contact_scatter_of_0_03_does_not_alarm() -> None:
    """Common practice: nothing is made of ±0.03 Ω between contacts."""
    ln = at("ln_cross", 0.22, 0.25, 0.20, 0.24, 0.19, 0.22)
    le = at("le_cross", 0.28, 0.31, 0.26, 0.30, 0.29, 0.27)
    reading = said(HEALTHY + ln + le)
    assert reading.shown_ring
    assert reading.leading is not None
    assert not reading.leading.stops_ring


def test_scatter_makes_the_smallest_spur_longer() -> None:
    rough = said(HEALTHY + at("ln_cross", 0.22, 0.25, 0.19, 0.24, 0.18, 0.22) + HUMP)
    assert (rough.smallest_spur_m or 0) > (said(HEALTHY + FLAT + HUMP).smallest_spur_m or 0)


def test_open_end_against_crossed_readings_that_show_it_whole() -> None:
    reading = said(ends(None, 0.44, 0.73) + FLAT + HUMP)
    assert leading(reading) == "end_slip"
    assert "r1 reads open" in reading.sentence
    assert not reading.shown_ring


@pytest.mark.parametrize("wrong, right", [(26.0, "0.26"), (5.3, "0.53")])
def test_a_slip_of_the_digits_is_kept_and_asked_about(wrong: float, right: str) -> None:
    rows = ends(0.53, 0.53, 0.87) + at("ln_cross", *[0.26] * 6) + at("le_cross", *[0.34] * 6)
    target = next(row for row in rows if f"{row['value']:.2f}" == right)
    target["value"] = wrong
    reading = said(rows)
    assert right in reading.sentence
    assert not reading.shown_ring


def test_crossed_readings_all_open_with_a_whole_ring() -> None:
    reading = said(HEALTHY + at("ln_cross", *[None] * 6) + at("le_cross", *[None] * 6))
    assert leading(reading) == "one_join_left_off"
    assert "joins are not made" in reading.sentence


def test_everything_open() -> None:
    reading = said(ends(None, None, None) + at("ln_cross", *[None] * 6) + at("le_cross", *[None] * 6))
    assert leading(reading) == "not_a_ring"


@pytest.mark.parametrize(
    "rows",
    [
        ends(0.5, 0.5, 0.5) + at("ln_cross", *[0.5] * 6) + at("le_cross", *[0.5] * 6),
        HEALTHY + at("ln_cross", *[0.44] * 6) + at("le_cross", *[0.58] * 6),
        ends(0.0, 0.0, 0.0) + at("ln_cross", *[0.0] * 6) + at("le_cross", *[0.0] * 6),
        HEALTHY + at("ln_cross", 1.3, 0.1, 2.2, 0.7, 0.05, 1.9) + at("le_cross", 0.2, 2.4, 0.9, 0.1, 3.0, 1.1),
    ],
    ids=["all equal", "all double", "all zero", "rubbish"],
)
def test_figures_that_cannot_be_right_stop_the_ring(rows: Rows) -> None:
    reading = said(rows)
    assert reading.leading is not None
    assert reading.leading.stops_ring
    assert not reading.shown_ring
    assert reading.settle is not None


def test_nothing_fits_says_do_not_rely() -> None:
    rows = HEALTHY + at("ln_cross", 1.3, 0.1, 2.2, 0.7, 0.05, 1.9) + at("le_cross", 0.2, 2.4, 0.9, 0.1, 3.0, 1.1)
    reading = said(rows)
    assert reading.nothing_fits
    assert "do not rely on these" in reading.sentence


def test_two_readings_of_one_point_that_disagree_name_the_point() -> None:
    reading = said(HEALTHY + FLAT + [one("ln_cross", 0.55, "p3")] + HUMP)
    assert leading(reading) == "worn_contact"
    assert reading.leading is not None
    assert reading.leading.where == ("p3",)


def test_the_order_of_points_that_were_not_walked_means_nothing() -> None:
    ln, le = [0.22, 0.22, 0.31, 0.22, 0.22, 0.22], [0.28, 0.29, 0.40, 0.29, 0.29, 0.28]
    one_way = said(HEALTHY + at("ln_cross", *ln) + at("le_cross", *le), walk=False)
    other = said(HEALTHY + at("ln_cross", *ln[::-1]) + at("le_cross", *le[::-1]), walk=False)
    assert leading(one_way) == leading(other) == "ring_with_spurs"
    assert one_way.leading is not None
    assert other.leading is not None
    assert (one_way.leading.where, other.leading.where) == (("p3",), ("p4",))


def test_every_class_that_stands_is_judged_under() -> None:
    reading = said(ends(0.44, 0.44, 0.73) + at("ln_cross", 0.22, 0.22, 0.24, 0.22, 0.22, 0.22) + HUMP)
    under = readings_to_judge_under(reading)
    standing = {item.group for item in reading.explanations if item.stands}
    assert len(under) == min(3, len(standing))


def test_an_end_reading_that_no_cable_could_give_is_asked_about() -> None:
    job = job_from([], [], CIRCUIT)
    found = remark(job, "c1", None, "r1", "as_found", 53.0, "=")
    assert found is not None
    assert found.doubt
    assert "0.53" in found.sentence
    touching = remark(job, "c1", None, "r1", "as_found", 0.01, "=")
    assert touching is not None
    assert touching.doubt
    likely = remark(job, "c1", None, "r1", "as_found", 0.53, "=")
    assert likely is None or not likely.doubt


value = st.one_of(st.none(), st.floats(0, 3).map(lambda v: round(v, 2)), st.floats(0, 2000).map(lambda v: round(v, 1)))


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_any_readings_at_all_get_an_answer_that_can_be_printed(data: st.DataObject) -> None:
    rows = [one(test, data.draw(value)) for test in data.draw(st.sets(st.sampled_from(["r1", "rn", "r2"])))]
    count = data.draw(st.integers(0, 7))
    for test in ("ln_cross", "le_cross", "r1_r2", "zs"):
        places = data.draw(st.sets(st.integers(1, count), max_size=7)) if count else set()
        rows += [one(test, data.draw(value), f"p{place}") for place in sorted(places)]
    rows += [{"test": "ze", "point": None, "value": 0.3}] * data.draw(st.integers(0, 1))
    reading = said(rows, count, data.draw(st.booleans()))
    for item in reading.explanations:
        assert item.sentence
        assert cells(item.sentence) <= 80
        assert all(isfinite(one.low) and isfinite(one.value) and isfinite(one.high) for one in item.inferred)
        assert all(isfinite(number) for _, _, number in item.predicted)
        assert "nan" not in item.sentence
