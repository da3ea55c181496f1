"""Changes: all or none, written into the history, undone by a change of their own, never an overwritten reading."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import ValidationError

from fieldtool.job.changes import ChangeProblem, Put, Remove, apply, new_ids, redo_changes, undo_changes
from fieldtool.job.circuit import Circuit, Point
from fieldtool.job.history import accounted, fold
from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import ROW_TABLES, Job
from fieldtool.job.place import Board, Site
from fieldtool.job.reading import Reading
from tests.jobs import facts, made

NOW = datetime(2026, 12, 1, 9, 0, tzinfo=UTC)


def begun() -> Job:
    job = Job()
    changes = [
        Put("boards", Board(id="b1")),
        Put("circuits", Circuit(id="c1", board="b1", name="ring")),
        Put("points", Point(id="p1", circuit="c1", name="door")),
    ]
    return apply(job, changes, at=NOW)


def reading(row_id: str, value: float, **more: object) -> Reading:
    return Reading(id=row_id, circuit="c1", point="p1", test="zs", value=value, raw=f"{value}", at=NOW, **more)  # type: ignore[arg-type]


def folded_equals(job: Job) -> bool:
    state = fold(job.history)
    for table in ROW_TABLES:
        stored = {row.id: row.model_dump_json() for row in getattr(job, table)}
        if stored != state[table]:
            return False
    return all(
        state.get(name, type(row)().model_dump_json()) == row.model_dump_json()
        for name, row in (("site", job.site), ("supply", job.supply))
    )


STEPS = st.lists(
    st.sampled_from(["name", "point", "read", "correct", "log", "undo", "redo", "remove"]), min_size=1, max_size=25
)


@given(STEPS)
def test_folding_the_history_from_an_empty_job_gives_the_stored_state(steps: list[str]) -> None:
    job, now = begun(), NOW
    for number, step in enumerate(steps):
        now += timedelta(minutes=1)
        job, (row_id,) = new_ids(job, ["z"])
        standing = job.standing()
        if step == "name":
            job = apply(job, [Put("site", Site(name=f"name {number}"))], at=now)
        elif step == "point":
            if job.circuits:
                job = apply(job, [Put("points", Point(id=row_id, circuit="c1"))], at=now)
        elif step == "read" and any(p.id == "p1" for p in job.points):
            job = apply(job, [Put("readings", reading(row_id, 0.5))], at=now)
        elif step == "correct" and standing and any(p.id == "p1" for p in job.points):
            job = apply(job, [Put("readings", reading(row_id, 0.6, replaces=standing[-1].id))], at=now)
        elif step == "log" and job.circuits:
            job = apply(job, [Put("isolation", IsolationEntry(id=row_id, kind="off", circuit="c1", at=now))], at=now)
        elif step == "undo":
            job = undo_changes(job, at=now) or job
        elif step == "redo":
            job = redo_changes(job, at=now) or job
        elif step == "remove":
            spare = [point.id for point in job.points if point.id != "p1"]
            job = apply(job, [Remove("points", spare[0])], at=now) if spare else job
        assert folded_equals(job)
        assert [entry.n for entry in job.history] == list(range(1, len(job.history) + 1))


@given(STEPS)
def test_a_file_edited_by_hand_has_a_history_that_adds_up_and_nothing_found_in_it_is_undone(steps: list[str]) -> None:
    """Rows that no entry made are told as found in the file; what the person then enters can still be undone."""
    body = facts("larch_row")
    job = made(body)
    assert not folded_equals(job)
    job = accounted(job, at=NOW)
    assert folded_equals(job)
    assert accounted(job, at=NOW) is job
    assert undo_changes(job, at=NOW) is None
    for step in steps:
        turned = {"undo": undo_changes, "redo": redo_changes}.get(step)
        if turned is not None:
            job = turned(job, at=NOW) or job
        else:
            job = apply(job, [Put("site", Site(name=f"{step} {len(job.history)}"))], at=NOW)
        assert folded_equals(job)
    edited = job.model_copy(
        update={"supply": job.supply.model_copy(update={"u0_v": 240.0}), "points": job.points[1:], "readings": ()}
    )
    told = accounted(edited, at=NOW)
    assert folded_equals(told)
    assert {entry.what for entry in told.history[len(job.history) :]} >= {"supply", f"points/{job.points[0].id}"}


def test_undo_withdraws_a_reading_and_redo_brings_it_back() -> None:
    job = apply(begun(), [Put("readings", reading("m1", 0.5))], at=NOW)
    undone = undo_changes(job, at=NOW)
    assert undone is not None
    assert not undone.standing()
    assert "m1" in {row.id for row in undone.readings}
    again = redo_changes(undone, at=NOW)
    assert again is not None
    assert [row.value for row in again.standing()] == [0.5]


def test_undoing_a_correction_brings_the_old_value_back() -> None:
    job = apply(begun(), [Put("readings", reading("m1", 26.0))], at=NOW)
    job = apply(job, [Put("readings", reading("m2", 0.26, replaces="m1"))], at=NOW)
    undone = undo_changes(job, at=NOW)
    assert undone is not None
    assert [row.value for row in undone.standing()] == [26.0]


def test_the_isolation_log_is_never_undone() -> None:
    job = begun()
    job = apply(job, [Put("isolation", IsolationEntry(id="i1", kind="off", circuit="c1", at=NOW))], at=NOW)
    undone = undo_changes(job, at=NOW)
    assert undone is None or undone.isolation == job.isolation


def test_a_reading_is_never_overwritten_or_taken_out() -> None:
    job = apply(begun(), [Put("readings", reading("m1", 0.5))], at=NOW)
    with pytest.raises(ChangeProblem, match="never overwritten"):
        apply(job, [Put("readings", reading("m1", 0.4))], at=NOW)
    with pytest.raises(ChangeProblem, match="never taken out"):
        apply(job, [Remove("readings", "m1")], at=NOW)


def test_a_change_that_leaves_the_job_unsound_is_refused_whole() -> None:
    job = begun()
    with pytest.raises(ChangeProblem, match="p1"):
        apply(job, [Put("site", Site(name="x")), Put("runs", _run())], at=NOW)
    assert job.site.name == ""


def _run():  # type: ignore[no-untyped-def]
    from fieldtool.job.circuit import Run

    return Run(id="n1", circuit="c1", a="p1", b="p1")


@pytest.mark.parametrize(
    "values",
    [
        {"value": -1.0},
        {"value": float("nan")},
        {"value": None},
        {"value": 0.5, "answer": "right"},
        {"value": 0.5, "origin": "limitation", "why_not": "x"},
        {"origin": "limitation"},
    ],
)
def test_a_reading_has_exactly_one_content(values: dict[str, object]) -> None:
    base = {"id": "m1", "circuit": "c1", "point": "p1", "test": "zs", "at": NOW}
    with pytest.raises(ValidationError):
        Reading(**{**base, **values})  # type: ignore[arg-type]
