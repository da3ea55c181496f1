"""Proposed work: what is wanted, where and how far; and every way of adding side by side, with its reason."""

from __future__ import annotations

from typing import Any

from rich.text import Text

from fieldtool.answers import MARKS, WayAnswer
from fieldtool.job.kinds import WayKey
from fieldtool.job.request import Choice, NewOutlet, Request
from fieldtool.quantities.show import plain, shorten
from fieldtool.reference.look import cable
from screens.base import Action, Line, Target
from screens.form import FieldRow, Form, fields_of
from screens.widgets.findings import counted, finding_text
from screens.workbench import Workbench

__all__ = ["Proposal"]


class Proposal(Form):
    """The request's questions first; below them the ways, best first, stopped ones with their reason."""

    key = "proposal"
    title = "Proposed work"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.request_id: str | None = None

    def shown(self) -> None:
        """Work on the newest request of the circuit; begin at the ways where the questions are answered."""
        visit = self.bench.visit
        if visit is not None and self.bench.circuit is not None:
            self.request_id = visit.request_of(self.bench.circuit)
        rows = self.rows()
        missing = next((n for n, row in enumerate(rows) if not row.known and row.needed), None)
        self.cursor = missing if missing is not None else len(rows)

    def request(self) -> Request | None:
        """The request that is worked on."""
        visit = self.bench.visit
        if visit is None or self.request_id is None:
            return None
        return next((item for item in visit.job.requests if item.id == self.request_id), None)

    def put(self, **values: Any) -> str:
        """Change the request; one sentence where it cannot be so."""
        visit, request = self.bench.visit, self.request()
        if visit is None or request is None:
            return "Say first what is wanted."
        return visit.put("requests", request.model_copy(update=values), "proposal")

    def rows(self) -> list[FieldRow]:
        """The questions of the request."""
        visit, request = self.bench.visit, self.request()
        if visit is None or self.bench.circuit is None:
            return []
        if request is None:
            kinds = (("a twin outlet", "twin"), ("a single outlet", "single"), ("a fixed appliance", "appliance"),
                     ("a fused unit", "fcu"), ("a twin for a single", "swap"))  # fmt: skip
            return [FieldRow("What is wanted", "what is wanted", "", self._begin, choices=kinds,
                             help="Say what and where; every way of adding is judged at once.")]  # fmt: skip
        return [*self._where(request), *self._outlets(request), *self._route(request), *self._cures(request)]

    def _begin(self, value: Any) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None or value is None:
            return ""
        row_id, outlet_id = visit.new_id("q"), visit.new_id("w")
        outlet = NewOutlet(id=outlet_id, kind=value if value != "swap" else "twin", name=f"new {value}")
        claims = visit.job.circuit(circuit).label_claims
        request = Request(
            id=row_id,
            circuit=circuit,
            attach="end" if claims == "radial" else "point",
            outlets=() if value == "swap" else (outlet,),
        )
        self.request_id = row_id
        return visit.put("requests", request, "asked for")

    def _points(self) -> tuple[tuple[str, Any], ...]:
        visit = self.bench.visit
        assert visit is not None
        assert self.bench.circuit is not None
        return tuple((point.name or point.id, point.id) for point in visit.job.points_of(self.bench.circuit))

    def _where(self, request: Request) -> list[FieldRow]:
        visit = self.bench.visit
        assert visit is not None
        section = "Where"
        name = visit.job.point_name
        if not request.outlets:
            singles = tuple(
                (point.name or point.id, point.id)
                for point in visit.job.points_of(request.circuit)
                if point.kind == "single"
            )
            return [FieldRow(section, "single that becomes a twin", name(request.swap) if request.swap else "",
                             lambda value: self.put(swap=value), choices=singles)]  # fmt: skip
        attach = (("from a point", "point"), ("between two points", "between"), ("from the board", "board"),
                  ("from the radial's end", "end"))  # fmt: skip
        shown = {value: words for words, value in attach}
        rows = [FieldRow(section, "new cable starts", shown[request.attach], self._starts, choices=attach)]
        if request.attach != "board":
            rows.append(self._place(section, "at", "point it starts from", request.at))
        if request.attach == "between":
            rows.append(self._place(section, "other", "and goes on to", request.other))
        return rows

    def _starts(self, value: Any) -> str:
        return self.put(attach=value or "point", **({"at": None, "other": None} if value == "board" else {}))

    def _place(self, section: str, field: str, label: str, value: str | None) -> FieldRow:
        visit = self.bench.visit
        assert visit is not None
        points = self._points()
        if len(points) <= 10:
            shown = visit.job.point_name(value) if value else ""
            return FieldRow(section, label, shown, lambda given: self.put(**{field: given}), choices=points)
        names = {str(number): point_id for number, (_, point_id) in enumerate(points, start=1)}

        def put(given: Any) -> str:
            if given is None:
                return self.put(**{field: None})
            wanted = names.get(str(given)) or next((pid for word, pid in points if word == given), None)
            return self.put(**{field: wanted}) if wanted else "Type the point's number on the walk, or its name."

        return FieldRow(section, f"{label} (number or name)", visit.job.point_name(value) if value else "", put)

    def _outlets(self, request: Request) -> list[FieldRow]:
        rows: list[FieldRow] = []
        for number, outlet in enumerate(request.outlets):
            title = f"Outlet {number + 1}"
            rows += fields_of(title, outlet, lambda name, value, n=number: self._put_outlet(n, name, value),  # type: ignore[misc]
                              skip=("zone_distance_m",) if outlet.where != "bathroom" else ())  # fmt: skip
        if request.outlets:
            rows.append(FieldRow("Outlets", "one more outlet: its name", "", self._more, needed=False))
        needs_back = request.attach in ("between", "point") and bool(request.outlets)
        if needs_back:
            back = "" if request.back_metres is None else f"{request.back_metres:g} m"
            rows.append(FieldRow("Outlets", "metres back, for a longer ring", back,
                                 lambda value: self.put(back_metres=value), "length_m", needed=False,
                                 help="Not given: taken as long as the way out."))  # fmt: skip
            fuse = "" if request.fuse_a is None else f"{request.fuse_a:g} A"
            rows.append(FieldRow("Outlets", "fuse, for a fused spur", fuse, lambda value: self.put(fuse_a=value),
                                 choices=(("3 A", 3.0), ("5 A", 5.0), ("13 A", 13.0)), needed=False))  # fmt: skip
        return rows

    def _put_outlet(self, number: int, name: str, value: Any) -> str:
        request = self.request()
        if request is None:
            return ""
        outlet = request.outlets[number]
        if value is None:
            value = type(outlet).model_fields[name].default
        changed = outlet.model_copy(update={name: value})
        outlets = tuple(changed if n == number else item for n, item in enumerate(request.outlets))
        return self.put(outlets=outlets)

    def _more(self, name: Any) -> str:
        visit, request = self.bench.visit, self.request()
        if visit is None or request is None or not name:
            return ""
        outlet = NewOutlet(id=visit.new_id("w"), name=str(name)[:60])
        return self.put(outlets=(*request.outlets, outlet))

    def _route(self, request: Request) -> list[FieldRow]:
        if not request.outlets:
            return []
        keys = ("ft_2_5", "ft_4", "ft_1_5", "ft_6", "s_2_5", "s_4")

        def put(name: str, value: Any) -> str:
            info = type(request.route).model_fields[name]
            given = info.default if value is None else value
            if name == "grouped_n" and isinstance(given, float):
                given = int(given)
            return self.put(route=request.route.model_copy(update={name: given}))

        rows = []
        for row in fields_of("New cable", request.route, put):
            if row.label == "new cable":
                row = FieldRow(row.section, row.label, cable(request.route.cable).words, row.put,
                               choices=tuple((cable(key).words, key) for key in keys))  # fmt: skip
            rows.append(row)
        return rows

    def _cures(self, request: Request) -> list[FieldRow]:
        offered = (
            ("rcbo_30_type_a", "30 mA type A RCBO at the board"),
            ("rcd_ahead", "30 mA RCD ahead of the addition"),
            ("joint_box", "joint box beside the point"),
            ("bonding_upgrade", "bonding put right"),
            ("arc_fault_device", "arc fault device"),
        )
        rows = []
        for cure, words in offered:
            shown = "yes" if cure in request.cures else "no"

            def put(value: Any, cure: str = cure) -> str:
                rest = tuple(item for item in request.cures if item != cure)
                return self.put(cures=(*rest, cure) if value == "yes" else rest)

            rows.append(
                FieldRow("Part of the work", words, shown, put, choices=(("yes", "yes"), ("no", "no")), needed=False)
            )
        return rows

    # the ways ------------------------------------------------------------------------------------------------
    def ways(self) -> tuple[WayAnswer, ...]:
        """The ways that are about this circuit, as they were judged last."""
        return tuple(item for item in self.bench.ways() if item.applies)

    def count(self) -> int:
        """The questions, then the ways."""
        return len(self.rows()) + len(self.ways())

    def lines(self) -> list[Line]:
        """Questions, then the ways with three lines on the one under the cursor."""
        out = super().lines()
        ways, base = self.ways(), len(self.rows())
        request = self.request()
        if self.bench.circuit is None:
            return [Line(Text("  No circuit yet: F2 adds one.", style=self.palette.text))]
        if request is not None and not ways:
            word = "Working it out ..." if self.bench.warm else "Loading ..."
            out.append(Line(Text(f" {word}", style=self.palette.muted)))
        if ways:
            out.append(Line(Text(f" {'Ways':<45}{'left':>8}   held by", style=f"bold {self.palette.muted}")))
        for number, answer in enumerate(ways):
            out.append(self._way(number, answer, base + number, request))
            if base + number == self.cursor:
                out.extend(self._detail(answer, base + number))
        return out

    def wanted_top(self, every: list[Line]) -> int | None:
        """With the cursor among the ways, the ways begin the pane."""
        base = len(self.rows())
        if self.cursor < base:
            return None
        return next((n - 1 for n, line in enumerate(every) if line.index == base), None)

    def _way(self, number: int, answer: WayAnswer, index: int, request: Request | None) -> Line:
        palette = self.palette
        here = index == self.cursor
        mark = MARKS[answer.outcome]
        chosen = request is not None and request.chosen_way == answer.way
        rooms = answer.verdict.headroom if answer.verdict is not None else ()
        left = f"{rooms[0].metres:g} m" if rooms and rooms[0].metres is not None and answer.outcome != "stop" else "--"
        held = answer.stopped_by or (rooms[0].limit_key.replace("_", " ") if rooms else "")
        line = Text(no_wrap=True, overflow="crop")
        line.append(f"{'>' if here else ' '} ", style=f"bold {palette.text}")
        line.append(mark, style=palette.mark(mark))
        words = shorten(f"{'* ' if chosen else ''}{answer.words}", 40)
        style = f"bold {palette.cur[0]} on {palette.cur[1]}" if here else palette.text
        line.append(f" {number + 1:>2} {words:<40}", style=style)
        line.append(f"{left:>7}   ", style=palette.text)
        line.append(shorten(plain(held), max(8, self.size.width - 57)), style=palette.muted)
        return Line(line, index)

    def _detail(self, answer: WayAnswer, index: int) -> list[Line]:
        out: list[Line] = []
        width = max(40, self.size.width - 8)
        if answer.verdict is not None:
            for finding in counted(answer.verdict.findings)[:4]:
                out.append(Line(finding_text(finding, self.palette, self.size.width, lead="      "), index))
        material = ", ".join(f"{item.amount:g} {item.unit} {item.what}".replace("  ", " ") for item in answer.material)
        if material:
            out.append(Line(Text(f"      {shorten(material, width)}", style=self.palette.muted), index))
        return out

    def target(self) -> Target:
        """At a question its answer; at a way Enter chooses it."""
        rows, ways = self.rows(), self.ways()
        if self.cursor < len(rows):
            return super().target()
        place = self.cursor - len(rows)
        if place < len(ways):
            return Target(f"{ways[place].words}: Enter chooses it", "none", lambda _: self._choose(ways[place]))
        return Target("")

    def actions(self) -> tuple[Action, ...]:
        """Among the ways a digit goes to its way; Enter then chooses it."""
        base, ways = len(self.rows()), self.ways()
        if self.cursor < base:
            return ()
        return tuple(
            Action(str(n + 1), item.words, lambda n=n: self.choose(base + n))  # type: ignore[misc]
            for n, item in enumerate(ways[:9])
        )

    def _choose(self, answer: WayAnswer) -> tuple[bool, str]:
        if answer.verdict is None or answer.outcome == "stop":
            return False, shorten(answer.stopped_by or answer.refused, 74)
        request = self.request()
        if request is not None:
            way: WayKey = answer.way  # type: ignore[assignment]
            problem = self.put(chosen_way=way)
            if problem:
                return False, problem
        self.bench.show_pane("verdict")
        return True, ""

    def do_f6(self) -> None:
        """F6: turn the choice that a way under the cursor leaves open."""
        request = self.request()
        if request is None:
            return
        ways, place = self.ways(), self.cursor - len(self.rows())
        if 0 <= place < len(ways) and ways[place].outcome == "stop":
            self._decide(ways[place])
            return
        key = {"ring_between": ("old_link", "removed", "left"), "ring_at_point": ("box", "kept", "joint"),
               "ring_to_radial": ("loop", "joined", "opened"), "spur_at_board": ("fuse", "fcu", "none")}.get(
            ways[place].way if 0 <= place < len(ways) else "")  # fmt: skip
        if key is None:
            self.bench.say("This way leaves nothing to choose.")
            return
        name, first, second = key
        now = request.choice(name, first)
        rest = tuple(item for item in request.choices if item.key != name)
        made = Choice(key=name, value=second if now == first else first)  # type: ignore[arg-type]
        self.bench.say(self.put(choices=(*rest, made)) or f"{name.replace('_', ' ')}: {made.value}.")
        self.bench.judge()

    def _decide(self, answer: WayAnswer) -> None:
        """On a stopped way F6 asks a designer, where the standard leaves what stops it to one."""
        broken = [f for f in answer.verdict.findings if f.outcome == "broken"] if answer.verdict is not None else []
        finding = next((f for f in broken if f.designer_may_decide), None)
        if finding is None:
            self.bench.say("What stops this way is not left to a designer.")
            return
        sheet = self.bench.field.sheet("decide", self.bench)
        sheet.finding = finding  # type: ignore[attr-defined]
        self.bench.open_sheet(sheet)

    def next_missing(self) -> None:
        """``/``: the next question without an answer, else the ways."""
        rows = self.rows()
        for place, row in enumerate(rows):
            if not row.known and row.needed:
                self.choose(place)
                return
        self.choose(len(rows))

    def notes(self) -> tuple[str, str]:
        """What to look for, and the best way so far."""
        ways = self.ways()
        first = super().notes()[0] if self.cursor < len(self.rows()) else ""
        if not ways:
            return (first, "??  Say what is wanted; the ways are judged as you type.")
        best = ways[0]
        return (first, f"{MARKS[best.outcome]}  first: {best.words}. / goes to the ways; Enter chooses.")

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or Enter  + do not know  - back  / ways  F6 its choice  F7 map  Esc menu"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Say what, where and how many metres by the route; no way needs to be known.",
            "Below, every way is judged; a stopped one says why. Enter on a way chooses it.",
            "What is part of the work (an RCBO, a joint box) turns a stop into a condition.",
        )
