"""The closed lists of the job model, and the words a person reads for each member."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

__all__ = [
    "TESTS",
    "AnswerWord",
    "Attachment",
    "BondPart",
    "CircuitClaim",
    "Condition",
    "Earthing",
    "InstallMethod",
    "IsolationKind",
    "Mode",
    "Nation",
    "PartedSort",
    "PointKind",
    "PremisesKind",
    "Probes",
    "RcdDelay",
    "RcdType",
    "ReadingOrigin",
    "Sign",
    "SourceKind",
    "Stage",
    "Tenure",
    "TestKey",
    "TestSpec",
    "WayKey",
    "YesNo",
    "members",
    "words",
]

YesNo = Literal["yes", "no"]
Earthing = Literal["tn_s", "tn_c_s", "tt"]
SourceKind = Literal["pv", "battery", "generator", "vehicle", "second_supply", "ups", "other"]
BondPart = Literal["water", "gas", "oil", "steel", "other"]
Condition = Literal["good", "worn", "obsolete", "damaged", "heat"]
RcdType = Literal["ac", "a", "f", "b", "unknown"]
RcdDelay = Literal["none", "s"]
CircuitClaim = Literal["ring", "radial", "none"]
PointKind = Literal["single", "twin", "fcu", "appliance", "joint", "blank"]
InstallMethod = Literal["c", "a", "b", "100", "101", "102", "103"]
Stage = Literal["as_found", "after_work"]
Sign = Literal["=", ">", "<", "open"]
Mode = Literal["high_current", "no_trip", "enquiry", "calculated"]
Probes = Literal["front", "terminals", "adaptor"]
ReadingOrigin = Literal["measured", "calculated", "limitation"]
AnswerWord = Literal["right", "wrong"]
Nation = Literal["england", "wales", "scotland", "northern_ireland"]
Tenure = Literal["owner", "private_rent", "social_rent", "business"]
PremisesKind = Literal["dwelling", "hmo", "high_rise", "student", "care", "shop_office", "workshop", "special"]
PartedSort = Literal["parted", "joined"]
IsolationKind = Literal[
    "survey_eye",
    "metalwork_checked",
    "permission",
    "identified",
    "off",
    "main_switch_off",
    "locked",
    "sources_isolated",
    "neutral_clamped",
    "tester_proved_before",
    "dead_tested",
    "tester_proved_after",
    "cover_off",
    "cover_on",
    "origin_permission",
    "origin_test_begins",
    "origin_test_ends",
    "unlocked",
    "restored",
    "left_site",
    "opened",
    "other_circuit",
    "stopped",
    "struck",
    "abandoned",
    "handed_over",
]
Attachment = Literal["point", "between", "board", "end"]
WayKey = Literal[
    "spur_at_point",
    "spur_at_joint_box",
    "spur_at_board",
    "fused_spur",
    "ring_between",
    "ring_at_point",
    "radial_end",
    "radial_branch",
    "second_leg",
    "ring_to_radial",
    "ring_to_two",
    "single_to_twin",
    "fixed_appliance",
    "new_circuit",
    "outlet_moved",
    "beyond_fcu",
    "heavy_branch",
    "leave_it",
]
TestKey = Literal[
    "ze",
    "zdb",
    "pfc",
    "ra",
    "r1",
    "rn",
    "r2",
    "ln_cross",
    "le_cross",
    "r1_r2",
    "r1_rn",
    "ir_ln",
    "ir_le",
    "ir_ne",
    "ir_live_e",
    "ir_neutrals",
    "polarity",
    "zs",
    "zln",
    "rcd_ms",
    "rcd_button",
    "leakage",
    "cpc_to_met",
    "function",
    "legs",
]


@dataclass(frozen=True, slots=True)
class TestSpec:
    """One test: where it is taken, in which state, and the quantity its reading has.

    ``field`` is a key of the quantities' fields; None means it is answered right or wrong.
    ``where`` is ``board`` (the board itself), ``circuit`` (at the board, one circuit) or ``point``.
    """

    key: TestKey
    words: str
    short: str
    field: str | None
    where: Literal["board", "circuit", "point"]
    state: Literal["dead", "live", "origin"]


TESTS: dict[TestKey, TestSpec] = {
    spec.key: spec
    for spec in (
        TestSpec("ze", "Ze at the origin", "Ze", "loop_ohm", "board", "origin"),
        TestSpec("pfc", "prospective fault current", "PFC kA", "fault_a", "board", "origin"),
        TestSpec("ra", "earth electrode resistance", "RA", "electrode_ohm", "board", "origin"),
        TestSpec("zdb", "loop at this board", "Zdb", "loop_ohm", "board", "live"),
        TestSpec("legs", "legs proved by measurement", "legs", None, "circuit", "dead"),
        TestSpec("r1", "line end to end", "r1", "low_ohm", "circuit", "dead"),
        TestSpec("rn", "neutral end to end", "rn", "low_ohm", "circuit", "dead"),
        TestSpec("r2", "cpc end to end", "r2", "low_ohm", "circuit", "dead"),
        TestSpec("ln_cross", "L-N crossed", "L-N X", "low_ohm", "point", "dead"),
        TestSpec("le_cross", "L-E crossed", "L-E X", "low_ohm", "point", "dead"),
        TestSpec("r1_r2", "R1+R2", "R1+R2", "low_ohm", "point", "dead"),
        TestSpec("r1_rn", "R1+Rn", "R1+Rn", "low_ohm", "point", "dead"),
        TestSpec("ir_ln", "IR L-N", "IR L-N", "insulation_ohm", "circuit", "dead"),
        TestSpec("ir_le", "IR L-E", "IR L-E", "insulation_ohm", "circuit", "dead"),
        TestSpec("ir_ne", "IR N-E", "IR N-E", "insulation_ohm", "circuit", "dead"),
        TestSpec("ir_live_e", "IR L+N to E at 250 V", "IR LN-E", "insulation_ohm", "circuit", "dead"),
        TestSpec("ir_neutrals", "IR neutral to other neutrals", "IR N-N", "insulation_ohm", "circuit", "dead"),
        TestSpec("cpc_to_met", "cpc to the main earthing terminal", "cpc-MET", "low_ohm", "circuit", "dead"),
        TestSpec("polarity", "polarity", "polar.", None, "circuit", "dead"),
        TestSpec("zs", "Zs", "Zs", "loop_ohm", "point", "live"),
        TestSpec("zln", "line-neutral loop", "Z L-N", "loop_ohm", "point", "live"),
        TestSpec("rcd_ms", "RCD trip time at rated current", "RCD ms", "trip_ms", "circuit", "live"),
        TestSpec("rcd_button", "RCD test button", "button", None, "circuit", "live"),
        TestSpec("leakage", "standing leakage", "leak", "leakage_ma", "circuit", "live"),
        TestSpec("function", "function", "works", None, "circuit", "live"),
    )
}
"""Every test the tool knows, in the order a visit usually takes them (common practice; 643.1)."""

_WORDS: dict[str, str] = {
    "tn_s": "TN-S",
    "tn_c_s": "TN-C-S",
    "tt": "TT",
    "pv": "solar panels",
    "ups": "UPS",
    "second_supply": "second supply",
    "ac": "AC",
    "a": "A",
    "f": "F",
    "b": "B",
    "s": "S (time-delayed)",
    "fcu": "fused connection unit",
    "joint": "joint box",
    "blank": "blanked box",
    "hmo": "house in multiple occupation",
    "high_rise": "high-rise residential building",
    "student": "student housing",
    "care": "care home",
    "shop_office": "shop or office",
    "special": "special place (bath, pool, boat, medical)",
    "heat": "signs of heat",
    "as_found": "as found",
    "after_work": "after work",
    "spur_at_point": "unfused spur from a point",
    "spur_at_joint_box": "unfused spur from a joint box in a leg",
    "spur_at_board": "spur from the board",
    "fused_spur": "fused spur",
    "ring_between": "ring longer between two points",
    "ring_at_point": "ring longer at one point",
    "radial_end": "radial longer from its last point",
    "radial_branch": "branch off the radial",
    "second_leg": "second radial leg from the same way",
    "ring_to_radial": "ring made a 20 A radial",
    "ring_to_two": "ring parted into two radials",
    "single_to_twin": "single swapped for a twin",
    "fixed_appliance": "fixed appliance through its own FCU",
    "new_circuit": "new circuit",
    "outlet_moved": "outlet moved",
    "beyond_fcu": "more outlets beyond an FCU",
    "heavy_branch": "4 mm² branch from a joint box",
    "leave_it": "leave it, advise",
    "survey_eye": "looked over before the cover comes off",
    "metalwork_checked": "outlet and metalwork checked for abnormal voltage",
    "permission": "allowed by, and who is affected",
    "identified": "circuit found",
    "main_switch_off": "main switch off",
    "locked": "locked, key kept, labelled",
    "sources_isolated": "other sources isolated",
    "neutral_clamped": "neutral clamped and proved",
    "tester_proved_before": "tester proved on a known source",
    "dead_tested": "dead between L-N, L-E, N-E",
    "tester_proved_after": "tester proved again",
    "no_trip": "no-trip",
    "high_current": "high current",
    "enquiry": "distributor's figure",
    "100": "above a plasterboard ceiling, insulation to 100 mm",
    "101": "above a plasterboard ceiling, insulation over 100 mm",
    "102": "in a stud wall, touching the inner face",
    "103": "in a stud wall, not touching",
    "c": "clipped or in plaster",
    "all_poles": "all poles",
    "line_only": "line only",
    "not_needed": "none needed",
    "off_zone": "off the zones",
    "in_zone": "in a safe zone",
    "deep": "over 50 mm deep",
    "mixed_colours": "old and new colours",
    "rcbo_30_type_a": "a 30 mA type A RCBO at the board",
    "bs7288_departure": "an outlet with an RCD in it, as a recorded departure",
    "fcu_first": "a fused unit first",
}


def members(alias: object) -> tuple[str, ...]:
    """The members of one of the Literal types above, in order."""
    return tuple(get_args(alias))


def words(key: str | None) -> str:
    """The words a person reads for a member of any list here; a test's own words; else the key with spaces."""
    if key is None:
        return "not known"
    if key in TESTS:
        return TESTS[key].words
    return _WORDS.get(key, key.replace("_", " "))
