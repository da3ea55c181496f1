"""Laws of the verdict that hold for any job: what is missing never passes, what is worse never helps."""

from __future__ import annotations

import random
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from fieldtool.answers import WayAnswer
from fieldtool.diagnosis.explain import explain
from fieldtool.job.job import Job
from fieldtool.verdict.compare import compare, existing, judge
from fieldtool.ways.way import every_way
from tests.jobs import Facts, facts, made, row, sample, set_reading

RANK = {"go": 0, "conditions": 1, "more": 2, "stop": 3}
SPUR = "spur_at_point"


def spur(job: Job) -> WayAnswer:
    way = next(item for item in every_way() if item.key == SPUR)
    return judge(job, job.requests[0], way, explain(job, job.requests[0].circuit))


def verdict(job: Job) -> str:
    return spur(job).outcome


@settings(max_examples=40)
@given(st.data())
def test_a_missing_reading_never_gives_go(data: st.DataObject) -> None:
    body = facts("larch_row")
    # The RCD's button is worth pressing, but no way waits for it.
    gone = data.draw(st.sampled_from(sorted({item["test"] for item in body["readings"]} - {"rcd_button"})))
    body["readings"] = [item for item in body["readings"] if item["test"] != gone]
    job = made(body)
    assert verdict(job) != "go"


SURVEY = [
    ("supply", "system"),
    ("supply", "sources"),
    ("supply", "earthing_conductor"),
    ("supply", "bonding"),
    ("circuits", "heat_seen"),
    ("circuits", "back_feed"),
    ("circuits", "cable"),
    ("circuits", "rcd_covers"),
    ("circuits", "device"),
    ("boards", "condition"),
]


@settings(max_examples=20)
@given(st.sampled_from(SURVEY))
def test_an_unanswered_question_of_the_survey_never_gives_go(place: tuple[str, str]) -> None:
    body = facts("larch_row")
    table, key = place
    target = body["supply"] if table == "supply" else body[table][0]
    target.pop(key, None)
    if key == "rcd_covers":
        target.pop("rcd", None)
    assert verdict(made(body)) in ("more", "stop")


@settings(max_examples=40)
@given(st.floats(0.0, 0.6), st.sampled_from(["p1", "p3", "p5", "p8"]))
def test_a_lower_live_loop_never_buys_headroom(less: float, point: str) -> None:
    # Without any live reading at the point the dead readings alone decide; a live one below them adds nothing.
    plain = sample("larch_row", lambda body: _live(body, point, 0.05))
    flattered = sample("larch_row", lambda body: _live(body, point, 0.05 + less))
    for before, after in zip(_metres(plain), _metres(flattered), strict=True):
        assert after <= before


def _live(body: Facts, point: str, less: float) -> None:
    for item in body["readings"]:
        if item["test"] == "zs" and item.get("point") == point:
            item["value"] = max(0.01, round(item["value"] - less, 2))
            item["raw"] = f"{item['value']:.2f}"


def _metres(job: Job) -> list[float]:
    found = spur(job).verdict
    assert found is not None
    return [
        room.metres if room.metres is not None else 1e9 for room in sorted(found.headroom, key=lambda r: r.limit_key)
    ]


@settings(max_examples=30)
@given(st.randoms(use_true_random=False))
def test_the_order_of_rows_never_matters(shuffle: random.Random) -> None:
    body = facts("larch_row")
    plain = spur(made(facts("larch_row")))
    for table in ("points", "runs", "readings"):
        rows: list[Any] = body[table]
        shuffle.shuffle(rows)
    assert spur(made(body)) == plain


@settings(max_examples=25)
@given(
    st.sampled_from([30.0, 35.0, 40.0, 45.0, 50.0, 55.0]),
    st.integers(1, 9),
    st.sampled_from(["c", "100", "102", "101", "103"]),
)
def test_a_worse_place_for_the_cable_never_turns_stop_into_go(ambient: float, grouped: int, method: str) -> None:
    def worse(body: Facts) -> None:
        install = row(body, "circuits", "c3")["install"]
        install.update(ambient_c=ambient, grouped_n=grouped, method=method)

    easy, hard = sample("larch_row"), sample("larch_row", worse)
    assert RANK[existing(hard, "c3").outcome] >= RANK[existing(easy, "c3").outcome]
    assert RANK[verdict(hard)] >= RANK[verdict(easy)]


@settings(max_examples=25)
@given(st.floats(0.0, 2.0))
def test_a_higher_loop_never_turns_stop_into_go(more: float) -> None:
    def worse(body: Facts) -> None:
        set_reading(body, "ze", round(0.18 + more, 2))

    assert RANK[verdict(sample("larch_row", worse))] >= RANK[verdict(sample("larch_row"))]


def test_the_same_job_always_gives_the_same_verdict() -> None:
    job = sample("larch_row")
    assert compare(job, job.requests[0]) == compare(job, job.requests[0])


@settings(max_examples=30)
@given(st.floats(0.5, 60.0))
def test_headroom_rounds_down_and_predictions_round_up(metres: float) -> None:
    def longer(body: Facts) -> None:
        body["requests"][0]["outlets"][0]["metres"] = round(metres, 1)

    job = sample("larch_row", longer)
    found = spur(job).verdict
    assert found is not None
    for room in found.headroom:
        if room.metres is not None:
            assert room.metres * 2 == int(room.metres * 2)
            assert room.metres_clear is None or room.metres_clear <= room.metres
    worst = next(f for f in found.findings if f.limit_key == "zs" and f.place == "w1")
    shown = next(p for p in found.predicted if p.test == "zs" and p.place == "w1")
    assert worst.measured is not None
    assert worst.measured <= shown.value < worst.measured + 0.01 + 1e-9
