"""A circuit as it was found: its points, the runs that were traced, how it is installed, what it feeds."""

from __future__ import annotations

from typing import Literal

from fieldtool.job.kinds import CircuitClaim, Condition, InstallMethod, PointKind, RcdType, YesNo
from fieldtool.job.place import Device, Part, Rcd
from fieldtool.job.rows import Id, Row, Text, ask

__all__ = ["Circuit", "Install", "Load", "Point", "Run"]


class Install(Part):
    """How the cable lies where it can carry least: the worst of the conditions along the way governs."""

    method: InstallMethod | None = ask("cable lies", help="Where it can shed least heat.")
    ambient_c: float = ask("warmest air along it", quantity="temp_c", default=30.0, ge=-20, le=80)
    grouped_n: int = ask("circuits bunched together", quantity="count", default=1, ge=1, le=20)
    grouping: Literal["bunched", "single_layer", "tray", "ladder"] = ask("bunched how", default="bunched")
    insulated_mm: float = ask("length inside insulation", quantity="depth_mm", default=0.0, ge=0, le=5000)
    legs_together: YesNo | None = ask(
        "ring legs side by side", help="Then the two legs are a group of two.", optional=True
    )


class Circuit(Row):
    """One final circuit. ``label_claims`` is what the board says, never a shape."""

    board: Id
    way: Text = ask("way", default="")
    name: Text = ask("circuit name", default="")
    label_claims: CircuitClaim = ask("label says", default="none")
    device: Device | None = None
    rcd_covers: Literal["none", "some"] | None = ask("RCD covers it")
    rcd: Rcd | None = None
    cable: Text | None = ask("cable found", help="A key of the cable catalogue: size of line and of earth.")
    cable_condition: Literal["sound", "crumbling", "mixed_colours", "damaged"] | None = ask("cable by eye")
    install: Install = Install()
    line_ends: int | None = ask("line conductors at the way", quantity="count", ge=0, le=12)
    neutral_ends: int | None = ask("neutrals of it at the bar", quantity="count", ge=0, le=12)
    cpc_ends: int | None = ask("earths of it at the bar", quantity="count", ge=0, le=12)
    terminal_room: YesNo | None = ask("room in the way's terminals", optional=True)
    heat_seen: YesNo | None = ask("heat, smell or browning anywhere", help="Ask the occupier too.")
    back_feed: Literal["none", "found", "unknown"] | None = ask(
        "anything that feeds back into it", help="Plug-in solar, inverter, UPS, a lead with two plugs."
    )
    other_circuits_in_boxes: YesNo | None = ask("another circuit in any of its boxes")
    it_items: int | None = ask("items of IT equipment on it", quantity="count", ge=0, le=500, optional=True)
    load_has_dc: RcdType | None = ask(
        "RCD type the loads need", help="Most modern loads need A; heat pumps, vehicles B or F."
    )
    floor_area_m2: float | None = ask("floor area it serves", quantity="floor_m2", ge=0, le=2000, optional=True)
    left_in_for_ir: Text = ask("left connected for IR", default="")
    arc_fault_device: YesNo | None = ask("arc fault detection fitted", optional=True)


class Point(Row):
    """Anything the circuit feeds or joins.

    ``spur_from`` is the point it was seen or shown to hang on; ``behind`` the fused unit that protects it;
    ``walk_order`` its place in the walk along the ring from leg A, where that was traced.
    """

    circuit: Id
    kind: PointKind = ask("kind", default="twin")
    name: Text = ask("name", default="")
    walk_order: int | None = ask("place in the walk", quantity="count", ge=1, le=500, optional=True)
    spur_from: Id | None = None
    spur_length_m: float | None = ask("spur length", quantity="length_m", ge=0, le=500, optional=True)
    behind: Id | None = None
    fuse_a: float | None = ask("plug fuse in it", quantity="rating_a", gt=0, le=13, optional=True)
    cables: int | None = ask("cables in the box", quantity="count", ge=0, le=12, optional=True)
    box_depth_mm: float | None = ask("box depth", quantity="depth_mm", gt=0, le=200, optional=True)
    condition: Condition | None = ask("by eye", optional=True)
    accessible: YesNo | None = ask("can be reached", optional=True)
    rated_a: float | None = ask("rated", quantity="rating_a", gt=0, le=100, optional=True)


class Run(Row):
    """A length of cable that was traced between two points; ``board`` stands for the circuit's way."""

    circuit: Id
    a: Id
    b: Id
    cable: Text | None = None
    length_m: float | None = ask("length", quantity="length_m", ge=0, le=1000)
    length_from: Literal["measured", "paced", "drawing"] = "measured"
    method: InstallMethod | None = None
    insulated_mm: float | None = ask("length inside insulation", quantity="depth_mm", ge=0, le=5000)
    grouped_n: int | None = ask("circuits bunched together", quantity="count", ge=1, le=20)
    ambient_c: float | None = ask("warmest air along it", quantity="temp_c", ge=-20, le=80)
    hidden_depth_mm: float | None = ask("depth in the wall", quantity="depth_mm", ge=0, le=1000)


class Load(Row):
    """A load known to be taken at a point, for long where ``lasting``."""

    circuit: Id
    point: Id
    name: Text = ask("load", default="")
    amps: float = ask("current", quantity="load_a", default=0.0, ge=0, le=100)
    lasting: bool = True
