"""A designer's decision on one finding: who decides, and why; bound to the figures as they are."""

from __future__ import annotations

from rich.text import Text

from fieldtool.answers import Finding
from fieldtool.job.place import Person
from fieldtool.quantities.show import plain
from screens.base import Line, Sheet, Target
from screens.words import wrapped
from screens.workbench import Workbench

__all__ = ["Decide"]


class Decide(Sheet):
    """Two questions: the designer's name, the reason. Only where the standard leaves the choice to the designer."""

    key = "decide"
    title = "A designer's decision"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.finding: Finding | None = None
        self.who = ""

    def lines(self) -> list[Line]:
        """The finding, what may be decided, and what becomes of it."""
        palette = self.palette
        if self.finding is None:
            return [Line(Text("  Go to a finding on the Verdict first: F5.", style=palette.text))]
        width = max(30, self.size.width - 4)
        out = [Line(Text(" Decided on the figures as they are", style=f"bold {palette.muted}"))]
        said = (plain(self.finding.says), f"rule: {self.finding.rule.replace('_', ' ')}, {self.finding.clause}")
        out += [Line(Text(f"  {part}", style=palette.text)) for text in said for part in wrapped(text, width)]
        if not self.finding.designer_may_decide:
            words = "The standard leaves no choice here: it cannot be decided away."
            return [*out, Line(Text("")), Line(Text(f"  {words}", style=palette.no))]
        words = "The decision turns this stop into a condition, with the name and the reason on the record. It lapses when a figure under it changes."  # fmt: skip
        return [*out, Line(Text("")), *(Line(Text(f"  {part}", style=palette.text)) for part in wrapped(words, width))]

    def target(self) -> Target:
        """The name, then the reason."""
        if self.finding is None or not self.finding.designer_may_decide:
            return Target("- goes back", "none")
        if not self.who:
            return Target("designer's name", "text", self._named, value=self._last())
        return Target(f"{self.who}: why", "text", self._reason)

    def _last(self) -> str:
        people = [person for person in self.bench.job.people if person.role == "designer"]
        return people[-1].name if people else ""

    def _named(self, typed: str) -> tuple[bool, str]:
        name = typed.strip() or self._last()
        if not name:
            return False, "Type the designer's name: it stands on the record."
        self.who = name[:60]
        return True, ""

    def _reason(self, typed: str) -> tuple[bool, str]:
        visit, circuit, finding = self.bench.visit, self.bench.circuit, self.finding
        request = visit.request_of(circuit) if visit is not None and circuit is not None else None
        if visit is None or finding is None or request is None:
            return False, "There is nothing to decide on."
        if not typed.strip():
            return False, "Give the reason: it stands on the record."
        known = next((p for p in visit.job.people if p.role == "designer" and p.name == self.who), None)
        if known is None:
            known = Person(id=visit.new_id("e"), name=self.who, role="designer")
            said = visit.put("people", known, "designer")
            if said:
                return False, said
        said = visit.override(request, finding.rule, finding.place, known.id, typed.strip()[:300])
        if said:
            return False, said
        self.bench.close_sheet()
        self.bench.judge()
        return True, "Decided, on the record; it stands as a condition."

    def back(self) -> None:
        """``-``: back to the verdict."""
        self.bench.close_sheet()
