"""The map: the circuit drawn, a quantity at each point; a point chosen here starts the request from it."""

from __future__ import annotations

from math import isfinite

from rich.text import Text

from fieldtool.network.shape import labelled_shape
from fieldtool.record.page_map import Drawing, draw
from screens.base import Line, Sheet, Target
from screens.workbench import Workbench

__all__ = ["MapSheet"]

_SHOWN = (
    ("le_cross", "L-E crossed or R1+R2, Ω"),
    ("zs", "Zs read, Ω"),
    ("left", "Zs left to the most, Ω"),
    ("spur", "metres left for an unfused spur or a branch"),
    ("share", "share of 20 A taken there in the nearer leg, A"),
)


class MapSheet(Sheet):
    """F7 turns the quantity; left and right choose a point; Enter proposes from it."""

    key = "map"
    title = "Map"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.quantity = 0
        self._cached: tuple[object, ...] = ()
        self._values: dict[str, str] = {}

    def points(self) -> list[str]:
        """The points in walking order."""
        if self.bench.circuit is None:
            return []
        return [point.id for point in self.bench.job.points_of(self.bench.circuit)]

    def count(self) -> int:
        """As many places as points."""
        return len(self.points())

    def values(self) -> dict[str, str]:
        """The chosen quantity at each point, worked out once for each job."""
        key = (self.bench.job, self.bench.circuit, self.quantity, self.bench.warm)
        if self._cached and all(a is b for a, b in zip(self._cached, key, strict=True)):
            return self._values
        self._cached = key
        self._values = self._worked_out()
        return self._values

    def _worked_out(self) -> dict[str, str]:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return {}
        name = _SHOWN[self.quantity][0]
        if name in ("le_cross", "zs"):
            tests = ("le_cross", "r1_r2") if name == "le_cross" else ("zs",)
            return {
                point: next((t for test in tests if (t := visit.cell((circuit, point, test, "as_found")).text)), "")
                for point in self.points()
            }
        if not self.bench.warm:
            return {}
        if name == "spur":
            return visit.metres_left(circuit)
        if name == "share":
            return visit.leg_shares(circuit)
        out = {}
        for finding in visit.existing(circuit).findings:
            if finding.limit_key == "zs" and finding.limit is not None and isfinite(finding.measured or 0.0):
                out[finding.place] = f"{finding.limit - (finding.measured or 0.0):.2f}"
        return out

    def drawing(self) -> Drawing:
        """The map as it is drawn now."""
        circuit = self.bench.circuit
        if circuit is None:
            return Drawing((" no circuit yet",), ())
        ring = labelled_shape(self.bench.job, circuit) == "ring"
        return draw(
            self.bench.job, circuit, ring=ring, width=max(56, self.size.width - 2), values=self.values(),
            ascii_only=self.bench.field.ascii,
        )  # fmt: skip

    def lines(self) -> list[Line]:
        """The drawing, the chosen point marked."""
        palette, drawing = self.palette, self.drawing()
        shown = _SHOWN[self.quantity][1]
        out = [Line(Text(f" shown: {shown}   F7 turns it", style=palette.muted)), Line(Text(""))]
        points = self.points()
        chosen = points[self.cursor] if points else ""
        order = {point: number for number, point in enumerate(points)}
        for row, text in enumerate(drawing.lines):
            line = Text(f" {text}", style=palette.text, no_wrap=True, overflow="crop")
            spans = []
            for spot in drawing.spots:
                if spot.row == row and spot.point in order:
                    spans.append((spot.left + 1, spot.right + 1, order[spot.point]))
                if spot.row == row and spot.point == chosen:
                    line.stylize(f"bold {palette.cur[0]} on {palette.cur[1]}", spot.left + 1, spot.left + 4)
                if spot.row == row and spot.point not in order:
                    line.stylize(palette.new, spot.left + 1, spot.right + 1)
            index = next((span[2] for span in spans if span[2] == self.cursor), None)
            out.append(Line(line, index, tuple(spans)))
        out += [
            Line(Text("")),
            Line(Text(" (2) twin (1) single (F) FCU (A) appliance (J) joint   < > new", style=palette.muted)),
        ]
        return out

    def target(self) -> Target:
        """Enter proposes from the chosen point."""
        points = self.points()
        if not points:
            return Target("no points yet: F2 adds them")
        name = self.bench.job.point_name(points[self.cursor])
        value = self.values().get(points[self.cursor], "")
        return Target(f"{name} {value}: Enter proposes from it", "none", lambda _: self._propose())

    def _propose(self) -> tuple[bool, str]:
        points = self.points()
        return (True, self.bench.propose_from(points[self.cursor])) if points else (False, "")

    def move(self, step: int) -> None:
        """Up, down, left and right all go along the walk."""
        super().move(step)

    def turn(self) -> None:
        """The next quantity."""
        self.quantity = (self.quantity + 1) % len(_SHOWN)
        self.bench.refresh_all()

    def do_f6(self) -> None:
        """F6: the next quantity."""
        self.turn()

    def next_missing(self) -> None:
        """``/``: how far from each point, by every way."""
        self.bench.open_named("reach")

    def back(self) -> None:
        """``-``: back."""
        self.bench.close_sheet()

    def hints(self) -> str:
        """The keys that matter here."""
        return "up down choose a point   Enter proposes from it   F6 quantity   / how far   - back"
