"""The spot check: one question a line, digits answer; the verdict comes by itself and names what was assumed."""

from __future__ import annotations

from rich.text import Text

from fieldtool.answers import VERDICT_WORDS, WayAnswer
from fieldtool.job.job import Job
from fieldtool.quantities.entry import Entry
from fieldtool.quantities.show import plain, shorten
from fieldtool.spot import UNKNOWN, Question, SpotProblem, accept, asked, judge_spot
from screens.base import Action, Line, Sheet, Target
from screens.widgets.bars import bar
from screens.widgets.findings import counted, finding_text, told
from screens.workbench import Workbench

__all__ = ["SpotCheck"]


class SpotCheck(Sheet):
    """Never "go ahead": at best "go ahead if", with each assumption named."""

    key = "spot"
    title = "Spot check"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.answers: dict[str, str | Entry] = {}
        self.words: dict[str, str] = {}
        self.answer: WayAnswer | None = None
        self.job: Job | None = None

    def questions(self) -> tuple[Question, ...]:
        """The questions that these answers call for."""
        return asked(self.answers)

    def count(self) -> int:
        """As many places as questions; while the verdict stands, none."""
        return 0 if self.answer is not None else len(self.questions())

    def lines(self) -> list[Line]:
        """The questions with their answers, or the verdict."""
        if self.answer is not None:
            return self._verdict(self.answer)
        palette, out = self.palette, []
        questions = self.questions()
        done = sum(question.key in self.answers for question in questions)
        out.append(Line(Text(f" Spot check   answered {done} of {len(questions)}", style=f"bold {palette.muted}")))
        for number, question in enumerate(questions):
            here = number == self.cursor
            said = self.words.get(question.key, "")
            text = Text(no_wrap=True, overflow="crop")
            style = f"bold {palette.cur[0]} on {palette.cur[1]}" if here else palette.text
            text.append(f"{'>' if here else ' '} {question.words:<30}", style=style)
            offered = (
                "  ".join(f"{n} {words}" for n, (_, words) in enumerate(question.choices, start=1)) if here else ""
            )
            text.append(f" {plain(said) or offered or '·'}", style=palette.text if said else palette.muted)
            out.append(Line(text, number))
        return out

    def _verdict(self, answer: WayAnswer) -> list[Line]:
        palette, verdict = self.palette, answer.verdict
        if verdict is None:
            return [Line(Text(f"  STOP   {plain(answer.refused)}", style=palette.no))]
        front, ground = {"conditions": palette.cur, "stop": palette.stop, "more": palette.hot}.get(
            verdict.outcome, palette.cur
        )
        width = max(40, self.size.width - 1)
        out = [
            Line(
                Text(
                    f"  {VERDICT_WORDS[verdict.outcome]}   {answer.words}".ljust(width),
                    style=f"bold {front} on {ground}",
                )
            ),
            Line(Text("")),
        ]
        out += [Line(finding_text(f, palette, self.size.width)) for f in counted(verdict.findings)]
        out += told("if  ", verdict.conditions, palette.text, self.size.width)
        for room in verdict.headroom:
            worst = max(
                (f for f in verdict.findings if f.limit_key == room.limit_key and f.limit),
                key=lambda f: (f.measured or 0) / (f.limit or 1),
                default=None,
            )
            if worst is not None and room.metres is not None:
                drawn = bar(worst.measured or 0.0, worst.tol, worst.limit or 1.0, 24, self.bench.field.ascii)
                out.append(
                    Line(
                        Text(
                            f"  {room.limit_key.replace('_', ' '):<10} {drawn} {room.metres:g} m left",
                            style=palette.text,
                        )
                    )
                )
        for item in verdict.predicted:
            if item.test in ("r1_r2", "zs"):
                name = {"r1_r2": "R1+R2", "zs": "Zs"}[item.test]
                out.append(
                    Line(
                        Text(
                            f"  after the work expect {name} ={item.value:.2f} Ω ({item.low:.2f} to {item.high:.2f})",
                            style=palette.text,
                        )
                    )
                )
        out.append(
            Line(
                Text(
                    "  The book, the maker and your judgement decide; this only checks.",
                    style=palette.muted,
                )
            )
        )
        return out

    def target(self) -> Target:
        """The answer to the question at the cursor."""
        if self.answer is not None:
            return Target("7 keeps it as a job, 3 changes an answer", "none")
        question = self._question()
        if question is None:
            return Target("")
        if question.choices:
            digits = tuple((str(n), "") for n in range(1, len(question.choices) + 1))
            return Target(question.words, "choice", self._take, choices=digits)
        return Target(question.words, "number", self._take)

    def _question(self) -> Question | None:
        questions = self.questions()
        return questions[self.cursor] if self.cursor < len(questions) else None

    def _take(self, typed: str) -> tuple[bool, str]:
        question = self._question()
        if question is None:
            return False, ""
        if not typed:
            self._on()
            return True, ""
        try:
            answer = accept(question, typed)
        except SpotProblem as problem:
            return False, str(problem)
        self.answers[question.key] = answer
        if isinstance(answer, Entry):
            self.words[question.key] = answer.echo
            said = answer.unlikely or ""
        else:
            self.words[question.key] = next(words for key, words in question.choices if key == answer)
            said = ""
        self._on()
        return True, said

    def skip(self) -> None:
        """``+``: do not know. The verdict will say so; it never passes on a default."""
        question = self._question()
        if question is not None:
            self.answers[question.key] = UNKNOWN
            self.words[question.key] = "do not know"
            self._on()

    def _on(self) -> None:
        questions = self.questions()
        for step in range(1, len(questions) + 1):
            place = (self.cursor + step) % len(questions)
            if questions[place].key not in self.answers:
                self.cursor = place
                return
        self.answer, self.job = judge_spot(self.answers, self.bench.field.clock())

    def next_missing(self) -> None:
        """``/``: the next one left out."""
        if self.answer is None:
            self._on()

    def back(self) -> None:
        """``-``: back one question; later answers stay."""
        if self.answer is not None:
            self._change()
        elif self.cursor == 0:
            self.bench.close_sheet()
        else:
            self.move(-1)

    def _change(self) -> None:
        self.answer = None
        self.cursor = 0
        self.bench.refresh_all()

    def _keep(self) -> None:
        from fieldtool.jobfile.opening import JobFile
        from fieldtool.jobfile.shelf import free_path, job_folder
        from fieldtool.visit import Visit

        if self.job is None:
            return
        now = self.bench.field.clock()
        path = free_path(job_folder(), f"spot check {now:%Y-%m-%d %H%M}")
        JobFile.create(path, self.job, now).close()
        self.bench.close_sheet()
        self.bench.take(Visit.open(path, clock=self.bench.field.clock))
        self.bench.show_pane("readings")

    def actions(self) -> tuple[Action, ...]:
        """With the verdict there: keep it, or change an answer."""
        if self.answer is None:
            return ()
        return (Action("3", "change an answer", self._change), Action("7", "keep as a job", self._keep))

    def notes(self) -> tuple[str, str]:
        """What a digit does."""
        if self.answer is not None:
            return ("", "3 change an answer   7 keep as a job   Esc back to the jobs")
        return ("", "??  Prove dead before you open anything; these readings are as you say them.")

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or Enter   + do not know   - back   / one left out   Esc jobs"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Answer from the readings in your hand; + where you do not know.",
            "What is not asked is assumed and named in the verdict.",
            shorten("It never says go ahead: at best, go ahead if.", 74),
        )
