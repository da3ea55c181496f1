"""What is parted and joined, putting it back, restoring the supply, the main switch, and the place of work."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from rich.text import Text

from fieldtool.job.kinds import IsolationKind
from fieldtool.quantities.show import plain, shorten
from fieldtool.safety.parting import outstanding
from screens.base import Action, Line, Sheet, Target

__all__ = ["PartedSheet"]

_LEGS = (("line legs A and B", "line"), ("neutral legs A and B", "neutral"), ("earth legs A and B", "cpc"))
_ENDS = (("line at the way", "line"), ("neutral at the bar", "neutral"))


class PartedSheet(Sheet):
    """A list of what can be said now; a digit or Enter says it."""

    key = "parted"
    title = "Parted, joined, restored"

    def offers(self) -> list[tuple[str, Callable[[], str]]]:
        """What can be said now, each with what says it."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return []
        ring = visit.job.circuit(circuit).label_claims != "radial"
        out: list[tuple[str, Callable[[], str]]] = []
        rows = outstanding(visit.job, circuit)
        for row in rows:
            word = "off, checked open" if row.sort == "joined" else "back in its terminals"
            out.append((f"{word}: {row.what}", lambda row=row: visit.put_back(row.id)))  # type: ignore[misc]
        if len(rows) > 1:
            out.append(("all of these back and tight, counted", lambda: self._all_back()))
        parted = {row.conductor for row in rows if row.sort == "parted"}
        wanted = _LEGS if ring else _ENDS
        if not {key for _, key in wanted} <= parted:
            what = "legs A and B of L, N and E" if ring else "line and neutral of the circuit"
            out.append((f"parted and marked: {what}", lambda: self._part(wanted)))
        crossed = (
            ("L of A to N of B, L of B to N of A", "L to N crossed", "cross"),
            ("L of A to E of B, L of B to E of A", "L to E crossed", "cross"),
        )
        if not any(row.sort == "joined" for row in rows):
            joins = (*(crossed if ring else ()), ("line to earth", "line to earth, one link", "link"))
            out += [
                (f"joined: {words}", partial(visit.part, circuit, what, "joined", conductor))
                for what, words, conductor in joins
            ]
        for kind, words in (
            ("main_switch_off", "main switch off"), ("neutral_clamped", "neutral clamped and proved"),
            ("origin_test_begins", "origin test begins"), ("origin_test_ends", "origin test over, earth back and tight"),
            ("restored", "supply restored, covers on"), ("left_site", "left the site"),
            ("handed_over", "handed over"), ("abandoned", "left insulated, closed, locked, told in writing"),
        ):  # fmt: skip
            out.append((words, lambda kind=kind: self._log(kind)))  # type: ignore[misc]
        for point in visit.job.points_of(circuit):
            name = point.name or point.id
            out.append((f"place of work: {name}", lambda point=point: self._place(point.id)))  # type: ignore[misc]
        out.append(("place of work: board", lambda: self._place("board")))
        return out

    def _part(self, wanted: tuple[tuple[str, str], ...]) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return ""
        return visit.part_all(circuit, wanted)

    def _all_back(self) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None:
            return ""
        for row in outstanding(visit.job, circuit):
            said = visit.put_back(row.id)
            if said:
                return said
        return ""

    def _log(self, kind: IsolationKind) -> str:
        visit = self.bench.visit
        return "" if visit is None else visit.log(kind, self.bench.circuit)

    def _place(self, place: str) -> str:
        under = self.bench.under[-1][0] if self.bench.under else None
        if under is not None and under.key == "isolation":
            under.place = place  # type: ignore[attr-defined]
        return ""

    def count(self) -> int:
        """As many places as offers."""
        return len(self.offers())

    def lines(self) -> list[Line]:
        """The offers."""
        out = [Line(Text(" Say what your hands have done:", style=f"bold {self.palette.muted}"))]
        for number, (words, _) in enumerate(self.offers()):
            here = number == self.cursor
            digit = str(number + 1) if number < 9 else " "
            style = f"bold {self.palette.cur[0]} on {self.palette.cur[1]}" if here else self.palette.text
            text = f"{'>' if here else ' '} {digit}  {shorten(plain(words), max(20, self.size.width - 8))}"
            out.append(Line(Text(text, style=style), number))
        return out

    def _do(self, number: int) -> tuple[bool, str]:
        offers = self.offers()
        if not 0 <= number < len(offers):
            return False, ""
        said = offers[number][1]()
        if not said and offers[number][0].startswith("place of work"):
            self.bench.close_sheet()
        self.bench.say(said or "Logged.")
        self.bench.judge()
        self.bench.refresh_all()
        return True, said or "Logged."

    def target(self) -> Target:
        """Enter says the one at the cursor."""
        return Target("Enter or a digit says it", "none", lambda _: self._do(self.cursor))

    def actions(self) -> tuple[Action, ...]:
        """Digits of the first nine."""
        return tuple(
            Action(str(n + 1), words, lambda n=n: self._act(n))  # type: ignore[misc]
            for n, (words, _) in enumerate(self.offers()[:9])
        )

    def _act(self, number: int) -> None:
        self._do(number)

    def tap(self, index: int) -> None:
        """A touch says it."""
        self.choose(index)
        self._do(index)

    def back(self) -> None:
        """``-``: back to the log."""
        self.bench.close_sheet()

    def notes(self) -> tuple[str, str]:
        """What must hold."""
        return ("", "ok  Nothing goes on while something is parted or joined; the tool keeps count.")

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or Enter says it   up down   - back to the log   Esc close"
