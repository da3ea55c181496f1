"""kill -9 of the app in a terminal, and two processes at one job. The long runs are commands of this folder."""

from __future__ import annotations

import random
from pathlib import Path

from tests.crash.kills import one_kill
from tests.crash.two_writers import both
from tests.jobs import empty_ring


def test_every_entry_that_the_screen_had_accepted_outlives_a_kill(tmp_path: Path) -> None:
    rng = random.Random(15)
    shown = 0
    for number in range(15):
        folder = tmp_path / str(number)
        folder.mkdir()
        killed = one_kill(folder, rng, longest=1.0)
        assert killed.lost == ()
        assert killed.found <= killed.sent
        shown += killed.shown
    assert shown > 30


def test_two_processes_at_one_job_lose_nothing_and_one_is_told(tmp_path: Path) -> None:
    accepted, lost, told = both(empty_ring(tmp_path / "ring.json", 20), 4.0)
    assert accepted > 10
    assert lost == 0
    assert told > 0
