"""A whole visit in a terminal by following NEXT alone: isolate, dead tests, verdict, work, tests after it, hand over."""

from __future__ import annotations

from pathlib import Path

from fieldtool.jobfile.opening import read_job
from fieldtool.safety.parting import outstanding
from tests.screens.hands import Hands, short_ring
from tests.terminal import Terminal


def kinds(path: Path) -> list[str]:
    return [entry.kind for entry in read_job(path).isolation]


def finished(path: Path) -> None:
    job = read_job(path)
    assert kinds(path)[-1] == "handed_over"
    assert not outstanding(job)
    request = job.requests[0]
    assert request.work_done_at is not None
    assert job.verdicts[-1].why == "work_begins"
    after = {reading.test for reading in job.readings if reading.stage == "after_work"}
    assert after >= {"r1_r2", "polarity", "zs", "rcd_ms", "function"}
    assert not [reading for reading in job.standing() if reading.needs_taken]


def test_following_next_leads_from_the_survey_to_the_hand_over(tmp_path: Path) -> None:
    path = short_ring(tmp_path)
    with Terminal.app(path) as terminal:
        terminal.wait_for("Readings")
        hands = Hands(terminal)
        hands.visit()
        assert "LIVE" in terminal.lines()[0]
    finished(path)
    told = hands.told
    order = ["Look before you open", "Main switch off", "Test for dead at board", "part and mark", "line end to end",
             "join L to N", "L-N crossed", "Take the join off", "join L to E", "L-E crossed", "IR", "put legs",
             "log it restored", "Zs at", "Choose the way", "begin the work", "Do the work", "After the work: read R1+R2",
             "restore the supply", "After the work, live", "Hand over"]  # fmt: skip
    places = [next(n for n, said in enumerate(told) if words in said) for words in order]
    assert places == sorted(places)


def test_the_supply_back_in_the_middle_and_a_night_between_begin_the_isolation_anew(tmp_path: Path) -> None:
    path = short_ring(tmp_path)
    with Terminal.app(path) as terminal:
        terminal.wait_for("Readings")
        hands = Hands(terminal)
        hands.visit(until=lambda said: "part and mark" in said)
        hands.say("supply restored")
        assert "~ LIVE ~" in terminal.lines()[0]
        assert "Look before you open" in hands.next()
        hands.visit(until=lambda said: "L-E crossed at worktop" in said)
        hands.say("supply restored")
        assert "BOARD DEAD" in terminal.lines()[0], "refused: legs are parted"
        assert kinds(path).count("restored") == 1
        terminal.kill()
    before = {reading.id for reading in read_job(path).readings}
    with Terminal.app(path) as terminal:
        terminal.wait_for("Readings")
        hands = Hands(terminal)
        said = hands.next()
        assert "NOT KNOWN" in terminal.lines()[0]
        assert "legs L N E" in terminal.lines()[2]
        assert "Look before you open" in said
        hands.visit()
    assert before <= {reading.id for reading in read_job(path).readings}
    finished(path)
    assert kinds(path).count("restored") == 3
