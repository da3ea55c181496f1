"""What the user wants added, independent of the way; and what a designer decided on the record."""

from __future__ import annotations

from typing import Literal

from fieldtool.job.kinds import Attachment, InstallMethod, PointKind, RcdType, WayKey, YesNo
from fieldtool.job.place import Part
from fieldtool.job.rows import Id, LongText, Moment, Row, Text, ask

__all__ = ["Choice", "Cure", "KeptFinding", "NewOutlet", "Override", "Request", "Route", "VerdictKept"]


class Route(Part):
    """How new cable will lie; every part of a request that names none takes the request's."""

    cable: Text = ask("new cable", help="A key of the cable catalogue.", default="ft_2_5")
    method: InstallMethod | None = ask("new cable lies")
    insulated_mm: float = ask("length inside insulation", quantity="depth_mm", default=0.0, ge=0, le=5000)
    grouped_n: int = ask("circuits bunched together", quantity="count", default=1, ge=1, le=20)
    ambient_c: float = ask("warmest air along it", quantity="temp_c", default=30.0, ge=-20, le=80)
    hidden: Literal["surface", "in_zone", "off_zone", "deep", "protected"] | None = ask(
        "new cable is", help="In a safe zone, off it, over 50 mm deep, protected, or on the surface."
    )
    metal_partition: YesNo | None = ask("wall has metal parts")
    cutting: Literal["nothing", "checked", "not_checked"] | None = ask(
        "drilling or cutting", help="Both faces looked over for cables and pipes."
    )


class NewOutlet(Part):
    """One new outlet or appliance. Its id is permanent: after-work readings belong to it.

    ``metres`` is the cable to it from the outlet before it, or from the place of attachment for the first [m].
    """

    id: Id
    kind: PointKind = ask("what is added", default="twin")
    name: Text = ask("name", default="new outlet")
    metres: float = ask("metres of cable to it", quantity="length_m", default=0.0, ge=0, le=1000)
    load_a: float | None = ask("load", quantity="load_a", ge=0, le=100, optional=True)
    lasting: bool = True
    where: Literal["indoors", "kitchen", "outdoors", "bathroom", "outbuilding"] | None = ask("place")
    zone_distance_m: float | None = ask(
        "metres from bath or shower zone 1", quantity="length_m", ge=0, le=100, optional=True
    )
    load_has_dc: RcdType | None = ask("RCD type its load needs")
    heating_or_cooking: YesNo | None = ask("heating, immersion, cooking or vehicle charging")


Cure = Literal[
    "rcbo_30_type_a",
    "rcd_ahead",
    "bs7288_departure",
    "bonding_upgrade",
    "breaker_change",
    "joint_box",
    "fcu_first",
    "identify_spur",
    "maintenance_free_joint",
    "safe_isolation",
    "arc_fault_device",
]
"""A cure that is part of the proposed work: it turns a stop into a condition, to be done before energising."""


class Choice(Part):
    """A choice inside a way, such as leaving the old link in."""

    key: Literal["old_link", "box", "loop", "open_run", "fuse", "rcd", "joint", "new_in_a", "way_free", "split_run"]
    value: Text


class Request(Row):
    """Outlets wanted at a place; the way is chosen later.

    ``attach`` says where: at a point, between two neighbours (``at`` and ``other``), at the board, or at the
    radial's end. ``back_metres`` is the return cable where a ring way needs one [m]; None takes the outward length.
    """

    circuit: Id
    attach: Attachment = "point"
    at: Id | None = None
    other: Id | None = None
    outlets: tuple[NewOutlet, ...] = ()
    back_metres: float | None = ask("metres back to the ring", quantity="length_m", ge=0, le=1000, optional=True)
    route: Route = Route()
    swap: Id | None = None
    moved_to_m: float | None = None
    fuse_a: float | None = ask("fuse in the unit", quantity="rating_a", gt=0, le=13, optional=True)
    cures: tuple[Cure, ...] = ()
    chosen_way: WayKey | None = None
    choices: tuple[Choice, ...] = ()
    work_begun_at: Moment | None = None
    work_done_at: Moment | None = None
    abandoned_at: Moment | None = None

    def choice(self, key: str, default: str) -> str:
        """The value chosen for ``key``, or ``default`` where nothing was chosen."""
        for choice in self.choices:
            if choice.key == key:
                return choice.value
        return default


class Override(Row):
    """A designer's recorded decision on one finding, bound to the figures it was made on."""

    request: Id
    rule: Text
    place: Id
    rule_set: Text
    figures: Text
    by: Id
    reason: LongText
    at: Moment


class KeptFinding(Part):
    """One finding as it stood when a verdict was kept."""

    rule: Text
    place: Text
    outcome: Text
    measured: float | None = None
    limit: float | None = None
    unit: Text = ""


class VerdictKept(Row):
    """A verdict as it stood at a moment that matters."""

    request: Id
    way: Text = ""
    at: Moment
    why: Literal["work_begins", "record", "kept"]
    rule_set: Text
    edition: Text
    figures: Text
    outcome: Text
    findings: tuple[KeptFinding, ...] = ()
