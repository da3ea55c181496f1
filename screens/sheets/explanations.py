"""Everything the readings could mean, best first, with the reasoning and the test that would settle it."""

from __future__ import annotations

from rich.text import Text

from fieldtool.answers import CircuitReading, Explanation, Inferred
from fieldtool.job.kinds import TESTS
from fieldtool.quantities.show import plain
from fieldtool.visit.visit import Visit
from screens.base import Line, Sheet, Target

__all__ = ["Explanations"]

_ODDS = {"almost_certainly": "almost certainly", "probably": "probably", "could_be": "could be"}


class Explanations(Sheet):
    """One line an explanation; its reasoning below it."""

    key = "explanations"
    title = "What the readings say"

    def lines(self) -> list[Line]:
        """Explanations, reasoning, what to test next."""
        visit, circuit, palette = self.bench.visit, self.bench.circuit, self.palette
        if visit is None or circuit is None:
            return []
        reading = visit.circuit_reading(circuit)
        claims = visit.job.circuit(circuit).label_claims
        out = [
            Line(
                Text(
                    f" labelled {claims}; shown to be a ring: {'yes' if reading.shown_ring else 'not yet'}",
                    style=f"bold {palette.muted}",
                )
            )
        ]
        out += self._by_class(visit, circuit, reading)
        if not reading.explanations:
            out.append(
                Line(Text(f"  {reading.sentence or 'Nothing was read that says anything yet.'}", style=palette.text))
            )
        if reading.settle is not None:
            out.append(Line(Text(f"  what would settle it: {reading.settle.sentence}", style=palette.text)))
        if reading.smallest_spur_m:
            out.append(
                Line(
                    Text(
                        f"  a spur shorter than about {reading.smallest_spur_m:g} m does not show", style=palette.muted
                    )
                )
            )
        return out

    def _by_class(self, visit: Visit, circuit: str, reading: CircuitReading) -> list[Line]:
        """One line for each class of explanations that read alike, best first; what reads alike named below it."""
        palette = self.palette
        out: list[Line] = []
        for group in dict.fromkeys(item.group for item in reading.explanations):
            members = [item for item in reading.explanations if item.group == group]
            item = members[0]
            odds = _ODDS[item.odds] if item.stands else "hardly"
            out.append(Line(Text(f"  {odds}: {plain(item.sentence)}", style=palette.text)))
            below = [f"reads alike: {plain(other.sentence)}" for other in members[1:]]
            below += [plain(line) for line in item.reasoning]
            below += [self._inferred(visit, circuit, one) for one in item.inferred] if item.stands else []
            below += self._beside(visit, circuit, item) if item is reading.explanations[0] else []
            out += [Line(Text(f"      {line}", style=palette.muted)) for line in below]
        return out

    def _inferred(self, visit: Visit, circuit: str, one: Inferred) -> str:
        place = visit.job.point_name(one.place) if one.place != circuit else "the ring"
        words = one.what.removesuffix("_m").removesuffix("_ohm").replace("_", " ")
        digits = 2 if one.unit == "ohm" else 1
        span = f"{one.low:.{digits}f} to {one.high:.{digits}f}"
        return f"{words}, {plain(place)}: about {one.value:.{digits}f} {one.unit}, {span}, inferred"

    def _beside(self, visit: Visit, circuit: str, item: Explanation) -> list[str]:
        """What the leading explanation gives beside what was read, one line a test."""
        read = visit.job.counted()
        out: list[str] = []
        for test in dict.fromkeys(test for test, _, _ in item.predicted):
            pairs = [
                f"{reading.value:.2f}/{value:.2f}"
                for mine, place, value in item.predicted
                if mine == test
                and (reading := read.get((circuit, place or None, test, "as_found"))) is not None
                and reading.value is not None
            ]
            name = TESTS[test].short  # type: ignore[index]
            out += [
                f"{name if not start else '':6} read/given {' '.join(pairs[start : start + 5])}"
                for start in range(0, len(pairs), 5)
            ]
        return out

    def target(self) -> Target:
        """Enter goes back."""
        return Target("Enter: back", "none", lambda _: (self.bench.close_sheet(), ""))

    def back(self) -> None:
        """``-``: back."""
        self.bench.close_sheet()
