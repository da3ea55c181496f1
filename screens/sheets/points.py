"""One point: what it is, where it hangs, what fuse it has; and taking it out."""

from __future__ import annotations

from typing import Any

from screens.base import Sheet
from screens.form import FieldRow, Form, fields_of
from screens.workbench import Workbench

__all__ = ["Points"]


class Points(Form, Sheet):
    """The questions of one point."""

    key = "points"
    title = "Point"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.point_id = ""

    def rows(self) -> list[FieldRow]:
        """What is asked of the point."""
        visit = self.bench.visit
        point = next((item for item in self.bench.job.points if item.id == self.point_id), None)
        if visit is None or point is None:
            return []

        def put(name: str, value: Any) -> str:
            info = type(point).model_fields[name]
            given = info.default if value is None else value
            if name in ("walk_order", "cables") and isinstance(given, float):
                given = int(given)
            changed = point.model_copy(update={name: given})
            if name == "kind" and given != "fcu":
                changed = changed.model_copy(update={"fuse_a": None})
            return visit.put("points", changed, "point")

        others = [item for item in visit.job.points_of(point.circuit) if item.id != point.id]
        trunk = tuple((item.name or item.id, item.id) for item in others if item.spur_from is None)[:9]
        units = tuple((item.name or item.id, item.id) for item in others if item.kind == "fcu")[:9]
        name = visit.job.point_name
        rows = fields_of("Point", point, put, skip=() if point.kind == "fcu" else ("fuse_a",))
        rows = [FieldRow(r.section, r.label, r.value, r.put, r.quantity, r.choices, r.help, False) for r in rows]
        rows.append(FieldRow("Where it hangs", "spur from", name(point.spur_from) if point.spur_from else "",
                             lambda value: put("spur_from", value), choices=trunk, needed=False,
                             help="Only where it was seen or shown; + takes it back."))  # fmt: skip
        if units:
            rows.append(FieldRow("Where it hangs", "behind the fused unit", name(point.behind) if point.behind else "",
                                 lambda value: put("behind", value), choices=units, needed=False))  # fmt: skip
        rows.append(FieldRow("Take it out", "take this point out", "", self._remove, choices=(("keep", ""), ("take out", "out")),
                             needed=False))  # fmt: skip
        return rows

    def skip(self) -> None:
        """``+``: not known, or not so."""
        row = self.current()
        if row is not None and row.known:
            self.bench.say(row.put(None))
        self.move(1)

    def _remove(self, value: Any) -> str:
        visit = self.bench.visit
        if value != "out" or visit is None:
            return ""
        problem = visit.remove("points", self.point_id, "point taken out")
        if not problem:
            self.bench.close_sheet()
        return problem
