"""Rules of the supply and the board: before anything is added, what it hangs on must bear it."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.reference.look import bond_mm2, constant, usual_ze
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.say import advise, breaks, holds, on_condition

BOARD = "board"


def _adds(facts: Facts) -> bool:
    return facts.edit is not None and facts.edit.role != "none"


@rule(
    "earthing_present",
    "411.3.1.1",
    "An earthing conductor that is there and sound, before any addition.",
    needs=("supply.system", "supply.earthing_conductor"),
)
def earthing_present(facts: Facts) -> Iterable[Finding]:
    """No addition to an installation without a sound earth (132.16, 542.1)."""
    seen = facts.job.supply.earthing_conductor
    if seen == "sound":
        yield holds(BOARD, "Earthing conductor seen and sound.")
    else:
        yield breaks(BOARD, f"Earthing conductor {seen}: nothing is added.", "Have the earthing put right first.")


@rule(
    "earthing_conductor_size",
    "542.3.1",
    "An earthing conductor large enough for the supply, where the neutral is also earth.",
    needs=("supply.system", "supply.earthing_conductor_mm2"),
    applies=lambda facts: facts.job.supply.system == "tn_c_s" and facts.job.supply.supply_neutral_mm2 is not None,
)
def earthing_conductor_size(facts: Facts) -> Iterable[Finding]:
    """On PME the earthing conductor is at least the bonding size (542.3.1, 544.1.1)."""
    supply = facts.job.supply
    least = bond_mm2(supply.supply_neutral_mm2 or 0.0)
    size = supply.earthing_conductor_mm2 or 0.0
    more = {"measured": size, "limit": least.value, "unit": "mm2", "origin": "declared"}
    if size >= least.value:
        yield holds(BOARD, f"Earthing conductor {size:g} mm², least {least.value:g}.", **more)
    else:
        yield on_condition(
            BOARD,
            f"Earthing conductor {size:g} mm², least {least.value:g}.",
            f"Replace the earthing conductor with {least.value:g} mm² or more before energising.",
            **more,
        )


@rule(
    "bonding_adequate",
    "544.1.1",
    "Main bonding to every extraneous part, of the size the supply calls for.",
    needs=("supply.system", "supply.bonding"),
)
def bonding_adequate(facts: Facts) -> Iterable[Finding]:
    """Absent or damaged bonding stops; sound but undersized is a condition before energising (411.3.1.2)."""
    supply = facts.job.supply
    if supply.bonding == "not_needed":
        yield holds(BOARD, "No bonding needed: no extraneous part, by measurement.")
        return
    if supply.bonding == "not_seen":
        yield breaks(BOARD, "Main bonding not seen.", "Find the bonds, or measure that none is needed.")
        return
    least = _least_bond(facts)
    if not supply.bonds:
        yield breaks(BOARD, "Main bonding said to be seen, but no bond is entered.", "Enter each bond and its size.")
    for bond in supply.bonds:
        name = f"Bond to {bond.part}"
        if bond.condition in ("absent", "damaged"):
            cure = "bonding_upgrade" in (facts.request.cures if facts.request is not None else ())
            do = f"Put a sound {least:g} mm² bond to {bond.part} before energising."
            maker = on_condition if cure else breaks
            yield maker(BOARD, f"{name}: {bond.condition}.", do, cures=("bonding_upgrade",))
        elif bond.condition == "not_seen":
            yield breaks(BOARD, f"{name}: not seen.", "Find it, or measure that it is not needed.")
        elif bond.condition == "sound" and bond.size_mm2 is not None and bond.size_mm2 < least:
            yield on_condition(
                BOARD,
                f"{name}: {bond.size_mm2:g} mm², least {least:g}.",
                f"Replace the bond to {bond.part} with {least:g} mm² before energising.",
                measured=bond.size_mm2,
                limit=least,
                unit="mm2",
            )
        elif bond.condition == "sound" and bond.size_mm2 is None:
            yield on_condition(BOARD, f"{name}: size not seen.", f"See the size of the bond to {bond.part}.")
        else:
            yield holds(BOARD, f"{name}: {bond.condition.replace('_', ' ')}.", limit=least, unit="mm2")


def _least_bond(facts: Facts) -> float:
    supply = facts.job.supply
    if supply.system == "tn_c_s":
        return bond_mm2(supply.supply_neutral_mm2 or 25.0).value
    half = (supply.earthing_conductor_mm2 or 16.0) / 2
    least, most = constant("bonding.least_mm2").value, constant("bonding.most_mm2").value
    return min(most, max(least, half))


@rule(
    "cutout_condition",
    "132.16",
    "A cut-out that shows no heat, crack or leak.",
    needs=("supply.cutout_condition",),
)
def cutout_condition(facts: Facts) -> Iterable[Finding]:
    """A hot, cracked or leaking cut-out is the distributor's to put right, at once."""
    state = facts.job.supply.cutout_condition
    if state in ("heat", "damaged"):
        yield breaks(BOARD, f"Cut-out: {state}. Hands off.", "Call the distributor; touch nothing there.")
    elif state == "obsolete":
        yield on_condition(BOARD, "Cut-out is of an old kind.", "Tell the client in writing; ask the distributor.")
    else:
        yield holds(BOARD, f"Cut-out by eye: {state}.")


@rule(
    "ze_plausible",
    "643.7.3",
    "An origin loop that the earthing system could give.",
    needs=("supply.system", "read.ze"),
)
def ze_plausible(facts: Facts) -> Iterable[Finding]:
    """Above what is usually declared is a question; far above it, for the system, is looked into before work."""
    system = facts.job.supply.system or ""
    usual, question = usual_ze(system)
    reading = facts.read("ze")
    if reading.value is None:
        yield breaks(BOARD, "Ze reads open: there is no earth.", "Have the earthing put right first.")
        return
    value = reading.value
    more = {"measured": value, "limit": question.value, "unit": "ohm", "origin": "measured"}
    if system == "tt" or value <= question.value:
        word = "as usual" if value <= usual.value or system == "tt" else "above the usual, within the newer figures"
        yield holds(BOARD, f"Ze {value:g} Ω, {word}.", **more)
    else:
        yield on_condition(
            BOARD,
            f"Ze {value:g} Ω is high for {system.replace('_', '-').upper()}: over {question.value:g}.",
            "Ask the distributor for the declared Ze, and take Ze again.",
            **more,
        )


@rule(
    "breaking_capacity",
    "434.5.1",
    "A device that can break the fault current at its place.",
    needs=("device", "device.breaking_ka", "read.pfc"),
)
def breaking_capacity(facts: Facts) -> Iterable[Finding]:
    """The device alone, or with a proven back-up: a board's conditional rating with the cut-out ahead of it."""
    device = facts.device
    shown = facts.pfc_a
    own = (device.breaking_ka or 0.0) * 1000
    name = facts.device_type.words
    line = (f"fault current {shown:.0f} A against {own:.0f} A of the {name}",)
    more = {"measured": shown, "limit": own, "unit": "A", "working": line}
    if shown <= own:
        yield holds(BOARD, f"Breaks {own / 1000:g} kA, fault current {shown / 1000:.2f} kA.", **more)
        return
    rating = (facts.board.conditional_rating_ka or 0.0) * 1000
    fuse = facts.job.supply.main_fuse_a
    modern = device.type.startswith(("bs60898", "bs61009")) and facts.board.mixed_makes == "no"
    if shown <= rating and fuse is not None and fuse <= 100 and modern:
        yield on_condition(
            BOARD,
            f"Breaks {own / 1000:g} kA; the board's {rating / 1000:g} kA counts with its own cut-out.",
            "See that the cut-out fuse is BS 88-3 or BS 1361 to 100 A and every device the board maker's own.",
            **more,
        )
    else:
        yield breaks(
            BOARD,
            f"Fault current {shown / 1000:.2f} kA is over the device's {own / 1000:g} kA.",
            "A device or board rated for the fault current comes first.",
            **more,
        )


@rule(
    "sources_known",
    "551.7.2",
    "Every other source of supply known, and devices that suit current both ways.",
    needs=("supply.sources",),
)
def sources_known(facts: Facts) -> Iterable[Finding]:
    """A source that can feed back needs devices for both directions (530.3.201)."""
    supply = facts.job.supply
    if supply.sources == "none":
        yield holds(BOARD, "No other source of supply.")
        return
    if not supply.other_sources:
        yield breaks(BOARD, "Another source is said to be there, but none is named.", "Name it and how it is isolated.")
    for source in supply.other_sources:
        name = source.kind.replace("_", " ")
        if source.feeds_back is None:
            yield breaks(BOARD, f"{name}: not known whether it feeds back.", "Find out before anything is isolated.")
        elif not source.isolated_by:
            yield breaks(
                BOARD, f"{name}: not known how it is isolated.", "Find its isolator; it stays live without it."
            )
        elif source.feeds_back == "yes" and facts.circuit.device is not None and facts.device.bidirectional != "yes":
            yield on_condition(
                BOARD,
                f"{name} feeds back: the device may be for one direction only.",
                "See the maker's marking; fit a device for current both ways where it needs one.",
                clause="530.3.201",
            )
        else:
            yield holds(BOARD, f"{name}: isolated by {source.isolated_by}.")


@rule(
    "spare_way",
    "132.16",
    "A spare way where a new device is needed.",
    needs=("board.spare_ways",),
    applies=lambda facts: facts.edit is not None and facts.edit.needs_way,
)
def spare_way(facts: Facts) -> Iterable[Finding]:
    """No way free, no new device."""
    ways = facts.board.spare_ways or 0
    if ways >= 1:
        yield holds(BOARD, f"{ways} spare way{'s' if ways > 1 else ''}.", measured=float(ways), limit=1.0)
    else:
        yield breaks(BOARD, "No way is free for a new device.", "Choose a way of adding without one.", limit=1.0)


@rule(
    "supply_can_carry_it",
    "311.1",
    "A supply that can carry the whole installation with the addition.",
    needs=("supply.main_fuse_a", "supply.max_demand_a", "supply.looped"),
    applies=lambda facts: (
        facts.edit is not None and (facts.edit.own_circuit or any((item.load_a or 0.0) > 13 for item in facts.outlets))
    ),
)
def supply_can_carry_it(facts: Facts) -> Iterable[Finding]:
    """Maximum demand with the new load against the main fuse; a looped supply is the distributor's to judge."""
    supply = facts.job.supply
    new = sum(item.load_a or constant("ring.far_load_a").value for item in facts.outlets)
    total = (supply.max_demand_a or 0.0) + new
    fuse = supply.main_fuse_a or 0.0
    line = (f"demand {supply.max_demand_a:g} + {new:g} = {total:g} A against {fuse:g} A",)
    more = {"measured": total, "limit": fuse, "unit": "A", "working": line}
    if total > fuse:
        yield breaks(
            BOARD, f"Demand {total:g} A is over the main fuse {fuse:g} A.", "Ask the distributor first.", **more
        )
    elif supply.looped == "yes":
        yield on_condition(BOARD, "Looped supply: two houses on one cut-out.", "Ask the distributor first.", **more)
    else:
        yield holds(BOARD, f"Demand {total:g} A of {fuse:g} A.", **more)


@rule(
    "fault_current_agrees",
    "643.7.3",
    "A fault current that agrees with the loop it was read on.",
    needs=("read.pfc", "read.ze"),
    advice=True,
)
def fault_current_agrees(facts: Facts) -> Iterable[Finding]:
    """PFC is at least U0 / Ze: the earth loop cannot carry more than the larger of the two."""
    shown, origin = facts.read("pfc"), facts.read("ze")
    if not origin.value or shown.value is None:
        return
    least = facts.job.supply.u0_v / (origin.value + facts.tol(origin)) * 0.95
    if shown.value + facts.tol(shown) < least:
        yield advise(
            BOARD,
            f"Fault current {shown.value / 1000:.2f} kA is less than Ze implies: {least / 1000:.2f} kA.",
            "Take both again; the larger was used.",
        )
    else:
        yield holds(BOARD, "Fault current and Ze agree.")
