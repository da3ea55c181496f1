"""Board survey: what is seen before anything is touched, a question a line, made from the job model itself."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from fieldtool.job.circuit import Circuit, Point
from fieldtool.job.place import Bond, Device, OtherSource, Rcd
from fieldtool.job.rows import Row
from fieldtool.reference.look import cables, device, devices
from screens.base import Action, Line
from screens.form import FieldRow, Form, fields_of
from screens.workbench import Workbench

__all__ = ["Survey", "unanswered"]

Put = Callable[[Any], str]


class Survey(Form):
    """Site, supply, board, the circuit and its device, how the cable lies, and the points."""

    key = "survey"
    title = "Board survey"

    def rows(self) -> list[FieldRow]:
        """Every question of the survey, for the board and the circuit that are worked on."""
        return survey_rows(self.bench)

    def actions(self) -> tuple[Action, ...]:
        """Circuits and points can be chosen and added."""
        return ()

    def head(self) -> list[Line]:
        """Nothing above the questions."""
        return []

    def shown(self) -> None:
        """Begin at the first question without an answer."""
        rows = self.rows()
        self.cursor = next((n for n, row in enumerate(rows) if not row.known and row.needed), self.cursor)

    def do_f6(self) -> None:
        """F6: the circuits of this job."""
        self.bench.open_named("circuits")

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or Enter  + do not know  - back  / missing  F6 circuits  F8 pad  Esc menu"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Answer what you see; leave open what you have not seen: + says so.",
            "Nothing is opened for this but what can be seen with covers on.",
            "F6 chooses or adds a circuit; its points stand at the end of the list.",
        )


def unanswered(bench: Workbench) -> int:
    """How many needed questions have no answer."""
    return sum(not row.known and row.needed for row in survey_rows(bench))


def survey_rows(bench: Workbench) -> list[FieldRow]:
    """Every question of the survey."""
    visit = bench.visit
    if visit is None:
        return []
    job = visit.job

    def putter(table: str, row: Row) -> Callable[[str, Any], str]:
        return lambda name, value: visit.put(table, _changed(row, name, value), "survey")

    rows = fields_of("Site", job.site, putter("site", job.site))
    rows += fields_of("Supply", job.supply, putter("supply", job.supply))
    rows += _bonds(bench)
    rows += _sources(bench)
    circuit = job.circuit(bench.circuit) if bench.circuit is not None else None
    boards = [item for item in job.boards if circuit is None or item.id == circuit.board]
    for board in boards[:1]:
        rows += fields_of("Board", board, putter("boards", board))
    if circuit is None:
        rows.append(_opens("Circuit", "no circuit yet: Enter adds one", lambda: bench.open_named("circuits")))
        return rows
    title = f"Circuit: {circuit.name or circuit.id}"
    rows += _device(bench, circuit, title)
    rows += [
        _cable(item, circuit, bench) if item.label == "cable found" else item
        for item in fields_of(title, circuit, putter("circuits", circuit))
    ]
    rows += _rcd(bench, circuit)
    rows += fields_of(
        "How the cable lies",
        circuit.install,
        lambda name, value: visit.put(
            "circuits", circuit.model_copy(update={"install": _changed(circuit.install, name, value)}), "survey"
        ),
    )
    rows += _points(bench, circuit)
    return rows


def _changed(row: Any, name: str, value: Any) -> Any:
    """A row with one field changed; whole numbers where the model counts, empty text where it is unknown."""
    info = type(row).model_fields[name]
    if value is None and info.default is not None:
        value = info.default
    if isinstance(value, float) and "int" in str(info.annotation) and "float" not in str(info.annotation):
        value = int(value)
    return row.model_copy(update={name: value})


def _opens(section: str, label: str, do: Callable[[], None]) -> FieldRow:
    return FieldRow(section, label, "", lambda _: "", needed=False, opens=do)


def _bonds(bench: Workbench) -> list[FieldRow]:
    visit = bench.visit
    assert visit is not None
    supply = visit.job.supply
    if supply.bonding != "seen":
        return []
    rows = []
    for part in ("water", "gas", "oil", "steel"):
        bond = next((item for item in supply.bonds if item.part == part), None)
        rows.append(
            FieldRow(
                "Supply", f"bond to {part}", "" if bond is None else bond.condition.replace("_", " "),
                lambda value, part=part: _put_bond(bench, part, condition=value),  # type: ignore[misc]
                choices=tuple((w.replace("_", " "), w) for w in ("sound", "absent", "damaged", "not_needed", "not_seen")),
                needed=part == "water",
            )
        )  # fmt: skip
        if bond is not None and bond.condition == "sound":
            rows.append(
                FieldRow(
                    "Supply", f"bond to {part}, size", "" if bond.size_mm2 is None else f"{bond.size_mm2:g} mm²",
                    lambda value, part=part: _put_bond(bench, part, size=value), quantity="area_mm2",  # type: ignore[misc]
                )
            )  # fmt: skip
    return rows


def _put_bond(bench: Workbench, part: str, *, condition: Any = None, size: float | None = None) -> str:
    visit = bench.visit
    assert visit is not None
    supply = visit.job.supply
    old = next((item for item in supply.bonds if item.part == part), None)
    rest = tuple(item for item in supply.bonds if item.part != part)
    if condition is None and size is None:
        return visit.put("supply", supply.model_copy(update={"bonds": rest}), "survey")
    kept = condition or (old.condition if old is not None else "not_seen")
    made = Bond(part=part, condition=kept, size_mm2=size if size is not None else (old.size_mm2 if old else None))  # type: ignore[arg-type]
    return visit.put("supply", supply.model_copy(update={"bonds": (*rest, made)}), "survey")


def _sources(bench: Workbench) -> list[FieldRow]:
    visit = bench.visit
    assert visit is not None
    supply = visit.job.supply
    if supply.sources != "some":
        return []
    source = supply.other_sources[0] if supply.other_sources else None

    def put(name: str, value: Any) -> str:
        made = source or OtherSource(kind="other")
        changed = made.model_copy(
            update={name: value if value is not None else ("" if name == "isolated_by" else None)}
        )
        rest = supply.other_sources[1:]
        return visit.put("supply", supply.model_copy(update={"other_sources": (changed, *rest)}), "survey")

    kinds = ("pv", "battery", "generator", "vehicle", "second_supply", "ups", "other")
    from screens.words import choice_words

    return [
        FieldRow("Supply", "other source", choice_words(source.kind) if source else "", lambda v: put("kind", v or "other"),
                 choices=tuple((choice_words(kind), kind) for kind in kinds)),
        FieldRow("Supply", "isolated by", source.isolated_by if source else "", lambda v: put("isolated_by", v)),
        FieldRow("Supply", "can feed back", (source.feeds_back or "") if source else "", lambda v: put("feeds_back", v),
                 choices=(("yes", "yes"), ("no", "no"))),
    ]  # fmt: skip


_COMMON = ("bs61009_b", "bs60898_b", "bs61009_c", "bs60898_c", "bs60898_d", "bs3036", "bs1361", "bs88_3", "bs3871_2")


def _device(bench: Workbench, circuit: Circuit, title: str) -> list[FieldRow]:
    visit = bench.visit
    assert visit is not None
    found = circuit.device

    def put(**values: Any) -> str:
        if found is None and "type" not in values:
            return "Say first which kind of device it is."
        made = found.model_copy(update=values) if found is not None else Device(in_a=32.0, **values)
        return visit.put("circuits", circuit.model_copy(update={"device": made}), "survey")

    shown = {item.key: f"{item.words} ({item.standard})" for item in devices()}
    rows = [
        FieldRow(title, "device", shown.get(found.type, found.type) if found else "", lambda v: put(type=v),
                 choices=tuple((f"{device(key).words}", key) for key in _COMMON),
                 help="Read the standard and the type letter on the device."),
        FieldRow(title, "device rating", f"{found.in_a:g} A" if found else "", lambda v: put(in_a=v), "rating_a"),
        FieldRow(title, "it breaks", f"{found.breaking_ka:g} kA" if found and found.breaking_ka else "",
                 lambda v: put(breaking_ka=v), "breaking_ka", help="The figure in the box on the device: 6000 is 6 kA."),
        FieldRow(title, "poles it cuts", str(found.poles) if found and found.poles else "", lambda v: put(poles=v),
                 choices=(("line only", 1), ("line and neutral", 2))),
        FieldRow(title, "energy class", str(found.energy_class) if found and found.energy_class else "",
                 lambda v: put(energy_class=v), choices=(("1", 1), ("2", 2), ("3", 3)), needed=False),
        FieldRow(title, "device by eye", (found.condition or "") if found else "", lambda v: put(condition=v),
                 choices=tuple((word, word) for word in ("good", "worn", "obsolete", "damaged", "heat"))),
    ]  # fmt: skip
    if visit.job.supply.sources == "some":
        rows.append(
            FieldRow(title, "device for both directions", (found.bidirectional or "") if found else "",
                     lambda v: put(bidirectional=v), choices=(("yes", "yes"), ("no", "no")))
        )  # fmt: skip
    return rows


_CABLES = (
    "ft_2_5",
    "ft_4",
    "ft_2_5_1_0",
    "ft_1_5",
    "s_2_5",
    "imperial_7_029",
    "vir_rubber",
    "no_cpc_twin",
    "aluminium",
)


def _cable(row: FieldRow, circuit: Circuit, bench: Workbench) -> FieldRow:
    visit = bench.visit
    assert visit is not None
    shown = {item.key: item.words for item in cables()}
    return FieldRow(
        row.section,
        row.label,
        shown.get(circuit.cable or "", circuit.cable or ""),
        row.put,
        choices=tuple((shown[key], key) for key in _CABLES),
        help="Line and earth size. 7/.029 and older cable: measured resistance only.",
    )


def _rcd(bench: Workbench, circuit: Circuit) -> list[FieldRow]:
    visit = bench.visit
    assert visit is not None
    if circuit.rcd_covers != "some":
        return []
    found = circuit.rcd

    def put(**values: Any) -> str:
        base: dict[str, Any] = {"type": "unknown", "i_dn_ma": 30.0}
        made = found.model_copy(update=values) if found is not None else Rcd(**{**base, **values})
        return visit.put("circuits", circuit.model_copy(update={"rcd": made}), "survey")

    return [
        FieldRow("RCD", "RCD type", found.type.upper() if found else "", lambda v: put(type=v or "unknown"),
                 choices=(("AC", "ac"), ("A", "a"), ("F", "f"), ("B", "b"), ("not known", "unknown")),
                 help="The wave drawn on it: one sine alone is AC."),
        FieldRow("RCD", "rated residual current", f"{found.i_dn_ma:g} mA" if found else "",
                 lambda v: put(i_dn_ma=v or 30.0), "leakage_ma"),
        FieldRow("RCD", "delayed", {"s": "yes, S", "none": "no"}[found.delay] if found else "",
                 lambda v: put(delay=v or "none"), choices=(("no", "none"), ("yes, S", "s"))),
        FieldRow("RCD", "standard", found.standard if found else "", lambda v: put(standard=v or "unknown"),
                 choices=(("61008", "61008"), ("61009", "61009"), ("4293", "4293"), ("7288", "7288"),
                          ("not known", "unknown"))),
    ]  # fmt: skip


def _points(bench: Workbench, circuit: Circuit) -> list[FieldRow]:
    visit = bench.visit
    assert visit is not None
    rows = []
    for point in visit.job.points_of(circuit.id):
        where = "spur" if point.spur_from is not None else "behind FCU" if point.behind is not None else "trunk"
        rows.append(
            FieldRow(
                "Points",
                point.name or point.id,
                f"{point.kind}, {where}",
                lambda _: "",
                needed=False,
                opens=lambda point=point: _open_point(bench, point),  # type: ignore[misc]
            )
        )
    rows.append(
        FieldRow(
            "Points", "add a point: its name", "", lambda value: _add_point(bench, circuit, value), needed=False,
            help="In the order of the walk from leg A: by door, worktop, fridge.",
        )
    )  # fmt: skip
    return rows


def _open_point(bench: Workbench, point: Point) -> None:
    sheet = bench.field.sheet("points", bench)
    sheet.point_id = point.id  # type: ignore[attr-defined]
    bench.open_sheet(sheet)


def _add_point(bench: Workbench, circuit: Circuit, name: Any) -> str:
    visit = bench.visit
    assert visit is not None
    if not name:
        return ""
    trunk = [point for point in visit.job.points_of(circuit.id) if point.spur_from is None and point.behind is None]
    order = max((point.walk_order or 0 for point in trunk), default=0) + 1
    cables_there = 2 if circuit.label_claims == "ring" else None
    point = Point(id=visit.new_id("p"), circuit=circuit.id, name=str(name)[:60], walk_order=order, cables=cables_there)
    return visit.put("points", point, "survey")
