"""The shelf: jobs on this machine, last touched first, each with what it waits for and what is still parted."""

from __future__ import annotations

from datetime import datetime

from rich.text import Text

from fieldtool.jobfile.problems import JobFileProblem, SaveProblem
from fieldtool.jobfile.shelf import ShelfRow, job_folder, shelf
from fieldtool.quantities.show import plain, shorten
from screens.base import Action, Line, Pane, Target
from screens.workbench import Workbench

__all__ = ["Shelf"]


class Shelf(Pane):
    """Digits open at once; 7 starts a new job, 8 finds, 9 checks one addition from nothing."""

    key = "shelf"
    title = "Jobs"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.rows: tuple[ShelfRow, ...] = ()
        self.naming = False
        self.finding = False
        self.wanted = ""

    def shown(self) -> None:
        """Look into the folder again."""
        self.rows = shelf(job_folder())
        self.naming = self.finding = False

    def visible_rows(self) -> tuple[ShelfRow, ...]:
        """The rows that match what was looked for."""
        word = self.wanted.casefold()
        return tuple(row for row in self.rows if word in row.name.casefold()) if word else self.rows

    def count(self) -> int:
        """The jobs, and the three things below them."""
        return len(self.visible_rows()) + 3

    def lines(self) -> list[Line]:
        """Two lines for a job with something parted, one for every other."""
        palette, rows = self.palette, self.visible_rows()
        width = max(40, self.size.width)
        folder = shorten(str(job_folder()), max(20, width - 36))
        out = [
            Line(Text(" competent persons only   no live work   local rules decide", style=palette.muted)),
            Line(Text(f" jobs in {folder}", style=palette.muted)),
            Line(Text("")),
        ]
        for number, row in enumerate(rows):
            out.extend(self._job(number, row, width))
        if not rows:
            out.append(Line(Text("    No job here yet. 7 starts one; 9 checks one addition now.", style=palette.text)))
        out.append(Line(Text("")))
        base = len(rows)
        for offset, (digit, words) in enumerate(
            (("7", "New job"), ("8", f"Find{': ' + self.wanted if self.wanted else ''}"),
             ("9", "Check one addition now, from nothing"))
        ):  # fmt: skip
            out.append(self._line(f"{digit}  {words}", base + offset))
        return out

    def _line(self, text: str, index: int) -> Line:
        here = index == self.cursor
        style = f"bold {self.palette.cur[0]} on {self.palette.cur[1]}" if here else self.palette.text
        return Line(Text(f"{'>' if here else ' '} {text}", style=style), index)

    def _job(self, number: int, row: ShelfRow, width: int) -> list[Line]:
        digit = str(number + 1) if number < 6 else " "
        name = shorten(plain(row.name), 32)
        said = f"{digit}  {name:<33}{_when(row.touched):<16}"
        if row.problem:
            return [self._line(said + shorten(row.problem, width - 56), number)]
        out = [self._line(said + shorten(_waits(row, self.bench), max(12, width - 54)), number)]
        parted = [item.what for item in row.job.parted if item.back_at is None] if row.job is not None else []
        if parted:
            words = shorten(plain(", ".join(parted)), max(20, width - 30))
            out.append(Line(Text(f"      still parted or joined: {words}", style=self.palette.no), number))
        return out

    def target(self) -> Target:
        """A name while naming or finding; else digits act."""
        if self.naming:
            return Target("name of the new job", "text", self._named)
        if self.finding:
            return Target("find", "text", self._find)
        return Target("a digit opens", "none", self._enter)

    def _enter(self, typed: str) -> tuple[bool, str]:
        del typed
        self.open_at(self.cursor)
        return True, ""

    def _named(self, typed: str) -> tuple[bool, str]:
        from fieldtool.visit import Visit

        if not typed.strip():
            return False, "Give it a name you will know tomorrow: the street, the room."
        try:
            visit = Visit.create_new(job_folder(), typed.strip()[:120], clock=self.bench.field.clock)
        except (SaveProblem, ValueError) as problem:
            return False, shorten(str(problem), 74)
        self.naming = False
        self.bench.take(visit)
        self.bench.show_pane("survey")
        return True, ""

    def _find(self, typed: str) -> tuple[bool, str]:
        self.wanted, self.finding, self.cursor = typed.strip(), False, 0
        return True, f"{len(self.visible_rows())} jobs." if self.wanted else ""

    def actions(self) -> tuple[Action, ...]:
        """Digits of the rows and of what is below them."""
        rows = self.visible_rows()
        out = [Action(str(n + 1), rows[n].name, lambda n=n: self.open_at(n)) for n in range(min(6, len(rows)))]  # type: ignore[misc]
        base = len(rows)
        out += [
            Action(digit, words, lambda o=offset: self.open_at(base + o))  # type: ignore[misc]
            for offset, (digit, words) in enumerate((("7", "new job"), ("8", "find"), ("9", "check one addition")))
        ]
        return tuple(out)

    def tap(self, index: int) -> None:
        """A touch opens."""
        self.choose(index)
        self.open_at(index)

    def open_at(self, index: int) -> None:
        """Open the job there, or do what the line says."""
        rows = self.visible_rows()
        self.cursor = index
        if index < len(rows):
            self._open(rows[index])
            return
        what = index - len(rows)
        self.naming, self.finding = what == 0, what == 1
        if what == 2:
            self.bench.open_named("spot")
        self.bench.refresh_all()

    def _open(self, row: ShelfRow) -> None:
        from fieldtool.visit import Visit

        try:
            visit = Visit.open(row.path, clock=self.bench.field.clock)
        except JobFileProblem as problem:
            self.bench.say(problem.sentence)
            return
        self.bench.take(visit)
        self.bench.show_pane("readings" if visit.job.circuits else "survey")
        if visit.notes:
            self.bench.say(shorten(visit.notes[0], 74))
        if visit.file.differences:
            self.bench.open_named("recovered")

    def notes(self) -> tuple[str, str]:
        """How many there are, and what to do."""
        bad = sum(bool(row.problem) for row in self.rows)
        if not self.rows:
            return ("", "ok  An invented job to try: fieldtool sample_jobs/larch_row.json")
        said = f"ok  {len(self.rows)} jobs, all readable." if not bad else f"??  {bad} files cannot be opened."
        return ("", said)

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit opens   up down Enter   F1 what this is for   F8 pad   Ctrl+Q leave"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Choose a job by its digit; 7 starts a new one and asks its name.",
            "9 checks one addition from a few answers, without a job.",
            "Samples in the clone open as a copy: fieldtool sample_jobs/larch_row.json",
        )


def _when(moment: datetime) -> str:
    here, today = moment.astimezone(), datetime.now().astimezone()
    days = (today.date() - here.date()).days
    if days == 0:
        return f"today {here:%H:%M}"
    return f"yesterday {here:%H:%M}" if days == 1 else f"{here:%a %d %b}"


def _waits(row: ShelfRow, bench: Workbench) -> str:
    """What a job waits for next, from the log and what was read; no network is solved for a list."""
    from fieldtool.safety.next_step import next_step

    job = row.job
    if job is None or not job.circuits:
        return "waits for: its board survey"
    asked = [request.circuit for request in job.requests]
    circuit = asked[-1] if asked else job.circuits[0].id
    step = next_step(job, circuit, bench.field.clock())
    words = {"ask": "a proposal", "verdict": "its verdict", "done": "nothing"}
    return f"waits for: {words.get(step.kind, step.sentence)}"
