"""The isolation log: why the next step is the next, each step with its own digit, volts typed, nothing deleted."""

from __future__ import annotations

from typing import Any

from rich.text import Text

from fieldtool.job.kinds import IsolationKind, words
from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import field
from fieldtool.quantities.show import plain, shorten
from fieldtool.safety.log import LogStep
from fieldtool.safety.parting import outstanding
from screens.base import Action, Line, Sheet, Target
from screens.words import wrapped
from screens.workbench import Workbench

__all__ = ["Isolation"]

_BETWEEN = ("L-N", "L-E", "N-E")


class Isolation(Sheet):
    """A digit for each step, so that a held Enter cannot write a log. F6 strikes a mistake through."""

    key = "isolation"
    title = "Isolation log"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.asking: LogStep | None = None
        self.volts: list[float] = []
        self.place = "board"

    def steps(self) -> tuple[LogStep, ...]:
        """The steps for this circuit at the place of work."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return ()
        steps: tuple[LogStep, ...] = visit.log_steps(circuit, self.place)
        return steps

    def shown(self) -> None:
        """Begin at the place that the next safe step names."""
        _, step = self.bench.core()
        if step.place and step.kind in ("tester_proved_before", "dead_tested", "tester_proved_after"):
            self.place = step.place

    def lines(self) -> list[Line]:
        """Why, then the steps, then what is parted."""
        palette = self.palette
        _, step = self.bench.core()
        visit = self.bench.visit
        if visit is None or self.bench.circuit is None:
            return [Line(Text("  Choose a circuit first: F2.", style=palette.text))]
        width = max(40, self.size.width - 4)
        out = [Line(Text(f" why: {part}" if not n else f"      {part}", style=palette.text))
               for n, part in enumerate(wrapped(step.why, width - 6)[:3])]  # fmt: skip
        name = plain(visit.job.point_name(self.place))
        head = f" Isolation log   {plain(visit.job.circuit(self.bench.circuit).name)}   point of work: {name}"
        out.append(Line(Text(head, style=f"bold {palette.muted}")))
        for item in self.steps():
            out.append(self._step(item))
            if self.asking is not None and item.kind == self.asking.kind and item.asks == "volts":
                out.extend(self._volts())
        rows = outstanding(visit.job, self.bench.circuit)
        fast = sum(entry.too_fast and entry.circuit == self.bench.circuit for entry in visit.job.isolation)
        if fast:
            said = f"  ??  {fast} step{'s' if fast > 1 else ''} logged faster than hands: flagged on the record."
            out.append(Line(Text(said, style=palette.unk)))
        if rows:
            out.append(Line(Text("")))
            out += [Line(Text(f"  still {row.sort}: {plain(row.what)}", style=palette.no)) for row in rows]
        return out

    def _step(self, item: LogStep) -> Line:
        palette = self.palette
        mark = "ok" if item.done_at is not None else ".." if item.next else "--"
        text = Text(no_wrap=True, overflow="crop")
        text.append(f"{'>' if item.next else ' '} {item.digit} ", style=f"bold {palette.text}")
        text.append(mark, style=palette.mark(mark))
        text.append(f"  {shorten(plain(item.words), 46):<47}", style=palette.text)
        if item.done_at is not None:
            text.append(f"{item.done_at.astimezone():%H:%M}  {shorten(plain(item.detail), 20)}", style=palette.muted)
        return Line(text)

    def _volts(self) -> list[Line]:
        out = []
        for number, between in enumerate(_BETWEEN):
            value = (
                f"{self.volts[number]:g} V" if number < len(self.volts) else "[ ]" if number == len(self.volts) else "·"
            )
            out.append(Line(Text(f"          {between}  {value}", style=self.palette.text)))
        return out

    # typing --------------------------------------------------------------------------------------------------
    def target(self) -> Target:
        """What the step that was begun asks; else a digit begins one."""
        item = self.asking
        if item is None:
            return Target(
                "a digit does its step", "none", lambda _: (True, "Each step has its own digit: Enter does none.")
            )
        if item.asks == "well":
            return Target(
                f"{item.words}: all well?", "choice", self._well, choices=(("1", "yes, all well"), ("2", "no: stop"))
            )
        if item.asks == "volts":
            between = _BETWEEN[min(len(self.volts), 2)]
            return Target(f"{between} volts at {self.bench.job.point_name(self.place)}", "number", self._volt)
        asked = {"tester": "tester, and proving unit"}.get(item.asks, item.words)
        return Target(asked, "text", self._detail, value=self._last(item))

    def _last(self, item: LogStep) -> str:
        """What was said at this step last: offered as text to confirm, never taken by itself."""
        visit = self.bench.visit
        if visit is None:
            return ""
        for entry in reversed(visit.job.isolation):
            if entry.kind == item.kind:
                return entry.tester if item.asks == "tester" else entry.detail
        return ""

    def actions(self) -> tuple[Action, ...]:
        """A digit for each step; with none due, what changes the supply."""
        out = [Action(item.digit, item.words, lambda item=item: self._begin(item)) for item in self.steps()]  # type: ignore[misc]
        return tuple(out)

    def _begin(self, item: LogStep) -> None:
        if item.asks == "nothing":
            self._log(item)
            return
        self.asking, self.volts = item, []
        self.bench.refresh_all()

    def _well(self, typed: str) -> tuple[bool, str]:
        item, self.asking = self.asking, None
        if item is None or typed not in ("1", "2"):
            return False, "1 yes, 2 no."
        return True, self._log(item, found_well=typed == "1")

    def _detail(self, typed: str) -> tuple[bool, str]:
        item = self.asking
        text = typed.strip() or (self._last(item) if item is not None else "")
        if item is None or not text:
            return False, "Say who, or which: it stands in the log."
        self.asking = None
        if item.asks == "tester":
            return True, self._log(item, tester=text[:100], proving_unit=text[:100])
        return True, self._log(item, detail=text[:300])

    def _volt(self, typed: str) -> tuple[bool, str]:
        entry = parse(field("volts"), typed or " ")
        if isinstance(entry, EntryProblem) or entry.value is None:
            said = entry.sentence if isinstance(entry, EntryProblem) else "Type the volts."
            return False, said
        self.volts.append(entry.value)
        if len(self.volts) < 3:
            return True, ""
        item, self.asking = self.asking, None
        if item is None:
            return True, ""
        a, b, c = self.volts
        return True, self._log(item, volts=(a, b, c))

    def _log(self, item: LogStep, **more: Any) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None:
            return ""
        kind: IsolationKind = item.kind  # type: ignore[assignment]
        said = visit.log(kind, circuit, place=self.place, **more)
        self.bench.say(said)
        self.bench.judge()
        self.bench.refresh_all()
        return said

    def skip(self) -> None:
        """``+``: what else can be logged: restored, main switch, parted, put back, another place."""
        self.bench.open_named("parted")

    def back(self) -> None:
        """``-``: give the step up that was begun, else back to the work."""
        if self.asking is not None:
            self.asking = None
            self.bench.refresh_all()
        else:
            self.bench.close_sheet()

    def do_f6(self) -> None:
        """F6: strike the last entry of the log through. It stays to be read and can only lower the state."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None:
            return
        struck = {entry.strikes for entry in visit.job.isolation}
        last = next(
            (e for e in reversed(visit.job.isolation)
             if e.circuit == circuit and e.id not in struck and e.kind not in ("struck", "opened")), None
        )  # fmt: skip
        if last is None:
            self.bench.say("There is nothing in the log to strike.")
            return
        said = visit.strike(last.id)
        self.bench.say(said or f"Struck: {words(last.kind)}. The sequence starts anew.")
        self.bench.refresh_all()

    def notes(self) -> tuple[str, str]:
        """What counts, and what stops."""
        return (
            "ok  Only the whole sequence together says proved dead, at the place named.",
            "??  Any volts: stop. It is not dead. Find out why.",
        )

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit does its step   + restore, part, put back, place   - back   F6 strike   F9 back"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Do the step with your hands, then press its digit; volts are typed, all three.",
            "Lock, tester and who allowed it offer what was said last: Enter confirms the text.",
            "+ offers restoring, parting and putting back, and another place of work.",
        )
