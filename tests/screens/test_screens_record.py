"""The record from the screen: one key on the verdict, or the menu's more, and one sentence that says where it is."""

from __future__ import annotations

import asyncio
from pathlib import Path

import pytest
from pypdf import PdfReader
from textual import events
from textual.pilot import Pilot

from fieldtool.jobfile.shelf import open_sample
from fieldtool.visit import Visit
from screens.app import FieldApp
from tests.jobs import SAMPLES


async def until(pilot: Pilot[None], what: object) -> None:
    for _ in range(500):
        await pilot.pause(0.02)
        if what():  # type: ignore[operator]
            return
        await asyncio.sleep(0.02)
    raise AssertionError("it never came")


@pytest.mark.parametrize("by", ["key", "more"])
async def test_the_record_is_written_beside_the_job_and_its_place_is_said(tmp_path: Path, by: str) -> None:
    path = open_sample(SAMPLES / "larch_row.json", tmp_path)
    app = FieldApp(Visit.open(path))
    async with app.run_test(size=(80, 24)) as pilot:
        await until(pilot, lambda: app.bench is not None and app.bench.warm)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        bench.show_pane("verdict")
        await until(pilot, lambda: bench.verdict() is not None)
        if by == "key":
            bench.entry.post_message(events.Key("8", "8"))
        else:
            bench.open_named("more")
            await until(pilot, lambda: bench.front.key == "more")
            number = next(action.key for action in bench.front.actions() if "record" in action.words)
            bench.entry.post_message(events.Key(number, number))
        await until(pilot, lambda: "Record written" in bench.entry.said)
        assert "larch-row-record.pdf" in bench.entry.said
        assert len(PdfReader(tmp_path / "larch-row-record.pdf").pages) > 5
        kept = [row.why for row in bench.visit.job.verdicts]
        assert kept == (["record"] if by == "key" else [])
