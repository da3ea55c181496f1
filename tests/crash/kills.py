"""Kill the real app at random moments of a scripted entry: every entry that its screen had accepted is on the disk.

python -m tests.crash.kills --kills 200
"""

from __future__ import annotations

import argparse
import random
import re
import tempfile
import time
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from fieldtool.jobfile.opening import JobFile
from tests.jobs import empty_ring
from tests.terminal import Terminal

VALUES = tuple(f"0.{number}" for number in range(31, 96))
_SHOWN = re.compile(r"(?<![\d.])0\.\d\d(?!\d)")
_GRID_COLUMNS = 58
"""The grid stands left of what the tool says of its readings."""


@dataclass(frozen=True, slots=True)
class Killed:
    """One kill: entries sent, shown as accepted by the last painted screen, found in the file, and shown but lost."""

    sent: int
    shown: int
    found: int
    lost: tuple[str, ...]


def one_kill(folder: Path, rng: random.Random, *, longest: float = 2.0) -> Killed:
    """Start the app, type values at a hurried person's pace, kill it at a random moment, open its file."""
    path = empty_ring(folder / "ring.json", 20)
    moment = rng.uniform(0.05, longest)
    sent = 0
    with Terminal.app(path) as terminal:
        terminal.wait_for("Ze at the origin")
        end = time.monotonic() + moment
        while time.monotonic() < end and sent < len(VALUES):
            terminal.send(f"{VALUES[sent]}\r")
            sent += 1
            time.sleep(rng.uniform(0.0, 0.06))
        painted = [line[:_GRID_COLUMNS] for line in terminal.lines()[4:-2]]
        terminal.kill()
    shown = {value for line in painted for value in _SHOWN.findall(line)}
    file = JobFile.open(path, datetime.now(UTC))
    found = {reading.raw for reading in file.job.readings}
    writable = not file.read_only
    file.close()
    assert writable, "the lock of the killed app was not taken over"
    return Killed(sent, len(shown), len(found), tuple(sorted(shown - found)))


def main() -> None:
    """Kill as often as asked and print the figures."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--kills", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    rng = random.Random(given.seed)
    sent = shown = found = lost = 0
    for _ in range(given.kills):
        with tempfile.TemporaryDirectory() as folder:
            killed = one_kill(Path(folder), rng)
        sent, shown, found, lost = (
            sent + killed.sent,
            shown + killed.shown,
            found + killed.found,
            lost + len(killed.lost),
        )
    print(f"{given.kills} kills: {sent} entries sent, {shown} shown as accepted, {found} in the files, {lost} lost")


if __name__ == "__main__":
    main()
