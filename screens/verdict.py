"""Verdict: the word, what it rests on, how far it reaches, what to expect after the work, and what is next."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from rich.text import Text

from fieldtool.answers import VERDICT_WORDS, Finding, Headroom, Verdict
from fieldtool.quantities.show import plain, shorten
from fieldtool.reference.edition import EDITION_SENTENCE
from screens.base import Action, Line, Pane, Target
from screens.widgets.bars import bar
from screens.widgets.findings import finding_text, told
from screens.workbench import Workbench

__all__ = ["VerdictPane"]

_BOX = {"go": "calm", "conditions": "cur", "stop": "stop", "more": "hot"}


class VerdictPane(Pane):
    """Every finding can be opened for its working, values substituted."""

    key = "verdict"
    title = "Verdict"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.open_at = -1
        self.all_shown = False

    def findings(self) -> tuple[Finding, ...]:
        """The findings in the order they are shown: what matters first; all of them on F6."""
        verdict = self.bench.verdict()
        if verdict is None:
            return ()
        counted = [f for f in verdict.findings if f.outcome != "not_applicable"]
        if not self.all_shown:
            first = [f for f in counted if f.outcome != "holds" or f.limit_key in ("zs", "volt_drop")]
            worst: dict[str, Finding] = {}
            for f in first:
                if f.outcome == "holds":
                    best = worst.get(f.limit_key)
                    if best is None or _used(f) > _used(best):
                        worst[f.limit_key] = f
            keep = [f for f in first if f.outcome != "holds" or worst.get(f.limit_key) is f]
            return tuple(keep)
        return tuple(counted)

    def count(self) -> int:
        """As many places as findings shown."""
        return len(self.findings())

    def lines(self) -> list[Line]:
        """The word, findings, headroom, predictions, the edition."""
        palette, verdict = self.palette, self.bench.verdict()
        if self.bench.circuit is None:
            return [Line(Text("  No circuit yet: F2 adds one.", style=palette.text))]
        if verdict is None:
            return [Line(Text("  Working it out ...", style=palette.muted))]
        out = [self._word(verdict), Line(Text(""))]
        for number, finding in enumerate(self.findings()):
            out.extend(self._finding(number, finding))
        out.append(Line(Text("")))
        out.extend(self._rooms(verdict))
        out.extend(self._predicted(verdict))
        out.extend(told("condition: ", verdict.conditions, palette.text, self.size.width))
        out.extend(told("assumed: ", verdict.assumed, palette.muted, self.size.width))
        out.append(Line(Text("")))
        out.append(Line(Text(f"  {EDITION_SENTENCE}", style=palette.muted, no_wrap=True, overflow="ellipsis")))
        out.append(
            Line(
                Text(
                    "  The book, the maker and your judgement decide; this only checks.",
                    style=palette.muted,
                )
            )
        )
        return out

    def _word(self, verdict: Verdict) -> Line:
        front, ground = getattr(self.palette, _BOX[verdict.outcome])
        said = self._what()
        text = f"  {VERDICT_WORDS[verdict.outcome]}   {said}"
        width = max(20, self.size.width)
        return Line(Text(f"{shorten(text, width - 1):<{width - 1}}", style=f"bold {front} on {ground}"))

    def _what(self) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return ""
        request_id = visit.request_of(circuit)
        if request_id is None or not visit.asks(request_id):
            return "the circuit as it stands; nothing is proposed yet"
        answer = visit.answer(request_id) if visit.has_ways(request_id) else None
        request = visit.job.request(request_id)
        where = plain(visit.job.point_name(request.at or request.swap))
        metres = sum(outlet.metres for outlet in request.outlets)
        return f"{answer.words}: {where}, {metres:g} m" if answer else ""

    def _finding(self, number: int, finding: Finding) -> list[Line]:
        palette, here = self.palette, number == self.cursor
        line = finding_text(finding, palette, self.size.width, lead=f"{'>' if here else ' '} ", strong=here)
        out = [Line(line, number)]
        if number == self.open_at:
            for text in (
                *finding.working,
                finding.do and f"do: {finding.do}",
                *(f"assumed: {a}" for a in finding.assumed),
            ):
                if text:
                    out.append(
                        Line(
                            Text(f"        {plain(text)}", style=palette.muted, no_wrap=True, overflow="ellipsis"),
                            number,
                        )
                    )
        return out

    def _rooms(self, verdict: Verdict) -> list[Line]:
        out = []
        worst = {f.limit_key: f for f in sorted(verdict.findings, key=_used) if f.limit_key and f.limit}
        for room in verdict.headroom:
            finding = worst.get(room.limit_key)
            if finding is not None:
                out.append(Line(self._bar(room, finding)))
        if out:
            first = verdict.headroom[0]
            left = f"{first.metres:g} m more" if first.metres is not None else "none within reach"
            words = f" what stops it first: {first.limit_key.replace('_', ' ')}, {left}"
            out.insert(0, Line(Text(words, style=f"bold {self.palette.text}")))
        return out

    def _bar(self, room: Headroom, finding: Finding) -> Text:
        unit = {"ohm": "Ω"}.get(room.unit, room.unit)
        left = "--" if room.metres is None else f"{room.metres:g} m left, {room.metres_clear or 0:g} clear"
        label = f"  {room.limit_key.replace('_', ' '):<10} {finding.measured or 0:>6.2f} {unit} "
        drawn = bar((finding.measured or 0.0), finding.tol, finding.limit or 1.0, 24, self.bench.field.ascii)
        return Text(
            f"{label}{drawn} {finding.limit or 0:.2f} {unit}  {left}",
            style=self.palette.text,
            no_wrap=True,
            overflow="crop",
        )

    def _predicted(self, verdict: Verdict) -> list[Line]:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None or not verdict.predicted:
            return []
        from fieldtool.job.kinds import TESTS
        from fieldtool.verdict.predict import held_against

        out = [Line(Text(" after the work expect", style=f"bold {self.palette.text}"))]
        for held in held_against(visit.job, verdict.predicted, circuit):
            item = held.prediction
            words = TESTS[item.test].words  # type: ignore[index]
            name = visit.job.point_name(item.place) if item.place != circuit else "the ring"
            text = Text(no_wrap=True, overflow="crop")
            mark = "  " if held.agrees is None else "ok" if held.agrees else "NO"
            text.append(f"  {mark}", style=self.palette.mark(mark))
            tail = ""
            if held.agrees is not None:
                shown = "open" if held.measured is None else f"{held.measured:.2f}"
                tail = f"  read {shown}{', as foretold' if held.agrees else ': ' + held.reasons[0]}"
            text.append(
                f"  {words} at {plain(name)} ={item.value:.2f} Ω ({item.low:.2f} to {item.high:.2f}){tail}",
                style=self.palette.text,
            )
            out.append(Line(text))
        return out

    # doing ---------------------------------------------------------------------------------------------------
    def target(self) -> Target:
        """Enter opens the working of the finding at the cursor."""
        findings = self.findings()
        if not findings:
            return Target("")
        return Target("Enter: the working, values put in", "none", self._toggle)

    def _toggle(self, typed: str) -> tuple[bool, str]:
        del typed
        self.open_at = -1 if self.open_at == self.cursor else self.cursor
        return True, ""

    def do_f6(self) -> None:
        """F6: every finding, or only what matters."""
        self.all_shown = not self.all_shown
        self.open_at, self.cursor = -1, 0
        self.bench.refresh_all()

    def next_missing(self) -> None:
        """``/``: to the first thing that is missing."""
        verdict = self.bench.verdict()
        if verdict is None or not verdict.missing:
            self.bench.say("Nothing is missing.")
            return
        gap = verdict.missing[0]
        if gap.test == "survey":
            self.bench.show_pane("proposal" if gap.field.startswith(("route", "outlets", "request")) else "survey")
            self.bench.front.next_missing()
        else:
            self.bench.show_pane("readings")
            self.bench.front.next_missing()

    def _mark(self, **values: Any) -> None:
        visit, circuit = self.bench.visit, self.bench.circuit
        request_id = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is None or request_id is None:
            self.bench.say("Nothing is proposed yet.")
            return
        request = visit.job.request(request_id)
        self.bench.say(visit.put("requests", request.model_copy(update=values), "work") or "Logged.")

    def _now(self) -> datetime:
        assert self.bench.visit is not None
        return self.bench.visit.clock()

    def _begin(self) -> None:
        visit, circuit = self.bench.visit, self.bench.circuit
        request_id = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is None or request_id is None:
            self.bench.say("Nothing is proposed yet.")
            return
        verdict = self.bench.verdict()
        if verdict is None or verdict.outcome not in ("go", "conditions"):
            self.bench.say("Not before the verdict allows it.")
            return
        said = visit.keep_verdict(request_id, "work_begins")
        self.bench.say(said or "The verdict is kept as it stands; work begins.")
        request = visit.job.request(request_id)
        visit.put("requests", request.model_copy(update={"work_begun_at": self._now()}), "work begins")
        self.bench.judge()

    def _done(self) -> None:
        self._mark(work_done_at=self._now())
        readings = self.bench.field.pane("readings", self.bench)
        readings.stage = "after_work"  # type: ignore[attr-defined]
        self.bench.judge()

    def _decide(self) -> None:
        findings = self.findings()
        if not findings:
            self.bench.say("There is no finding to decide on.")
            return
        finding = findings[self.cursor]
        if finding.outcome != "broken":
            self.bench.say("Only a finding that stops the work is decided on: go to it first.")
            return
        sheet = self.bench.field.sheet("decide", self.bench)
        sheet.finding = finding  # type: ignore[attr-defined]
        self.bench.open_sheet(sheet)

    def _keep(self) -> None:
        visit, circuit = self.bench.visit, self.bench.circuit
        request_id = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is not None and request_id is not None:
            self.bench.say(visit.keep_verdict(request_id, "kept") or "Kept with its figures.")
            self.bench.judge()

    def _record(self) -> None:
        visit, circuit = self.bench.visit, self.bench.circuit
        request_id = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is not None and request_id is not None and not visit.read_only and visit.has_ways(request_id):
            visit.keep_verdict(request_id, "record")
            self.bench.judge()
        self.bench.write_record()

    def actions(self) -> tuple[Action, ...]:
        """What the verdict leads to."""
        return (
            Action("1", "work begins: keep this verdict", self._begin),
            Action("2", "work is done: read after work", self._done),
            Action("3", "give it up: leave it closed off", lambda: self._mark(abandoned_at=self._now())),
            Action("7", "keep this verdict", self._keep),
            Action("9", "a designer decides on this finding", self._decide),
            Action("8", "write the record beside the job", self._record),
        )

    def notes(self) -> tuple[str, str]:
        """What is missing first, and what digits do here."""
        verdict = self.bench.verdict()
        first = ""
        if verdict is not None and verdict.missing:
            names = ", ".join(gap.words for gap in verdict.missing[:4])
            first = f"??  missing, in this order: {shorten(names, 66)}"
        return (first, self._to_finish() or "1 work begins  2 work is done  3 give it up  7 keep  8 write the record")

    def _to_finish(self) -> str:
        """What keeps the job from being finished, once the work is said to be done; empty before that."""
        visit, circuit = self.bench.visit, self.bench.circuit
        request_id = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is None or circuit is None or request_id is None:
            return ""
        request = visit.job.request(request_id)
        if request.work_done_at is None and request.abandoned_at is None:
            return ""
        from fieldtool.safety.after import finished
        from fieldtool.verdict.predict import held_against

        answer = visit.answer(request_id) if visit.has_ways(request_id) else None
        predicted = answer.verdict.predicted if answer is not None and answer.verdict is not None else ()
        outside = sum(held.agrees is False for held in held_against(visit.job, predicted, circuit))
        reasons = finished(visit.job, request, answer.repeat_tests if answer is not None else (), outside)
        if not reasons:
            return "ok  Finished: everything is back, read and handed over."
        more = f" (+{len(reasons) - 1} more)" if len(reasons) > 1 else ""
        return f"??  not finished: {shorten(plain(reasons[0]), 52)}{more}"

    def hints(self) -> str:
        """The keys that matter here."""
        return "up down, Enter working   F6 all findings   / to what is missing   F4 ways   Esc menu"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Each line is one rule's answer; Enter shows its working to re-work by hand.",
            "Conditions are done before energising; a missing reading never counts as a yes.",
            "1 keeps the verdict and begins the work; 2 when it is done; 8 writes the record as PDF.",
        )


def _used(finding: Finding) -> float:
    return (finding.measured or 0.0) / finding.limit if finding.limit else 0.0
