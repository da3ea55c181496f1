"""The installation before the circuit: site, people, instruments, supply, boards and devices."""

from __future__ import annotations

from typing import Literal

from pydantic import BaseModel, ConfigDict

from fieldtool.job.kinds import (
    BondPart,
    Condition,
    Earthing,
    Nation,
    PremisesKind,
    RcdDelay,
    RcdType,
    SourceKind,
    Tenure,
    YesNo,
)
from fieldtool.job.rows import LongText, Moment, Row, Text, ask

__all__ = ["Board", "Bond", "Device", "Instrument", "OtherSource", "Part", "Person", "Rcd", "Site", "Supply"]


class Part(BaseModel):
    """A piece of a row that has no id of its own."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", allow_inf_nan=False)


class Site(Row):
    """Where the visit is, and for whom. Customer fields can be left out of any export."""

    id: Literal["site"] = "site"
    name: Text = ask("job name", default="")
    invented: bool = False
    customer: Text = ask("customer", default="")
    contact: Text = ask("contact", default="")
    address: LongText = ask("address", default="")
    nation: Nation | None = ask("nation", help="Decides which work must be notified; ask once.")
    tenure: Tenure | None = ask("tenure", help="A landlord needs a record of remedial work.")
    premises: PremisesKind | None = ask("kind of premises", help="Some kinds require arc fault detection.")
    special_place: YesNo | None = ask(
        "bath, pool, boat, caravan, medical or farm nearby", help="Those places are outside this tool."
    )
    asbestos: YesNo | None = ask(
        "asbestos suspected at the board or where you will drill", help="If so: do not open, do not drill."
    )


class Person(Row):
    """Somebody who enters, allows or supervises."""

    name: Text
    role: Literal["electrician", "supervisor", "designer", "occupier", "other"] = "electrician"


class Instrument(Row):
    """A meter, tester or proving unit, with its own accuracy where it is known."""

    kind: Literal["multifunction", "low_ohm", "two_pole_tester", "proving_unit", "clamp", "other"]
    name: Text
    serial: Text = ""
    calibrated_on: Moment | None = None
    gain_percent: float = ask("accuracy, % of reading", quantity="percent", default=2.0, ge=0, le=50)
    digits: float = ask("accuracy, digits", quantity="count", default=2.0, ge=0, le=50)
    no_trip_ohm: float = ask("no-trip loop error", quantity="loop_ohm", default=0.3, ge=0, le=5)
    lead_null_ohm: float | None = ask("lead resistance nulled", quantity="low_ohm", ge=0, le=5, optional=True)
    low_ohm_checked_at: Moment | None = None


class Bond(Part):
    """Main bonding to one extraneous part."""

    part: BondPart
    size_mm2: float | None = None
    condition: Literal["sound", "absent", "damaged", "not_needed", "not_seen"]


class OtherSource(Part):
    """Another source of supply, which stays live when the main switch is off."""

    kind: SourceKind
    isolated_by: Text = ""
    feeds_back: YesNo | None = None
    note: LongText = ""


class Supply(Row):
    """The supply at the origin. Measured values (Ze, fault current) are readings, never fields."""

    id: Literal["supply"] = "supply"
    system: Earthing | None = ask("earthing system", help="Seen at the cut-out, not guessed from the area.")
    phases: Literal[1, 3] | None = ask("phases")
    u0_v: float = ask("voltage to earth", quantity="volts", default=230.0, gt=0, le=400)
    cutout_condition: Condition | None = ask(
        "cut-out by eye", help="Hot, cracked, leaking: stop, call the distributor."
    )
    main_fuse_a: float | None = ask("main fuse", quantity="rating_a", gt=0, le=800, optional=True)
    looped: YesNo | None = ask("looped to a neighbour", help="Two houses on one cut-out limit the load.", optional=True)
    max_demand_a: float | None = ask("maximum demand", quantity="load_a", ge=0, le=2000, optional=True)
    tails_mm2: float | None = ask("meter tails", quantity="area_mm2", gt=0, le=300, optional=True)
    supply_neutral_mm2: float | None = ask("supply neutral", quantity="area_mm2", gt=0, le=300, optional=True)
    earthing_conductor: Literal["sound", "absent", "damaged"] | None = ask("earthing conductor")
    earthing_conductor_mm2: float | None = ask("earthing conductor size", quantity="area_mm2", gt=0, le=300)
    bonding: Literal["seen", "not_needed", "not_seen"] | None = ask(
        "main bonding", help="'Not needed' means measured: no extraneous part comes in."
    )
    bonds: tuple[Bond, ...] = ()
    sources: Literal["none", "some"] | None = ask(
        "other sources of supply", help="Panels, battery, generator, vehicle."
    )
    other_sources: tuple[OtherSource, ...] = ()


class Rcd(Part):
    """A residual current device that covers a circuit."""

    type: RcdType
    i_dn_ma: float
    delay: RcdDelay = "none"
    standard: Literal["61008", "61009", "4293", "7288", "unknown"] = "unknown"
    place: Literal["circuit", "upstream", "outlet"] = "circuit"
    upstream_i_dn_ma: float | None = None
    upstream_delay: RcdDelay | None = None


class Device(Part):
    """The device that protects a circuit. ``type`` is a key of the device catalogue."""

    type: Text
    in_a: float
    breaking_ka: float | None = None
    energy_class: Literal[1, 2, 3] | None = None
    poles: Literal[1, 2] | None = None
    bidirectional: YesNo | None = None
    let_through_a2s: float | None = None
    condition: Condition | None = None


class Board(Row):
    """One distribution board or consumer unit."""

    name: Text = ask("board name", default="board")
    maker_note: Text = ask("maker and model as marked", default="")
    fed_from: Text = ask("fed from", default="")
    main_switch: Literal["all_poles", "line_only", "none"] | None = ask("main switch cuts")
    lockable: YesNo | None = ask("can be locked off", optional=True)
    conditional_rating_ka: float | None = ask("conditional rating", quantity="breaking_ka", gt=0, le=100, optional=True)
    spare_ways: int | None = ask("spare ways", quantity="count", ge=0, le=96, optional=True)
    condition: Condition | None = ask("board by eye", help="Signs of heat stop the job until explained.")
    mixed_makes: YesNo | None = ask("devices of other makers fitted", optional=True)
