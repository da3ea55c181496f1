"""When was it taken? Asked once for a batch, beside the work; no reading is ever taken for an answer."""

from __future__ import annotations

from rich.text import Text

from screens.base import Line, Sheet, Target

__all__ = ["TakenQuestion"]

_ANSWERS = (
    ("1", "earlier, while it was proved dead", "proved_dead"),
    ("2", "just now", "just_now"),
    ("3", "at another time", "earlier"),
    ("4", "not sure", "not_sure"),
)


class TakenQuestion(Sheet):
    """Four answers, one of which counts towards a verdict."""

    key = "question"
    title = "When was it taken?"

    def lines(self) -> list[Line]:
        """What is asked, and the answers three rows high."""
        visit, circuit = self.bench.visit, self.bench.circuit
        palette = self.palette
        waiting = visit.waiting_taken(circuit) if visit is not None else ()
        out = [Line(Text(""))]
        if not waiting:
            return [*out, Line(Text("  Nothing waits for an answer.", style=palette.text))]
        said = f"  {len(waiting)} dead readings are kept. The circuit is not proved dead. When were they taken?"
        out += [Line(Text(said, style=palette.text)), Line(Text(""))]
        for number, (digit, words, _) in enumerate(_ANSWERS):
            style = f"bold {palette.text} on {palette.panel}"
            out += [Line(Text(f"   {'':<50}", style=style), number),
                    Line(Text(f"   {digit}  {words:<47}", style=style), number),
                    Line(Text(f"   {'':<50}", style=style), number)]  # fmt: skip
        return out

    def count(self) -> int:
        """Four answers."""
        return len(_ANSWERS)

    def target(self) -> Target:
        """The answer by its digit: one came here on purpose."""
        return Target("when?", "choice", self._answer, choices=tuple((digit, words) for digit, words, _ in _ANSWERS))

    def _answer(self, typed: str) -> tuple[bool, str]:
        visit, circuit = self.bench.visit, self.bench.circuit
        found = next((value for digit, _, value in _ANSWERS if digit == typed), None)
        if visit is None or circuit is None or found is None:
            return False, "1 to 4."
        count = visit.answer_taken(circuit, found)
        self.bench.close_sheet()
        counted = "they count" if found == "proved_dead" else "they do not count: take them again, proved dead"
        self.bench.say(f"{count} readings answered; {counted}.")
        return True, ""

    def tap(self, index: int) -> None:
        """A touch answers."""
        self._answer(_ANSWERS[index][0])
        self.bench.refresh_all()

    def back(self) -> None:
        """``-``: back; they go on waiting."""
        self.bench.close_sheet()

    def notes(self) -> tuple[str, str]:
        """Why it is asked."""
        return ("??  A dead test on a live circuit can hurt you and the meter.", "ok  Not counted until you answer.")
