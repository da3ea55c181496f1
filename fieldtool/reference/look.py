"""Look-ups in the published tables. Each says in its name how it looks, and each figure carries where it came from.

Nothing is extrapolated: outside a table the answer is ``OutsideTable``, at both ends alike.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from fieldtool.reference.load import ReferenceProblem, Table, table
from fieldtool.reference.used import noted

__all__ = [
    "Cable",
    "DeviceType",
    "Figure",
    "OutsideTable",
    "Provenance",
    "bond_mm2",
    "ca",
    "cable",
    "cables",
    "cg",
    "ci",
    "constant",
    "device",
    "devices",
    "disconnection_s",
    "it_a",
    "k_factor",
    "least_insulation_mohm",
    "let_through_a2s",
    "mv_per_a_m",
    "r_ohm_per_m",
    "rcd_most_ms",
    "terminals_take",
    "usual_ze",
    "zs_max_ohm",
]


class OutsideTable(ReferenceProblem):
    """Asked for a figure that the table does not give; says what it gives."""


@dataclass(frozen=True, slots=True)
class Provenance:
    """Where a figure stands, and how sure it is."""

    table: str
    standard: str
    edition: str
    sure: str
    note: str

    def cite(self) -> str:
        """The provenance in one line, as the record prints it."""
        words = {
            "published": "published page seen",
            "memory": "from memory",
            "memory+derived": "from memory, derived",
        }
        return f"{self.table}, {self.standard}, {words.get(self.sure, self.sure.replace('memory+', 'from memory, '))}"


@dataclass(frozen=True, slots=True)
class Figure:
    """One looked-up value with its unit and provenance."""

    value: float
    unit: str
    provenance: Provenance


@dataclass(frozen=True, slots=True)
class DeviceType:
    """A kind of protective device. ``zs`` says how its loop limit is found."""

    key: str
    words: str
    standard: str
    curve: str
    kind: str
    ratings_a: tuple[float, ...]
    zs: str
    breaking_ka: tuple[float, ...]
    provenance: Provenance


@dataclass(frozen=True, slots=True)
class Cable:
    """A kind of cable. Sizes in mm²; ``cpc_mm2`` is None where only measuring can tell."""

    key: str
    words: str
    family: str
    line_mm2: float
    cpc_mm2: float | None
    rated_as_mm2: float
    k: float
    extendable: bool
    measured_resistance_only: bool
    note: str
    provenance: Provenance


def _from(source: Table, row: dict[str, Any], note: str = "") -> Provenance:
    return Provenance(source.number, source.standard, source.edition, source.sure_of(row), note or source.source)


def _figure(source: Table, row: dict[str, Any], column: str) -> Figure:
    return Figure(float(row[column]), source.units[column], _from(source, row))


def _exact(name: str, key: Any, column: str) -> Figure:
    source = table(name)
    row = source.row(key)
    if row is None:
        have = ", ".join(str(item[source.key]) for item in source.rows)
        raise OutsideTable(f"{source.number} has no {key}; it has {have}")
    return _figure(source, row, column)


def _next_up(name: str, value: float, column: str) -> Figure:
    source = table(name)
    for row in source.rows:
        if value <= row[source.key]:
            return _figure(source, row, column)
    raise OutsideTable(f"{source.number} ends at {source.rows[-1][source.key]}; {value} is beyond it")


@noted
def constant(key: str) -> Figure:
    """One single figure of the rules, exact by its key, such as ``ring.least_iz_a``. Raises OutsideTable."""
    source = table("figures")
    row = source.row(key)
    if row is None:
        raise OutsideTable(f"there is no figure {key}")
    made = Provenance(row["clause"], source.standard, source.edition, source.sure_of(row), row["note"])
    return Figure(row["value"], row["unit"], made)


@noted
def device(key: str) -> DeviceType:
    """A kind of device, exact by its catalogue key. Raises OutsideTable."""
    source = table("devices")
    row = source.row(key)
    if row is None:
        raise OutsideTable(f"{key} is not a kind of device in the catalogue")
    return DeviceType(
        key,
        row["words"],
        row["standard"],
        row["curve"],
        row["kind"],
        tuple(row["ratings_a"]),
        row["zs"],
        tuple(row["breaking_ka"]),
        _from(source, row),
    )


@noted
def cable(key: str) -> Cable:
    """A kind of cable, exact by its catalogue key. Raises OutsideTable."""
    source = table("cables")
    row = source.row(key)
    if row is None:
        raise OutsideTable(f"{key} is not a kind of cable in the catalogue")
    return Cable(
        key,
        row["words"],
        row["family"],
        row["line_mm2"],
        row["cpc_mm2"] or None,
        row["rated_as_mm2"],
        row["k"],
        row["extendable"],
        row["measured_resistance_only"],
        row["note"],
        _from(source, row),
    )


def devices() -> tuple[DeviceType, ...]:
    """Every kind of device, in order of its key."""
    return tuple(device(row["key"]) for row in table("devices").rows)


def cables() -> tuple[Cable, ...]:
    """Every kind of cable, in order of its key."""
    return tuple(cable(row["key"]) for row in table("cables").rows)


@noted
def r_ohm_per_m(area_mm2: float) -> Figure:
    """Resistance of a plain copper conductor at 20 °C, exact by its size [ohm/m]. Source: IEC 60228 maxima."""
    found = _exact("conductors", float(area_mm2), "ohm_per_km")
    return Figure(found.value / 1000, "ohm/m", found.provenance)


@noted
def zs_max_ohm(device_key: str, in_a: float) -> Figure:
    """The largest loop impedance for 0.4 s, Cmin in, unrounded where it is derived [ohm]; exact.

    Breakers: Cmin × U0 / (multiple × In) (411.4.4, Table 41.3); old ones by the upper end of their band; fuses
    by Table 41.2. Plug fuses of 5, 7 and 10 A take the 13 A limit, which is the lower. Raises OutsideTable.
    """
    kind = device(device_key)
    if kind.zs == "table":
        rating = in_a
        if device_key == "bs1362" and 3 < in_a <= 13:
            rating = 13.0
        return _exact("loop_fuses", f"{device_key}:{rating:g}", "zs_ohm")
    source = table("old_breakers") if kind.zs == "old_multiple" else table("loop_breakers")
    row = source.row(kind.curve)
    if row is None or in_a <= 0:
        raise OutsideTable(f"{source.number} has no type {kind.curve} of {in_a} A")
    value = constant("loop.cmin").value * constant("loop.u0_v").value / (row["multiple"] * in_a)
    return Figure(value, "ohm", _from(source, row, "Cmin × U0 / (multiple × In)"))


@noted
def disconnection_s(tt: bool) -> Figure:
    """The disconnection time of a final circuit, exact by the earthing system [s]. Source: Table 41.1."""
    return _exact("disconnection", "tt" if tt else "tn", "final_s")


_METHOD_COLUMNS = {"c": "c_a", "a": "a_a", "b": "b_a", "100": "m100_a", "101": "m101_a", "102": "m102_a"} | {
    "103": "m103_a"
}


@noted
def it_a(family: str, area_mm2: float, method: str) -> Figure:
    """Tabulated current-carrying capacity, exact by size and reference method [A].

    Flat twin has no method B in its own table: the round cable's table speaks (4D2A). Raises OutsideTable.
    """
    name = family
    if family == "flat_twin" and method == "b":
        name = "round_multicore"
    column = _METHOD_COLUMNS.get(method)
    if column is None or column not in table(name).units:
        raise OutsideTable(f"{table(name).number} has no reference method {method}")
    return _exact(name, float(area_mm2), column)


@noted
def mv_per_a_m(family: str, area_mm2: float) -> Figure:
    """Volt drop of a cable at 70 °C, exact by size [mV/A/m]. Source: Tables 4D5, 4D1B."""
    return _exact(family, float(area_mm2), "mv_per_a_m")


@noted
def ca(ambient_c: float) -> Figure:
    """Rating factor for ambient air, next warmer row [1]; 25 °C and below take the 25 °C row. Source: Table 4B1."""
    return _next_up("ambient", ambient_c, "ca")


@noted
def cg(circuits: int, how: str) -> Figure:
    """Rating factor for circuits grouped, next larger group [1]. Source: Table 4C1. Raises OutsideTable."""
    if circuits < 1:
        raise OutsideTable(f"a group has 1 circuit or more, not {circuits}")
    if how not in ("bunched", "single_layer", "tray", "ladder"):
        raise OutsideTable(f"Table 4C1 has no arrangement {how}")
    return _next_up("grouping", float(circuits), how)


@noted
def ci(length_mm: float) -> Figure:
    """Rating factor for a length wholly inside thermal insulation, interpolated between rows [1].

    0 mm is 1.00; 500 mm and more is 0.50 (523.9, Table 52.2). Straight-line interpolation between rows.
    """
    source = table("insulation")
    last = source.rows[-1]
    if length_mm < 0:
        raise OutsideTable(f"a length inside insulation is 0 or more, not {length_mm} mm")
    if length_mm >= last["length_mm"]:
        return _figure(source, last, "ci")
    known = [{"length_mm": 0.0, "ci": 1.0}, *source.rows]
    for low, high in pairwise(known):
        if low["length_mm"] <= length_mm <= high["length_mm"]:
            share = (length_mm - low["length_mm"]) / (high["length_mm"] - low["length_mm"])
            value = low["ci"] + share * (high["ci"] - low["ci"])
            return Figure(value, "1", _from(source, high, "interpolated"))
    raise OutsideTable(f"{length_mm} mm is not in {source.number}")


@noted
def k_factor(kind: str = "incorporated_70") -> Figure:
    """Factor k of a copper protective conductor, exact [A·s^0.5/mm²]. Source: Tables 54.2, 54.3."""
    return _exact("k_factors", kind, "k")


@noted
def let_through_a2s(curve: str, in_a: float, fault_a: float) -> Figure:
    """Let-through energy of a class 3 breaker, next column up by fault current [A²s]. Source: BS EN 60898-1.

    Raises OutsideTable above 40 A, above 10 kA and for curves that the class scheme does not cover.
    """
    if curve not in ("b", "c"):
        raise OutsideTable("the energy classes speak of types B and C")
    band = "to_16" if in_a <= 16 else "to_32" if in_a <= 32 else "to_40" if in_a <= 40 else None
    column = next((step for step in (3000, 4500, 6000, 10000) if fault_a <= step), None)
    if band is None or column is None:
        raise OutsideTable(f"the energy classes end at 40 A and 10 kA; asked for {in_a:g} A and {fault_a:g} A")
    return _exact("let_through", f"{curve}:{band}:{column}", "most_a2s")


@noted
def bond_mm2(neutral_mm2: float) -> Figure:
    """Main bonding where the supply neutral is also earth, next row up by the neutral's size [mm²]. Table 54.8."""
    return _next_up("bonding_pme", neutral_mm2, "bond_mm2")


@noted
def least_insulation_mohm(test_v: float) -> Figure:
    """Least insulation resistance, exact by test voltage [MΩ]. Source: Table 64."""
    return _exact("insulation_resistance", float(test_v), "least_mohm")


@noted
def rcd_most_ms(kind: str) -> Figure:
    """Longest trip time at rated residual current, exact: ``general``, ``s`` or ``bs4293`` [ms]. Source: 643.8."""
    return _exact("rcd_times", kind, "most_ms")


@noted
def terminals_take(area_mm2: float) -> Figure:
    """How many conductors of a size a BS 1363 outlet's terminal takes, next size up [1]."""
    return _next_up("terminals", area_mm2, "most")


@noted
def usual_ze(system: str) -> tuple[Figure, Figure]:
    """Ze usually declared, and the value above which it is questioned, exact by earthing system [ohm]."""
    return _exact("usual_ze", system, "usual_ohm"), _exact("usual_ze", system, "question_ohm")
