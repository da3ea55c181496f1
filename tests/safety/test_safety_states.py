"""The isolation state: only the whole sequence says proved dead, and everything that can end it does."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import Any

import pytest
from hypothesis import settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, invariant, rule

from fieldtool.job.changes import Put, apply, new_ids, undo_changes
from fieldtool.job.isolation import IsolationEntry, Parted
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.quantities.show import cells
from fieldtool.safety.after import after_work
from fieldtool.safety.budget import MIND_CELLS, NEXT_CELLS
from fieldtool.safety.log import Accepted, Refused, accept, needs_taken, steps
from fieldtool.safety.next_step import next_step, shelf_step
from fieldtool.safety.parting import may_part, may_restore, outstanding
from fieldtool.safety.states import PROOF_LASTS, both_poles_needed, next_change, sequence, state
from fieldtool.safety.strip import strip
from fieldtool.verdict.compare import existing
from tests.jobs import Facts, drop_readings, row, sample

NOW = datetime(2026, 12, 1, 9, 0, tzinfo=UTC)
C = "c3"
PROOF = ("tester_proved_before", "dead_tested", "tester_proved_after")
ASKED: dict[str, dict[str, Any]] = {
    "survey_eye": {"found_well": True},
    "metalwork_checked": {"found_well": True},
    "permission": {"detail": "occupier"},
    "locked": {"detail": "lock 4"},
    "sources_isolated": {"detail": "switch in the loft"},
    "tester_proved_before": {"tester": "TESTER 2"},
    "dead_tested": {"volts": (0.0, 0.0, 0.0)},
    "tester_proved_after": {"tester": "TESTER 2"},
}


def logged(job: Job, kind: str, now: datetime, circuit: str | None = C, **more: Any) -> Job | Refused:
    job, (row_id,) = new_ids(job, ["i"])
    answer = accept(job, kind, circuit, now, entry_id=row_id, **{**ASKED.get(kind, {}), **more})  # type: ignore[arg-type]
    if isinstance(answer, Refused):
        return answer
    assert isinstance(answer, Accepted)
    return apply(job, [Put("isolation", answer.entry)], at=now)


def proved(job: Job, now: datetime = NOW, circuit: str = C, place: str = "board") -> tuple[Job, datetime]:
    for kind in sequence(job, circuit):
        now += timedelta(minutes=1)
        found = logged(job, kind, now, circuit, place=place)
        assert isinstance(found, Job), found
        job = found
    return job, now


def test_the_whole_sequence_proves_dead_at_the_place_named() -> None:
    job, now = proved(sample())
    found = state(job, C, now)
    assert found.word == "proved_dead"
    assert found.places == ("board",)


@pytest.mark.parametrize(
    "left_out", ["survey_eye", "permission", "identified", "off", "locked", "tester_proved_before"]
)
def test_a_step_out_of_order_is_refused_and_says_what_comes_first(left_out: str) -> None:
    job, now = sample(), NOW
    wanted = sequence(job, C)
    for kind in wanted[: wanted.index(left_out)]:
        now += timedelta(minutes=1)
        found = logged(job, kind, now)
        assert isinstance(found, Job)
        job = found
    later = wanted[wanted.index(left_out) + 1]
    refused = logged(job, later, now + timedelta(minutes=1))
    assert isinstance(refused, Refused)
    assert refused.first == left_out
    assert "comes before" in refused.sentence


@pytest.mark.parametrize("volts", [(0.0, 0.0, 1.0), (230.0, 230.0, 0.0), (0.0, 49.0, 49.0)])
def test_any_volts_are_not_dead(volts: tuple[float, float, float]) -> None:
    job, now = sample(), NOW
    for kind in sequence(job, C)[:-1]:
        now += timedelta(minutes=1)
        found = logged(job, kind, now, **({"volts": volts} if kind == "dead_tested" else {}))
        assert isinstance(found, Job)
        job = found
    assert not state(job, C, now).dead
    assert state(job, C, now).alarm
    assert isinstance(logged(job, "tester_proved_after", now + timedelta(minutes=1)), Refused)
    assert "not dead" in next_step(job, C, now).sentence


@pytest.mark.parametrize("kind, word", [
    ("opened", "not_known"), ("left_site", "not_known"), ("unlocked", "not_known"), ("restored", "live"),
])  # fmt: skip
def test_what_ends_a_proof(kind: str, word: str) -> None:
    job, now = proved(sample())
    now += timedelta(minutes=1)
    job = apply(job, [Put("isolation", IsolationEntry(id="z1", kind=kind, circuit=C, at=now))], at=now)  # type: ignore[arg-type]
    assert state(job, C, now).word == word


def test_a_proof_lapses_by_time_by_a_strike_and_by_a_clock_moved_back() -> None:
    job, now = proved(sample())
    at = state(job, C, now).proved_at
    assert at is not None
    assert state(job, C, at + PROOF_LASTS).dead
    assert not state(job, C, at + PROOF_LASTS + timedelta(seconds=1)).dead
    assert state(job, C, now - timedelta(seconds=1)).word == "not_known"
    struck = IsolationEntry(id="z1", kind="struck", circuit=C, at=now, strikes=job.isolation[2].id)
    assert not state(apply(job, [Put("isolation", struck)], at=now), C, now).dead
    turn = next_change(job, now)
    assert turn is not None
    assert now < turn <= at + PROOF_LASTS + timedelta(seconds=1)


def test_working_on_another_circuit_ends_the_proof() -> None:
    def second(body: Facts) -> None:
        other = dict(row(body, "circuits", C))
        other.update(id="c9", name="other")
        body["circuits"].append(other)

    job, now = proved(sample("larch_row", second))
    now += timedelta(minutes=1)
    job = apply(job, [Put("isolation", IsolationEntry(id="z1", kind="identified", circuit="c9", at=now))], at=now)
    assert not state(job, C, now).dead


def test_parting_a_neutral_ends_the_proof_at_that_place_until_it_is_proved_again() -> None:
    job, now = proved(sample("larch_row", lambda body: row(body, "circuits", C).update(line_ends=1)))
    assert state(job, C, now).word == "board_dead"
    now += timedelta(minutes=1)
    parted = Parted(id="x1", circuit=C, what="neutral legs", sort="parted", conductor="neutral", at=now)
    job = apply(job, [Put("parted", parted)], at=now)
    assert not state(job, C, now).dead
    for kind in ("tester_proved_before", "dead_tested", "tester_proved_after"):
        now += timedelta(minutes=1)
        found = logged(job, kind, now)
        assert isinstance(found, Job)
        job = found
    assert state(job, C, now).dead


def test_parting_at_the_board_needs_the_main_switch_off() -> None:
    job, now = proved(sample())
    assert "main switch off" in may_part(job, C, "line legs", "parted", now)
    assert "Not proved dead" in may_part(sample(), C, "line legs", "parted", NOW)


@pytest.mark.parametrize("edit, said", [
    (lambda b: row(b, "circuits", C).update(line_ends=1), "way"),
    (lambda b: row(b, "circuits", C).update(neutral_ends=1), "match"),
    (lambda b: (b["supply"].update(system="tt")), "TT"),
])  # fmt: skip
def test_a_leg_elsewhere_a_borrowed_neutral_or_tt_take_the_whole_board_off(edit: Any, said: str) -> None:
    job = sample("larch_row", edit)
    assert said in both_poles_needed(job, C)
    assert "main_switch_off" in sequence(job, C)


def test_tt_with_a_switch_that_cuts_the_line_only_never_gets_there() -> None:
    def edit(body: Facts) -> None:
        body["supply"]["system"] = "tt"
        row(body, "boards", "b1")["main_switch"] = "line_only"

    job = sample("larch_row", edit)
    now = NOW
    for kind in sequence(job, C):
        now += timedelta(minutes=1)
        found = logged(job, kind, now)
        if isinstance(found, Refused):
            assert "all poles" in found.sentence
            break
        job = found
    assert not state(job, C, now).dead
    assert "main_switch_off" in sequence(job, C)


def test_a_battery_must_be_isolated_and_an_unknown_source_stops_short() -> None:
    def battery(body: Facts) -> None:
        body["supply"].update(
            sources="some", other_sources=[{"kind": "battery", "isolated_by": "isolator", "feeds_back": "yes"}]
        )

    job = sample("larch_row", battery)
    assert "sources_isolated" in sequence(job, C)
    unknown = sample("larch_row", lambda body: body["supply"].pop("sources"))
    now = NOW
    for kind in sequence(unknown, C):
        now += timedelta(minutes=1)
        found = logged(unknown, kind, now)
        if isinstance(found, Refused):
            assert "other sources" in found.sentence
            return
        unknown = found
    raise AssertionError("proved dead with sources not known")


def test_a_held_key_cannot_write_the_log() -> None:
    job = sample()
    found = logged(job, "survey_eye", NOW, tick_s=10.0)
    assert isinstance(found, Job)
    again = logged(found, "survey_eye", NOW, tick_s=10.3, last_tick_s=10.0)
    assert isinstance(again, Refused)
    fast = logged(found, "metalwork_checked", NOW, tick_s=10.3, last_tick_s=10.0)
    assert isinstance(fast, Job)
    assert fast.isolation[-1].too_fast


def test_nothing_is_restored_with_something_parted_or_joined() -> None:
    job = sample("larch_row_annexe")
    assert len(outstanding(job)) == 3
    assert "Still parted" in may_restore(job, "c4")
    refused = logged(job, "restored", NOW, "c4")
    assert isinstance(refused, Refused)
    assert "parted" in strip(job, "c4", NOW).mind.lower()


def test_the_job_left_with_legs_parted_asks_for_the_log_before_anything_else() -> None:
    step = next_step(sample("larch_row_annexe"), "c4", NOW)
    assert step.kind in sequence(sample("larch_row_annexe"), "c4")
    assert "Still parted" in step.why


def test_a_dead_reading_outside_proved_dead_is_questioned() -> None:
    assert needs_taken(sample(), C, "r1", None, NOW)
    job, now = proved(sample())
    assert not needs_taken(job, C, "r1", None, now)
    assert not needs_taken(sample(), C, "zs", "p1", NOW)


def test_every_sentence_fits_its_row() -> None:
    def long_names(body: Facts) -> None:
        for point in body["points"]:
            point["name"] = "behind the tall refrigerator in the far corner"
        row(body, "circuits", C)["name"] = "kitchen and utility ring with conservatory"

    for name, circuit in (("larch_row", C), ("larch_row_annexe", "c4"), ("quarry_yard", "c1"), ("old_chapel", "c2")):
        job = sample(name, long_names) if name == "larch_row" else sample(name)
        now = NOW
        for kind in (*sequence(job, circuit), ""):
            view, step = strip(job, circuit, now), next_step(job, circuit, now, verdict=existing(job, circuit))
            assert cells(step.sentence) <= NEXT_CELLS
            assert cells(view.mind) <= MIND_CELLS
            assert step.why
            now += timedelta(minutes=1)
            found = logged(job, kind, now, circuit) if kind else job
            job = found if isinstance(found, Job) else job
    assert cells(shelf_step().sentence) <= NEXT_CELLS


def test_no_plate_but_proved_dead_is_calm() -> None:
    job, now = proved(sample())
    assert not strip(job, C, now).hot
    assert strip(job, None, now).hot
    for other in (sample(), sample("larch_row_annexe")):
        assert strip(other, other.circuits[0].id, NOW).hot


def both_off(job: Job) -> tuple[Job, datetime]:
    """The circuit proved dead with the main switch off as well, at the board."""
    now = NOW
    wanted = list(sequence(job, C))
    wanted.insert(wanted.index("locked"), "main_switch_off")
    for kind in wanted:
        now += timedelta(minutes=1)
        found = logged(job, kind, now)
        assert isinstance(found, Job), found
        job = found
    return job, now


def part(job: Job, now: datetime, what: str, conductor: str, sort: str = "parted", circuit: str = C) -> Job:
    job, (row_id,) = new_ids(job, ["x"])
    row = Parted(id=row_id, circuit=circuit, what=what, sort=sort, conductor=conductor, at=now)  # type: ignore[arg-type]
    return apply(job, [Put("parted", row)], at=now)


def test_an_earth_said_to_be_back_is_not_handed_over_before_a_live_reading_proves_it() -> None:
    """Both cpc ends joined to each other but off the bar pass every dead ring test; one live Zs does not."""
    job, now = both_off(sample())
    job = part(job, now, "earth legs A and B", "cpc")
    now += timedelta(minutes=30)
    job = apply(job, [Put("parted", outstanding(job)[0].model_copy(update={"back_at": now}))], at=now)
    now += timedelta(minutes=1)
    restored = logged(job, "restored", now)
    assert isinstance(restored, Job), "the supply comes back for the live test"
    job = restored
    assert "Earth back, not proved" in strip(job, C, now).mind
    refused = logged(job, "handed_over", now + timedelta(minutes=1))
    assert isinstance(refused, Refused)
    assert "live Zs" in refused.sentence
    job, (row_id,) = new_ids(job, ["m"])
    zs = Reading(id=row_id, circuit=C, point=job.points_of(C)[-1].id, test="zs", value=0.6, raw="0.60", at=now)
    job = apply(job, [Put("readings", zs)], at=now)
    assert isinstance(logged(job, "handed_over", now + timedelta(minutes=2)), Job)
    assert "Earth back" not in strip(job, C, now).mind


def test_a_board_does_not_come_back_while_another_of_its_circuits_is_open() -> None:
    def second(body: Facts) -> None:
        other = dict(row(body, "circuits", C))
        other.update(id="c9", name="shower")
        body["circuits"].append(other)

    job, now = both_off(sample("larch_row", second))
    job = part(job, now, "line at the way", "line", circuit="c9")
    refused = logged(job, "restored", now + timedelta(minutes=1))
    assert isinstance(refused, Refused)
    job, (row_id,) = new_ids(job, ["i"])
    given_up = IsolationEntry(id=row_id, kind="abandoned", circuit="c9", at=now)
    job = apply(job, [Put("isolation", given_up)], at=now)
    assert isinstance(logged(job, "restored", now + timedelta(minutes=2)), Job)


def test_the_origin_test_ends_before_the_supply_comes_back() -> None:
    job, now = both_off(sample())
    begun = logged(job, "origin_test_begins", now + timedelta(minutes=1))
    assert isinstance(begun, Job)
    now += timedelta(minutes=2)
    assert state(begun, C, now).word == "origin_test"
    refused = logged(begun, "restored", now)
    assert isinstance(refused, Refused)
    assert "origin test" in refused.sentence
    assert "Earth back" in next_step(begun, C, now).sentence
    over = logged(begun, "origin_test_ends", now + timedelta(minutes=1))
    assert isinstance(over, Job)
    assert isinstance(logged(over, "restored", now + timedelta(minutes=2)), Job)


def test_a_neutral_clamped_yesterday_does_not_allow_parting_today() -> None:
    job, now = proved(sample())
    for moment, allowed in ((NOW - timedelta(hours=20), False), (now, True)):
        entry = IsolationEntry(id="z9", kind="neutral_clamped", circuit=C, at=moment)
        tried = job.model_copy(update={"isolation": tuple(sorted((*job.isolation, entry), key=lambda e: e.at))})
        assert (may_part(tried, C, "line legs", "parted", now) == "") is allowed


def test_terminals_are_proved_dead_themselves_a_closed_front_is_not_opened() -> None:
    job, now = proved(sample())
    point = job.points_of(C)[0].id
    assert not needs_taken(job, C, "ln_cross", point, now, "front")
    assert needs_taken(job, C, "ln_cross", point, now, "terminals")


@pytest.mark.parametrize("edit, first, said", [
    (lambda b: row(b, "circuits", C).update(line_ends=1), "main_switch_off", "the other leg may sit in another way"),
    (lambda b: row(b, "circuits", C).update(neutral_ends=1), "main_switch_off", "neutral may be another's"),
    (lambda b: b["supply"].update(system="tt"), "main_switch_off", "single pole off leaves the neutral"),
    (lambda b: b["supply"].update(
        sources="some", other_sources=[{"kind": "battery", "isolated_by": "isolator", "feeds_back": "yes"}]
    ), "sources_isolated", ""),
])  # fmt: skip
def test_two_ways_a_borrowed_neutral_tt_and_a_battery_stop_short_of_proved_dead(
    edit: Any, first: str, said: str
) -> None:
    """The steps that would do for a plain circuit do not do here: the log stops and says what comes first."""
    job, now = sample("larch_row", edit, lambda body: drop_readings(body, "le_cross")), NOW
    plain = [kind for kind in sequence(sample(), C) if kind not in ("main_switch_off", "sources_isolated")]
    stopped = ""
    for kind in plain:
        now += timedelta(minutes=1)
        found = logged(job, kind, now)
        if isinstance(found, Refused):
            stopped = found.first
            break
        job = found
    assert stopped == first
    assert not state(job, C, now).dead
    assert next_step(job, C, now, verdict=existing(job, C)).kind == first
    if said:
        assert said in both_poles_needed(job, C)


def test_after_the_work_the_chosen_ways_own_tests_come_dead_first_and_then_live() -> None:
    job = sample()
    request = job.requests[0].model_copy(update={"work_done_at": NOW})
    spur = [test for test, _, _ in after_work(job, request, ("r1_r2", "zs", "polarity"))]
    assert set(spur) == {"r1_r2", "zs", "polarity"}
    ring = after_work(job, request, ("r1", "rn", "r2", "ln_cross", "le_cross", "zs"))
    crossed = {place for test, place, _ in ring if test == "ln_cross"}
    assert crossed == {outlet.id for outlet in request.outlets} | {point.id for point in job.points_of(C)}
    zs = [place for test, place, _ in ring if test == "zs"]
    assert zs[0] == request.outlets[0].id
    worst = max((r for r in job.standing() if r.test == "zs" and r.circuit == C), key=lambda r: r.value or 0)
    assert worst.point in zs
    states = [TESTS[test].state for test, _, _ in ring]
    assert states == sorted(states, key=("dead", "live").index)


THINGS = (("line legs A and B", "line"), ("neutral legs A and B", "neutral"), ("earth legs A and B", "cpc"))


class Visits(RuleBasedStateMachine):
    """Any sequence of entries, strikes, undo, clock jumps, partings and reopenings, held against a plain re-telling."""

    def __init__(self) -> None:
        super().__init__()
        self.job = sample("larch_row", lambda body: (drop_readings(body, "r2"), drop_readings(body, "le_cross")))
        self.now = NOW
        self.since: list[str] = []
        self.verdict = existing(self.job, C)

    def _row(self, prefix: str) -> str:
        self.job, (row_id,) = new_ids(self.job, [prefix])
        return row_id

    @rule(kind=st.sampled_from((*sequence(sample(), C), "main_switch_off")), wait=st.integers(1, 40))
    def step(self, kind: str, wait: int) -> None:
        self.now += timedelta(minutes=wait)
        found = logged(self.job, kind, self.now)
        if isinstance(found, Job):
            self.job = found
            self.since.append(kind)

    @rule(times=st.integers(1, 11), main=st.booleans())
    def go_on(self, times: int, main: bool) -> None:
        for _ in range(times):
            self.now += timedelta(minutes=1)
            due = next((item.kind for item in steps(self.job, C, self.now) if item.next), None)
            if due == "locked" and main:
                due = "main_switch_off" if "main_switch_off" not in dict(state(self.job, C, self.now).done) else due
            found = logged(self.job, due, self.now) if due is not None else None
            if isinstance(found, Job):
                self.job = found
                self.since.append(due or "")

    @rule(kind=st.sampled_from(["opened", "left_site", "stopped"]))
    def end(self, kind: str) -> None:
        self.now += timedelta(minutes=1)
        entry = IsolationEntry(id=self._row("i"), kind=kind, circuit=C, at=self.now)  # type: ignore[arg-type]
        self.job = apply(self.job, [Put("isolation", entry)], at=self.now)
        self.since.clear()

    @rule(kind=st.sampled_from(["restored", "unlocked", "handed_over"]))
    def give_back(self, kind: str) -> None:
        self.now += timedelta(minutes=1)
        found = logged(self.job, kind, self.now)
        if outstanding(self.job, C):
            assert isinstance(found, Refused), "energised with something parted or joined"
        if isinstance(found, Job):
            self.job = found
            self.since.clear()

    @rule(thing=st.sampled_from(THINGS), sort=st.sampled_from(["parted", "joined"]))
    def part(self, thing: tuple[str, str], sort: str) -> None:
        self.now += timedelta(minutes=1)
        what, conductor = thing if sort == "parted" else ("line to earth", "link")
        if may_part(self.job, C, what, sort, self.now):  # type: ignore[arg-type]
            return
        assert state(self.job, C, self.now).word == "board_dead"
        row = Parted(id=self._row("x"), circuit=C, what=what, sort=sort, conductor=conductor, at=self.now)  # type: ignore[arg-type]
        self.job = apply(self.job, [Put("parted", row)], at=self.now)
        if conductor in ("neutral", "cpc"):
            self.since = [kind for kind in self.since if kind not in PROOF]

    @rule()
    def put_back(self) -> None:
        rows = outstanding(self.job, C)
        if rows:
            self.now += timedelta(minutes=1)
            row = rows[-1].model_copy(update={"back_at": self.now})
            self.job = apply(self.job, [Put("parted", row)], at=self.now)

    @rule(data=st.data())
    def strike(self, data: st.DataObject) -> None:
        if not self.job.isolation:
            return
        self.now += timedelta(minutes=1)
        was = state(self.job, C, self.now)
        target = data.draw(st.sampled_from([entry.id for entry in self.job.isolation]))
        entry = IsolationEntry(id=self._row("i"), kind="struck", circuit=C, at=self.now, strikes=target)
        self.job = apply(self.job, [Put("isolation", entry)], at=self.now)
        self.since.clear()
        assert not state(self.job, C, self.now).dead, f"a strike of {target} raised {was.word}"

    @rule()
    def undo(self) -> None:
        was, parted = self.job.isolation, outstanding(self.job)
        self.job = undo_changes(self.job, at=self.now) or self.job
        assert self.job.isolation == was
        assert outstanding(self.job) == parted

    @rule(hours=st.integers(1, 6))
    def wait(self, hours: int) -> None:
        self.now += timedelta(hours=hours)

    @rule()
    def clock_back(self) -> None:
        if self.job.isolation:
            assert not state(self.job, C, self.job.isolation[-1].at - timedelta(minutes=1)).dead

    @invariant()
    def only_the_whole_sequence_is_dead(self) -> None:
        if state(self.job, C, self.now).dead:
            left = list(self.since)
            for kind in sequence(sample(), C):
                assert kind in left
                left = left[left.index(kind) + 1 :] if kind not in ("dead_tested",) else left[left.index(kind) :]

    @invariant()
    def there_is_always_one_next_step_and_it_is_a_sound_one(self) -> None:
        found = next_step(self.job, C, self.now, verdict=self.verdict)
        assert found.sentence
        assert found.why
        assert cells(found.sentence) <= NEXT_CELLS
        now = state(self.job, C, self.now)
        if found.kind == "restored":
            assert not outstanding(self.job), "restore comes next with something parted or joined"
        if found.kind in ("part", "join"):
            assert now.word == "board_dead"
        if found.kind in TESTS and TESTS[found.kind].state == "dead":  # type: ignore[index]
            assert now.dead, f"{found.sentence} on a circuit that is {now.word}"
            assert "board" in now.places


Visits.TestCase.settings = settings(max_examples=60, stateful_step_count=170, deadline=None)
TestVisits = Visits.TestCase
