"""The app as a person uses it: bursts of values, the strip on everything, themes, forms, resize, reopening."""

from __future__ import annotations

import asyncio
import importlib
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from textual import events
from textual.pilot import Pilot
from textual.screen import Screen

from fieldtool.jobfile.shelf import open_sample
from fieldtool.safety.next_step import next_step
from fieldtool.safety.strip import strip
from fieldtool.visit import Visit
from screens.app import PANES, SHEETS, FieldApp
from screens.theme import PALETTES, contrast
from tests.jobs import SAMPLES, facts, made
from tests.jobs import empty_ring as ring_file

from fieldtool.jobfile.opening import JobFile  # isort: skip

START = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


class Clock:
    """A clock that the test moves."""

    def __init__(self) -> None:
        self.now = START

    def __call__(self) -> datetime:
        return self.now


def app_on(tmp_path: Path, name: str = "larch_row", clock: Clock | None = None, **edits: object) -> FieldApp:
    clock = clock or Clock()
    path = open_sample(SAMPLES / f"{name}.json", tmp_path)
    del edits
    return FieldApp(Visit.open(path, clock=clock), clock=clock)


def empty_ring(tmp_path: Path, points: int, clock: Clock) -> FieldApp:
    """The app on a ring of which nothing was read yet."""
    return FieldApp(Visit.open(ring_file(tmp_path / "ring.json", points), clock=clock), clock=clock)


async def settled(pilot: Pilot[None], app: FieldApp) -> None:
    for _ in range(200):
        await pilot.pause(0.02)
        if app.bench is not None and app.bench.warm:
            return
    raise AssertionError("the background loading never ended")


def typed(app: FieldApp, text: str) -> None:
    """Keys sent in one burst, as a meter, a paste or a stalled screen does."""
    assert app.bench is not None
    for character in text:
        key = "enter" if character == "\n" else character
        app.bench.entry.post_message(events.Key(key, None if key == "enter" else character))


async def test_sixty_values_in_one_burst_land_in_sixty_right_cells(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 20, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        cells = bench.front.cells()  # type: ignore[attr-defined]
        start = next(n for n, cell in enumerate(cells) if cell[2] == "ln_cross")
        bench.front.choose(start)
        values = [round(0.20 + 0.001 * n, 3) for n in range(40)]
        typed(app, "".join(f"{value:.3f}\n" for value in values))
        for _ in range(300):
            await asyncio.sleep(0.02)
            if len(bench.visit.job.readings) >= len(values):
                break
        stood = [bench.visit.standing(cell) for cell in cells[start : start + 40]]
        assert [item.value if item is not None else None for item in stood] == values


async def test_a_doubtful_value_is_kept_marked_and_the_cursor_moves_on(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 5, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        cells = bench.front.cells()  # type: ignore[attr-defined]
        bench.front.choose(next(n for n, cell in enumerate(cells) if cell[2] == "ln_cross"))
        typed(app, "0.26\n0.26\n26\n0.27\n")
        await pilot.pause(0.3)
        third = bench.visit.standing(("c3", "p3", "ln_cross", "as_found"))
        assert third is not None
        assert third.value == 26
        assert third.doubt
        assert not third.counts
        fourth = bench.visit.standing(("c3", "p4", "ln_cross", "as_found"))
        assert fourth is not None
        assert fourth.value == 0.27


async def test_rubbish_stays_in_the_line_and_says_why(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 3, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        before = len(bench.visit.job.readings)
        typed(app, "0,53\n")
        await pilot.pause(0.2)
        assert bench.entry.typed == "0,53"
        assert "comma" in bench.entry.said
        assert len(bench.visit.job.readings) == before


async def test_what_was_entered_is_there_after_reopening_and_the_circuit_is_not_known(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 3, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        assert app.bench is not None
        assert app.bench.visit is not None
        typed(app, "0.18\n")
        await pilot.pause(0.2)
        path = app.bench.visit.path
        app.bench.visit.close()
    again = Visit.open(path, clock=Clock())
    assert [row.value for row in again.job.standing()] == [0.18]
    assert again.strip("c3").state == "not_known"
    again.close()


EVERY = [*PANES, *SHEETS]


@pytest.mark.parametrize("size", [(60, 16), (80, 24), (120, 40)])
async def test_the_strip_stands_whole_on_every_pane_and_sheet(tmp_path: Path, size: tuple[int, int]) -> None:
    clock = Clock()
    app = app_on(tmp_path, "larch_row_annexe", clock)
    async with app.run_test(size=size) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        for key in EVERY:
            if key in PANES:
                bench.show_pane(key)
            else:
                bench.open_named(key)
            for pad in (True, False):
                bench.pad.set_class(pad, "-shown")
                await pilot.pause(0.05)
                bench.paint_strip()
                view, step = bench.core()
                job = bench.visit.job
                assert view == strip(job, bench.circuit, clock())
                assert bench.strip.texts() == (view.plate, step.sentence, view.mind)
                assert bench.strip.region.y == 0
                assert bench.strip.region.height == 3
                drawn = bench.strip.render().plain.split("\n")
                assert drawn[0].strip().startswith(view.plate[: size[0] - 3])
                for other in bench.walk_children():
                    shown = getattr(other, "region", None)
                    if other is bench.strip or shown is None or not shown or not other.display:  # type: ignore[attr-defined]
                        continue
                    assert not shown.overlaps(bench.strip.region), f"{other} lies over the strip on {key}"
            bench.close_sheets()


async def test_a_lapse_while_a_sheet_is_open_repaints_and_keeps_what_is_half_typed(tmp_path: Path) -> None:
    clock = Clock()
    app = empty_ring(tmp_path, 3, clock)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        visit = bench.visit
        assert visit is not None
        for step in visit.log_steps("c3"):
            clock.now += timedelta(minutes=1)
            asked = {"well": {"found_well": True}, "detail": {"detail": "x"}, "tester": {"tester": "T"},
                     "volts": {"volts": (0.0, 0.0, 0.0)}}.get(step.asks, {})  # fmt: skip
            assert visit.log(step.kind, "c3", **asked) == ""  # type: ignore[arg-type]
            visit._last_log_tick = None
        bench.paint_strip()
        assert bench.strip.view is not None
        assert bench.strip.view.state == "board_dead"
        typed(app, "0.2")
        await pilot.pause(0.1)
        bench.open_named("help")
        clock.now += timedelta(hours=5)
        await pilot.pause(1.0)
        assert bench.strip.view.hot
        bench.close_sheet()
        assert bench.entry.typed == "0.2"


async def test_a_full_card_is_said_and_the_job_goes_on_in_another_folder(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 3, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        visit = bench.visit
        assert visit is not None

        def full(*_: object) -> None:
            raise OSError(28, "no space left")

        visit.file._files.write_new = full  # type: ignore[method-assign]
        typed(app, "0.18\n")
        await pilot.pause(0.2)
        assert "full" in visit.save_problem
        assert [row.value for row in visit.job.standing()] == [0.18]
        del visit.file._files.write_new
        bench.do_f6()
        await pilot.pause(0.1)
        assert bench.front.key == "folder" or not visit.save_problem
        assert visit.move_to(tmp_path / "card") == ""
        assert (tmp_path / "card" / "ring.json").exists()
    assert [row.value for row in Visit.open(tmp_path / "card" / "ring.json", want_write=False).job.standing()] == [0.18]


async def test_the_verdict_says_what_keeps_the_work_from_being_finished(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        done = bench.visit.job.requests[0].model_copy(update={"work_done_at": START})
        assert bench.visit.put("requests", done) == ""
        bench.show_pane("verdict")
        await pilot.pause(0.8)
        assert "not finished" in bench.front.notes()[1]


async def test_the_way_is_chosen_as_the_next_step_says(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        for _ in range(500):
            if bench.visit.has_ways("q1"):
                break
            await pilot.pause(0.02)
        assert bench.core()[1].sentence == "Choose the way: F4, then / and its digit, then Enter."
        await pilot.press("f4")
        typed(app, "/2\n")
        await pilot.pause(0.4)
        assert bench.visit.job.requests[0].chosen_way == "fused_spur"
        assert bench.front.key == "verdict"


async def test_no_condition_is_cut_short_on_the_verdict(tmp_path: Path) -> None:
    app = app_on(tmp_path, "quarry_yard")
    async with app.run_test(size=(60, 40)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        bench.show_pane("verdict")
        await pilot.pause(1.0)
        verdict = bench.verdict()
        assert verdict is not None
        assert verdict.conditions
        shown = " ".join(" ".join(line.text.plain.split()) for line in bench.front.lines())
        assert all(condition in shown for condition in verdict.conditions)


async def test_a_screen_without_the_strip_is_refused(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)):
        with pytest.raises(TypeError, match="strip"):
            app.push_screen(Screen())


async def test_markup_in_names_is_shown_as_it_was_typed(tmp_path: Path) -> None:
    body = facts("larch_row")
    body["points"][0]["name"] = "[red]door[/red]"
    path = tmp_path / "m.json"
    JobFile.create(path, made(body), START).close()
    app = FieldApp(Visit.open(path, clock=Clock()), clock=Clock())
    async with app.run_test(size=(120, 40)) as pilot:
        await settled(pilot, app)
        assert app.bench is not None
        assert "[red]door" in app.bench.front.render().plain  # type: ignore[union-attr]


async def test_a_designer_decides_what_the_standard_leaves_to_one_and_the_decision_lapses(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        visit = bench.visit
        assert visit is not None
        request = visit.job.requests[0]
        hot = request.outlets[0].model_copy(update={"heating_or_cooking": "yes"})
        assert visit.put("requests", request.model_copy(update={"outlets": (hot,), "chosen_way": None})) == ""
        visit.ways(request.id)
        await pilot.press("f4")
        await pilot.pause(0.2)
        pane = bench.front
        ways = [item.way for item in pane.ways()]  # type: ignore[attr-defined]
        spur = next(item for item in pane.ways() if item.way == "fused_spur")  # type: ignore[attr-defined]
        assert spur.outcome == "stop"
        pane.choose(len(pane.rows()) + ways.index("fused_spur"))  # type: ignore[attr-defined]
        await pilot.press("f6")
        await pilot.pause(0.1)
        assert bench.front.key == "decide"
        typed(app, "D. Signer\nfixed 1 kW towel rail, nothing else on it\n")
        await pilot.pause(0.3)
        assert visit.job.overrides[-1].reason.startswith("fixed 1 kW")
        after = next(item for item in visit.ways(request.id) if item.way == "fused_spur")
        assert after.outcome == "conditions"
        assert after.verdict is not None
        assert any("D. Signer" in line for line in after.verdict.conditions)


async def test_giving_up_leaves_it_closed_off_and_on_the_record(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        await pilot.press("f5")
        await pilot.pause(1.0)
        await pilot.press("3")
        await pilot.pause(0.2)
        assert "Insulate dead ends" in bench.core()[1].sentence
        bench.open_named("parted")
        await pilot.pause()
        offers = [words for words, _ in bench.front.offers()]  # type: ignore[attr-defined]
        place = next(n for n, words in enumerate(offers) if words.startswith("left insulated"))
        await pilot.press(*["down"] * place, "enter")
        await pilot.pause(0.2)
        assert bench.visit is not None
        assert bench.visit.job.isolation[-1].kind == "abandoned"
        assert "Left as logged" in bench.core()[1].sentence
        await pilot.press("escape", "f5")
        await pilot.pause(0.5)
        assert "Finished" in bench.front.notes()[1]


async def test_keys_of_a_burst_are_taken_in_their_order(tmp_path: Path) -> None:
    """Down, down, Enter in one write: Enter acts on the third row, not on the one the cursor was at."""
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        bench.open_named("parted")
        await pilot.pause()
        offers = [words for words, _ in bench.front.offers()]  # type: ignore[attr-defined]
        wanted = offers.index("left the site")
        for key in (*["down"] * wanted, "enter"):
            bench.entry.post_message(events.Key(key, None))
        await pilot.pause(0.2)
        assert bench.visit is not None
        assert bench.visit.job.isolation[-1].kind == "left_site"


async def test_every_sheet_opens_over_every_other_and_closes_again(tmp_path: Path) -> None:
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        for name in SHEETS:
            for pile in ((name, "isolation"), ("isolation", name), ("isolation", "parted", name, "isolation")):
                for sheet in pile:
                    bench.open_named(sheet)
                    await pilot.pause()
                bench.close_sheets()
                await pilot.pause()
                assert bench.front.key in PANES


async def test_an_error_nobody_foresaw_is_a_sentence_and_the_app_goes_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(FieldApp, "strict", False)
    app = app_on(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None

        def broken(*_: object) -> None:
            raise RuntimeError("nobody foresaw this")

        for part in ("skip", "do_f6", "next_missing", "lines"):
            with pytest.MonkeyPatch.context() as patch:
                patch.setattr(bench.front, part, broken)
                await pilot.press({"skip": "plus", "do_f6": "f6", "next_missing": "slash", "lines": "down"}[part])
                await pilot.pause(0.05)
                shown = bench.entry.said + str(bench.front.render())
                assert "did not work" in shown or "cannot be shown" in shown
            bench.entry.said = ""
        await pilot.press("down")
        await pilot.pause(0.05)
        assert "Zs" in str(bench.front.render())
        assert "nobody foresaw this" in (next(tmp_path.rglob("mishaps.log"))).read_text()


async def test_resizing_in_the_middle_of_an_entry_keeps_it(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 8, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        typed(app, "0.3")
        for size in ((60, 14), (160, 50)):
            await pilot.resize_terminal(*size)
            await pilot.pause(0.1)
            assert bench.entry.typed == "0.3"


async def test_a_new_job_is_begun_from_the_shelf_with_keys_alone(tmp_path: Path) -> None:
    app = FieldApp(None, clock=Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        typed(app, "7")
        await pilot.pause(0.2)
        typed(app, "Test Street\n")
        await pilot.pause(0.4)
        assert bench.visit is not None
        assert bench.visit.job.site.name == "Test Street"
        assert bench.front.key == "survey"
        bench.open_named("circuits")
        await pilot.pause(0.2)
        typed(app, "kitchen ring\n")
        await pilot.pause(0.3)
        assert bench.visit.job.circuits[0].label_claims == "ring"
        assert next_step(bench.visit.job, bench.circuit, START).sentence


async def test_the_pad_types_without_taking_the_focus(tmp_path: Path) -> None:
    app = empty_ring(tmp_path, 3, Clock())
    async with app.run_test(size=(80, 24)) as pilot:
        await settled(pilot, app)
        bench = app.bench
        assert bench is not None
        assert bench.visit is not None
        bench.toggle_pad()
        await pilot.pause(0.1)
        for key in ("#key-0", "#key-point", "#key-2", "#key-enter"):
            await pilot.click(key)
        await pilot.pause(0.2)
        assert bench.focused is bench.entry
        assert [row.value for row in bench.visit.job.standing()] == [0.2]


@pytest.mark.parametrize("name", sorted(PALETTES))
def test_every_text_has_a_contrast_of_seven_to_one(name: str) -> None:
    palette = PALETTES[name]
    for text in (palette.text, palette.muted, palette.ok, palette.iff, palette.no, palette.unk, palette.new):
        assert contrast(text, palette.bg) >= 7
        assert contrast(text, palette.panel) >= 7
    for front, ground in (palette.hot, palette.calm, palette.cur, palette.stop):
        assert contrast(front, ground) >= 7


def test_every_pane_and_sheet_can_be_found_by_its_name() -> None:
    for key, cls in PANES.items():
        assert getattr(importlib.import_module(f"screens.{key}"), cls).key == key
    for key, cls in SHEETS.items():
        assert getattr(importlib.import_module(f"screens.sheets.{key}"), cls).key == key
