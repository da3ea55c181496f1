"""What is said of each explanation: one sentence of at most 74 cells, and the test that would settle it."""

from __future__ import annotations

from fieldtool.answers import Settle

__all__ = ["ALIKE", "SETTLE", "settle_by"]

SETTLE: dict[str, tuple[str, str]] = {
    "ends_joined_wrongly": ("ln_cross", "Swap the two pairs at the board and read the first point again."),
    "one_join_left_off": ("ln_cross", "Look at both joins at the board, then read the first point again."),
    "leads_not_nulled": ("r1", "Null the leads and read r1 again."),
    "bridged_ring": ("r1", "Part one leg inside the loop and read end to end again."),
    "ring_with_spurs": ("le_cross", "Open the box it hangs on: count its cables, part the spur, read again."),
    "spur_from_spur": ("le_cross", "Open the nearer of the two boxes: does the farther one start there?"),
    "open_line": ("le_cross", "L-E crossed at each point: the lowest pair is beside the break. Then halve."),
    "open_neutral": ("rn", "Part at mid ring and read rn of each half."),
    "open_cpc": ("r2", "Part at mid ring and read r2 of each half."),
    "open_several": ("r1", "Line of one leg to neutral of the other: closed means two wires changed over."),
    "joint_line": ("r1", "Part at mid ring and read r1 of each half; look at the cable's size."),
    "joint_neutral": ("rn", "Part at mid ring and read rn of each half; look at the cable's size."),
    "joint_cpc": ("r2", "Look at the earth's size first, then halve the ring and read r2."),
    "size_cpc": ("r2", "Look at the cable: what size is its earth? Then halve the ring and read r2."),
    "mixed_sizes": ("r2", "Look at the cable at both legs: is the earth of one size all round?"),
    "not_a_ring": ("legs", "Read between the legs of this way and of the others: it may sit in two."),
    "ring_in_two_ways": ("legs", "Both ways off: read each leg of this way to the legs of the others."),
    "crossed_rings": ("legs", "Match every leg of both ways by measurement."),
    "leg_not_connected": ("legs", "Count and tug L, N and E at the way and the bars; then read Zs again."),
    "high_loop": ("zs", "Read Zs again, high-current, at the terminals."),
    "no_trip_mode": ("zs", "Read Zs again with the high-current test."),
    "parallel_earth_path": ("r1_r2", "R1+R2 with metalwork disconnected; the lower Zs is not counted."),
    "cpc_off_bar": ("cpc_to_met", "Read from this circuit's earth to the main earthing terminal."),
    "neutral_earth_contact": ("ir_ne", "Part the neutral and read IR N-E again at the far end."),
    "line_earth_contact": ("ir_le", "Everything unplugged, read IR L-E of each half."),
    "shared_neutral": ("ir_neutrals", "Clamp the neutral against the line; read IR to the other neutrals."),
    "appliance_left_in": ("ir_ln", "Unplug everything, switch fused units off, and read IR L-N again."),
    "worn_contact": ("le_cross", "Read that point again at its terminals."),
    "one_reading_off": ("le_cross", "Read that one again."),
    "end_slip": ("r1", "Read end to end again: are the clips on the right wires?"),
    "figures_calculated": ("le_cross", "Measure again: every point, each with its own figure."),
    "line_neutral_swapped": ("le_cross", "Open that point: which wire is where? Probe L-E crossed again."),
    "line_earth_swapped": ("polarity", "Do not energise. Open that point: which wire is where?"),
    "neutral_earth_swapped": ("ln_cross", "Open that point: which wire is where?"),
    "too_good": ("r1", "Part the clips, see that the meter reads open, then read end to end again."),
    "nothing_fits": ("r1", "Null the leads on a low-resistance ohmmeter and repeat steps 1 to 3."),
    "radial": ("legs", "Prove the legs at the way: no second end."),
}
"""The test, and the words, that would settle an explanation."""

ALIKE: dict[str, tuple[tuple[str, str], ...]] = {
    "open_several": (("swapped_inside_cable", "Two wires of one cable changed over inside the ring: never energise."),),
    "joint_line": (("size_line", "A length of smaller line in the ring."),),
    "joint_neutral": (("size_neutral", "A length of smaller neutral in the ring."),),
    "not_a_ring": (
        ("two_radials", "Two radials on one way."),
        ("open_all", "A ring open in all three in one run."),
        ("ring_in_two_ways", "One ring with its legs in two ways: live until both are off."),
        ("crossed_rings", "Two rings with their legs crossed."),
    ),
    "ring_with_spurs": (("spur_from_spur", "One of these spurs hanging on another."),),
    "worn_contact": (("joint_at_point", "A bad joint in one wire at that point or in its spur."),),
    "one_reading_off": (("joint_at_point", "A bad joint in one wire at that point or in its spur."),),
    "line_neutral_swapped": (("no_earth_at_point", "No earth at that point."),),
    "neutral_earth_swapped": (("line_open_at_point", "The line does not reach that point."),),
    "high_loop": (("loop_outside", "A joint outside this circuit: then all circuits read high."),),
}
"""What reads just like an explanation, with its words."""


def settle_by(key: str, place: str) -> Settle | None:
    """The settling test of an explanation at a place."""
    if key not in SETTLE:
        return None
    test, sentence = SETTLE[key]
    return Settle(test, place, sentence)
