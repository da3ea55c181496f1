"""The one screen: strip, steps, the pane in front, notes, the entry line, hints. Everything else is a pane of it."""

from __future__ import annotations

from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING

from rich.text import Text
from textual import events, work
from textual.app import ComposeResult
from textual.containers import Horizontal, Vertical
from textual.screen import Screen
from textual.widget import Widget

from fieldtool.answers import CircuitReading, NextStep, StateView, Verdict, WayAnswer
from fieldtool.job.job import Job
from fieldtool.quantities.show import shorten
from screens.base import Action, Pane, Sheet, Target
from screens.theme import Palette
from screens.widgets.entry_line import EntryLine
from screens.widgets.number_pad import NumberPad
from screens.widgets.strip import Strip

if TYPE_CHECKING:
    from fieldtool.visit import Visit
    from screens.app import FieldApp

__all__ = ["Row", "Workbench"]

_MISHAP = "That did not work and nothing changed. Try again; details: F1."


class Row(Widget, can_focus=False):
    """One row of text that another part writes."""

    DEFAULT_CSS = "Row { height: 1; width: 1fr; }"

    def __init__(self, row_id: str) -> None:
        super().__init__(id=row_id)
        self.text = Text("")

    def show(self, text: Text) -> None:
        """Show this text; repaints only when it changed."""
        if text != self.text:
            self.text = text
            self.refresh()

    def render(self) -> Text:
        """The row's text."""
        return self.text


class Workbench(Screen[None]):
    """The screen. Panes are mounted when they are first shown."""

    AUTO_FOCUS = "#entry"
    SPECIAL = "+-/"
    CSS = """
    Workbench { layout: vertical; background: $background; }
    #middle { height: 1fr; }
    #body { width: 1fr; height: 1fr; }
    #note-1, #note-2 { background: $background; }
    #hints { background: $background; color: $foreground; }
    """

    def __init__(self, app_: FieldApp) -> None:
        super().__init__()
        self.field = app_
        self.visit: Visit | None = None
        self.circuit: str | None = None
        self.strip = Strip()
        self.steps = Row("steps")
        self.note_rows = (Row("note-1"), Row("note-2"))
        self.hint_row = Row("hints")
        self.entry = EntryLine(self)
        self.pad = NumberPad(self)
        self.body = Vertical(id="body")
        self.panes: dict[str, Pane] = {}
        self.front: Pane = Pane(self)
        self.under: list[tuple[Pane, str, int]] = []
        self.warm = False
        self.message = ""
        self.next_kind = ""
        self.next_why = ""

    # building ------------------------------------------------------------------------------------------------
    def compose(self) -> ComposeResult:
        """Strip first, hints last; the pad sits beside the body, never over the strip."""
        yield self.strip
        yield self.steps
        with Horizontal(id="middle"):
            if self.field.left_handed:
                yield self.pad
            yield self.body
            if not self.field.left_handed:
                yield self.pad
        yield from self.note_rows
        yield self.entry
        yield self.hint_row

    async def on_mount(self) -> None:
        """Show the first pane, then load in the background what the first answer needs."""
        self.set_interval(0.5, self.tick)
        self.show_pane("shelf" if self.visit is None else "readings")
        self.call_after_refresh(self.begin_warm)

    def begin_warm(self) -> None:
        """After the first paint: import the networks in a thread, so that no key waits for them."""
        self._warm()

    @work(thread=True, exit_on_error=False, group="warm")
    def _warm(self) -> None:
        from fieldtool.visit import warm

        warm()
        self.app.call_from_thread(self._warmed)

    def _warmed(self) -> None:
        self.warm = True
        self.judge()
        self.refresh_all()

    # panes ---------------------------------------------------------------------------------------------------
    @property
    def palette(self) -> Palette:
        """The colours in force."""
        return self.field.palette

    def show_pane(self, key: str) -> None:
        """Bring a pane to the front; sheets over it go away."""
        self.close_sheets()
        self._front(self.field.pane(key, self))
        self.judge()

    def _front(self, pane: Pane) -> None:
        self.panes.setdefault(pane.key, pane)
        if not pane.is_attached and pane not in self.body.children:
            self.body.mount(pane)
        for child in self.body.children:
            child.display = child is pane
        pane.display = True
        self.front = pane
        self.message = ""
        pane.shown()
        self.refresh_all()

    def open_sheet(self, sheet: Sheet) -> None:
        """Lay a sheet over the pane; the half-typed entry waits under it."""
        self.under.append((self.front, self.entry.typed, self.entry.at))
        self.entry.set_text("")
        self._front(sheet)

    def close_sheet(self) -> bool:
        """Take the sheet away and go back to where one was. False when none lies there."""
        if not self.under:
            return False
        sheet = self.front
        pane, typed, at = self.under.pop()
        if isinstance(sheet, Sheet):
            sheet.closed()
            self.panes.pop(sheet.key, None)
            sheet.remove()
        self._front(pane)
        self.entry.typed, self.entry.at = typed, at
        self.entry.refresh()
        return True

    def close_sheets(self) -> None:
        """Take every sheet away."""
        while self.close_sheet():
            pass

    # job -----------------------------------------------------------------------------------------------------
    def take(self, visit: Visit | None) -> None:
        """Work on this job from now on."""
        if self.visit is not None and self.visit is not visit:
            self.visit.close()
        self.visit = visit
        self.circuit = None
        self.field.drop_panes(self)
        if visit is not None:
            asked = [request.circuit for request in visit.job.requests]
            known = [circuit.id for circuit in visit.job.circuits]
            self.circuit = asked[-1] if asked else (known[0] if known else None)

    @property
    def job(self) -> Job:
        """The open job."""
        if self.visit is None:
            return Job()
        return self.visit.job

    def say(self, sentence: str) -> None:
        """Show one sentence in the entry line."""
        self.entry.said = sentence
        self.entry.refresh()

    def judge(self) -> None:
        """Work the verdict out in the background; an answer for an older job is dropped."""
        if not self.warm or self.visit is None or self.circuit is None:
            return
        request = self.visit.request_of(self.circuit)
        if request is not None and not self.visit.has_ways(request):
            self._judge(self.visit.job, request, self.circuit)

    @work(thread=True, exclusive=True, exit_on_error=False, group="judge")
    def _judge(self, job: Job, request: str, circuit: str) -> None:
        from fieldtool.diagnosis.explain import explain
        from fieldtool.verdict.compare import compare

        reading = explain(job, circuit)
        ways = compare(job, job.request(request), reading)
        self.app.call_from_thread(self._judged, job, request, circuit, reading, ways)

    def _judged(
        self, job: Job, request: str, circuit: str, reading: CircuitReading, ways: tuple[WayAnswer, ...]
    ) -> None:
        if self.visit is not None and self.visit.adopt(job, request, circuit, reading, ways):
            self.refresh_all()

    def write_record(self) -> None:
        """Write the record of the job as it stands beside its file, in the background; says where it is."""
        if self.visit is None:
            self.say("Choose a job first.")
            return
        self.say("Writing the record ...")
        self._record(self.visit.job, self.visit.path, self.visit.clock())

    @work(thread=True, exit_on_error=False, group="record")
    def _record(self, job: Job, path: Path, now: datetime) -> None:
        from fieldtool.record.paper import written_beside

        said = written_beside(job, path, now)
        self.app.call_from_thread(self.say, said)

    def ways(self) -> tuple[WayAnswer, ...]:
        """The ways as they were judged last; empty while they are being worked out."""
        if self.visit is None or self.circuit is None:
            return ()
        request = self.visit.request_of(self.circuit)
        return self.visit.ways(request) if request is not None and self.visit.has_ways(request) else ()

    def verdict(self) -> Verdict | None:
        """The verdict as it was judged last."""
        if self.visit is None or self.circuit is None or not self.warm:
            return None
        request = self.visit.request_of(self.circuit)
        if request is None or not self.visit.asks(request):
            return self.visit.existing(self.circuit)
        return self.visit.verdict(request) if self.visit.has_ways(request) else None

    # entry ---------------------------------------------------------------------------------------------------
    def target(self) -> Target:
        """What the entry line is for."""
        return self.front.target()

    def commit(self, typed: str) -> tuple[bool, str]:
        """Give what was typed to the pane in front. What is not taken stays in the line."""
        try:
            taken, said = self.front.target().commit(typed)
        except Exception as problem:
            self.field.note_problem(problem)
            return False, _MISHAP
        self.next_why = ""
        self.judge()
        self.refresh_all()
        return taken, said

    def digit(self, character: str) -> bool:
        """A digit where a choice is due. True when it was one."""
        target = self.front.target()
        if target.kind == "choice":
            if any(character == digit for digit, _ in target.choices):
                taken, said = self.commit(character)
                if taken or said:
                    self.entry.said = said
                return True
            return True
        return self._pane_digit(character)

    def _pane_digit(self, character: str) -> bool:
        for action in self.front.actions():
            if action.key == character:
                self.guarded(action.do)
                self.refresh_all()
                return True
        return False

    def guarded(self, do: Callable[[], object]) -> None:
        """Do something; an error that nobody foresaw becomes a sentence, and the screen goes on."""
        try:
            do()
        except Exception as problem:
            self.field.note_problem(problem)
            self.say(_MISHAP)

    def special(self, character: str) -> None:
        """``+ - /`` in a place where they are keys."""
        self.guarded({"+": self.front.skip, "-": self.front.back, "/": self.front.next_missing}[character])
        self.refresh_all()

    def pad_key(self, meaning: str) -> None:
        """A key of the pad on the screen."""
        self.guarded(lambda: self._pad_key(meaning))

    def _pad_key(self, meaning: str) -> None:
        if meaning == "enter":
            self.entry.commit()
        elif meaning == "backspace":
            if self.entry.typed:
                self.entry.set_text(self.entry.typed[:-1])
            else:
                self.front.back()
        elif meaning == "menu":
            self.open_menu()
        elif meaning == "f6":
            self.do_f6()
        elif meaning in ("skip", "back", "missing"):
            self.special({"skip": "+", "back": "-", "missing": "/"}[meaning])
        elif meaning == "OL":
            self.entry.set_text("OL")
        else:
            self.entry.type(">" if meaning == "over" else meaning)
        self.entry.refresh()
        self.refresh_all()

    def touched(self) -> None:
        """The first touch brings the pad out; it then stays as it was left."""
        if not self.field.pad_seen:
            self.field.pad_seen = True
            self.toggle_pad()

    def toggle_pad(self) -> None:
        """Bring the pad out, or put it away."""
        self.field.pad_seen = True
        self.pad.toggle_class("-shown")
        self.refresh_all()

    # keys ----------------------------------------------------------------------------------------------------
    def on_key(self, event: events.Key) -> None:
        """Keys that did not come by the entry line."""
        if self.key(event.key):
            event.stop()
            event.prevent_default()

    def key(self, name: str) -> bool:
        """A key that is not typing. True when it was one.

        The entry line calls this from its own handler: a key that bubbled up here would be overtaken by an Enter
        that was pressed after it, and Enter would act on the wrong row.
        """
        moves: dict[str, Callable[[], None]] = {
            "up": lambda: self.front.move(-1),
            "down": lambda: self.front.move(1),
            "pageup": lambda: self.front.move(-10),
            "pagedown": lambda: self.front.move(10),
            "f1": self.open_help,
            "f2": lambda: self.show_pane("survey"),
            "f3": lambda: self.show_pane("readings"),
            "f4": lambda: self.show_pane("proposal"),
            "f5": lambda: self.show_pane("verdict"),
            "f6": self.do_f6,
            "f7": lambda: self.open_named("map"),
            "f8": self.toggle_pad,
            "f9": lambda: self.open_named("isolation"),
            "escape": self.escape,
            "ctrl+z": self.undo,
            "ctrl+y": self.redo,
            "ctrl+q": self.field.leave,
        }
        if name not in moves:
            return False
        if self.visit is None and name in ("f2", "f3", "f4", "f5", "f7", "f9", "ctrl+z", "ctrl+y"):
            self.say("Choose a job first, or 7 for a new one.")
            return True
        self.guarded(moves[name])
        self.entry.focus()
        return True

    def do_f6(self) -> None:
        """What row 24 offers; while nothing can be saved, another folder comes first."""
        if self.visit is not None and self.visit.save_problem and self.front.key != "folder":
            self.open_named("folder")
        else:
            self.front.do_f6()

    def escape(self) -> None:
        """Close the sheet; with none open, the menu."""
        if not self.close_sheet():
            self.open_menu()

    def open_menu(self) -> None:
        """Every other action, in big keys."""
        self.open_named("menu")

    def open_help(self) -> None:
        """What to do here, in three lines."""
        self.open_named("help")

    def open_named(self, name: str) -> None:
        """Open a sheet by its name; the same again closes it; one that lies under others comes to the front."""
        if self.front.key == name:
            self.close_sheet()
            return
        if any(pane.key == name for pane, _, _ in self.under):
            while self.front.key != name:
                self.close_sheet()
            return
        self.open_sheet(self.field.sheet(name, self))

    def propose_from(self, point: str) -> str:
        """Go to the proposal with its cable starting at this point; what to say of it."""
        self.show_pane("proposal")
        pane = self.front
        if pane.request() is None:  # type: ignore[attr-defined]
            pane._begin("twin")  # type: ignore[attr-defined]
        said: str = pane.put(at=point, attach="point", chosen_way=None)  # type: ignore[attr-defined]
        pane.shown()
        self.judge()
        return said or f"From {self.job.point_name(point)}."

    def undo(self) -> None:
        """Take the last entry back, as a new entry."""
        said = self.visit.undo() if self.visit is not None else ""
        self.say(f"Taken back: {said}." if said else "Nothing to take back. The log is struck, never undone.")
        self.judge()
        self.refresh_all()

    def redo(self) -> None:
        """Bring back what was taken back."""
        said = self.visit.redo() if self.visit is not None else ""
        self.say(f"Back again: {said}." if said else "Nothing to bring back.")
        self.judge()
        self.refresh_all()

    # painting ------------------------------------------------------------------------------------------------
    def tick(self) -> None:
        """The clock moves: the strip may change by itself, a save may work now, a writer may have written."""
        self.guarded(self._tick)

    def _tick(self) -> None:
        if self.visit is not None:
            if self.visit.save_problem and self.visit.retry_save():
                self.say("Saved again.")
            if self.visit.follow():
                self.judge()
                self.front.refresh()
        self.paint_strip()

    def core(self) -> tuple[StateView, NextStep]:
        """The strip's sentences as the core gives them now."""
        from fieldtool.safety.next_step import next_step, shelf_step
        from fieldtool.safety.strip import strip

        if self.visit is None:
            return strip(Job(), None, self.field.clock()), shelf_step()
        job, now = self.visit.job, self.visit.now()
        verdict = self.verdict() if self.circuit is not None else None
        reading = self.visit.circuit_reading(self.circuit) if self.circuit is not None and self.warm else None
        request = self.visit.request_of(self.circuit) if self.circuit is not None else None
        repeat = self.visit.repeat_tests(request) if request is not None else ()
        step = next_step(job, self.circuit, now, verdict=verdict, reading=reading, request_id=request, repeat=repeat)
        return strip(job, self.circuit, now), step

    def paint_strip(self) -> None:
        """Bring the strip up to the moment."""
        view, step = self.core()
        self.strip.ascii = self.field.ascii
        self.strip.show(view, step, self._circuit_words(), self._saved_words(), self.palette)
        if step.kind != self.next_kind:
            self.next_why = step.why if self.next_kind else ""
            self.next_kind = step.kind
            self._show_notes()
        if self.field.bell_on and self.field.last_state != view.state:
            if self.field.last_state:
                self.app.bell()
            self.field.last_state = view.state

    def _circuit_words(self) -> str:
        if self.visit is None or self.circuit is None:
            return "no circuit chosen"
        from fieldtool.reference.look import device

        circuit = self.job.circuit(self.circuit)
        name = shorten(circuit.name or circuit.id, 18)
        kind = ""
        if circuit.device is not None:
            kind = f" {device(circuit.device.type).curve.upper()}{circuit.device.in_a:g}"
        guard = f" RCD{circuit.rcd.i_dn_ma:g}" if circuit.rcd is not None and circuit.rcd_covers == "some" else ""
        return f"{name}{kind}{guard}"

    def _saved_words(self) -> str:
        if self.visit is None:
            return ""
        if self.visit.read_only:
            return "reading only"
        if self.visit.save_problem:
            return "NOT SAVED"
        if self.visit.saved_at is None:
            return ""
        moment: datetime = self.visit.saved_at
        return f"saved {moment.astimezone():%H:%M}"

    def refresh_all(self) -> None:
        """Repaint everything that may have changed."""
        if not self.is_attached:
            return
        short = self.size.height < 18
        self.steps.display = self.size.height >= 18
        for row in self.note_rows:
            row.display = not short
        self.hint_row.display = self.size.height >= 14
        self.paint_strip()
        self.steps.show(self._steps())
        self._show_notes()
        self.hint_row.show(Text(f" {self.front.hints()}", style=self.palette.muted, no_wrap=True, overflow="crop"))
        self.front.refresh()
        self.entry.refresh()

    def _show_notes(self) -> None:
        """The two rows over the entry line; where the second is free it says why the next step is another one now."""
        first, second = self.front.notes()
        problem = self.visit.save_problem if self.visit is not None else ""
        self.note_rows[0].show(self._note(f"NO  {problem}" if problem else first))
        self.note_rows[1].show(self._note(second or (f"--  NEXT is new: {self.next_why}" if self.next_why else "")))

    def _note(self, line: str) -> Text:
        mark, _, rest = line.partition("  ")
        out = Text(no_wrap=True, overflow="crop")
        if mark in ("ok", "if", "NO", "??", "--"):
            out.append(" ")
            out.append(mark, style=self.palette.mark(mark))
            out.append(f"  {rest}", style=self.palette.text)
        elif line:
            out.append(f" {line}", style=self.palette.text)
        return out

    def _steps(self) -> Text:
        palette = self.palette
        out = Text(no_wrap=True, overflow="crop")
        base = self.under[0][0].key if self.under else self.front.key
        counts = self.field.counts(self)
        for digit, key, word in (
            ("F2", "survey", "Board"), ("F3", "readings", "Readings"), ("F4", "proposal", "Proposal"),
            ("F5", "verdict", "Verdict"), ("", "shelf", "Jobs"),
        ):  # fmt: skip
            text = f"{digit} {word}{' ' + counts[key] if counts.get(key) else ''}".strip()
            if key == base:
                out.append(f"[{text}]", style=f"bold {palette.cur[0]} on {palette.cur[1]}")
            else:
                out.append(f" {text} ", style=palette.text)
            out.append(" ")
        return out

    def on_resize(self) -> None:
        """A changed size changes which rows fit."""
        self.refresh_all()

    def menu_actions(self) -> tuple[Action, ...]:
        """The actions of the menu: the same on every pane, then the pane's own."""
        panes = (("1", "board survey", "survey"), ("2", "readings", "readings"), ("3", "proposal", "proposal"))
        rest = (("4", "verdict", "verdict"), ("0", "jobs", "shelf"))
        out = [Action(key, words, lambda name=name: self.show_pane(name)) for key, words, name in (*panes, *rest)]  # type: ignore[misc]
        out += [
            Action("5", "next missing", lambda: self._after_menu(lambda: self.front.next_missing())),
            Action("6", "isolation log", lambda: self._after_menu(lambda: self.open_named("isolation"))),
            Action("7", "map", lambda: self._after_menu(lambda: self.open_named("map"))),
            Action("8", "undo last", lambda: self._after_menu(self.undo)),
            Action("9", "more here", lambda: self._after_menu(lambda: self.open_named("more"))),
        ]
        return tuple(out)

    def _after_menu(self, do: Callable[[], None]) -> None:
        self.close_sheet()
        do()
