"""The faults: each draws a sound circuit, changes one thing, and says what a right answer may call it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from tests.simulator.draw import OHM_PER_M, Drawn, sound, take


@dataclass(frozen=True)
class Fault:
    """A fault, the ids that name its class, how it is drawn, and what else is true of such a circuit."""

    key: str
    names: frozenset[str]
    draw: Callable[[str, int | None], Drawn]
    true_too: frozenset[str] = frozenset()


FAULTS: dict[str, Fault] = {}

Change = Callable[[Drawn], None]


def fault(key: str, *names: str, true_too: str = "", **how: Any) -> Callable[[Change], Change]:
    """Put a fault in the catalogue; ``how`` goes to the drawing of the sound circuit."""

    def keep(change: Change) -> Change:
        def draw(seed: str, points: int | None = None) -> Drawn:
            exactly = {} if points is None else {"least": points, "most": points}
            drawn = sound(key, f"{key} {seed}", **how | exactly)
            change(drawn)
            return take(drawn)

        FAULTS[key] = Fault(key, frozenset(names), draw, frozenset(true_too.split()))
        return change

    return keep


@fault("intact", "intact_ring")
def _intact(drawn: Drawn) -> None:
    """Nothing wrong."""


@fault("intact, walk not known", "intact_ring")
def _unordered(drawn: Drawn) -> None:
    drawn.ordered = False


@fault("intact, scatter 0.02", "intact_ring", scatter=0.02)
def _scattered(drawn: Drawn) -> None:
    """Nothing wrong but the contacts."""


def _spurs(drawn: Drawn, least: float, most: float) -> None:
    for parent in drawn.rng.sample(drawn.trunk, min(drawn.rng.randint(1, 3), len(drawn.trunk))):
        drawn.hang(parent, drawn.rng.uniform(least, most))


@fault("spurs of 3 to 10 m", "ring_with_spurs")
def _long_spurs(drawn: Drawn) -> None:
    _spurs(drawn, 3, 10)


@fault("spurs of 2 to 3 m", "ring_with_spurs")
def _short_spurs(drawn: Drawn) -> None:
    _spurs(drawn, 2, 3)


@fault("spurs, walk not known", "ring_with_spurs")
def _spurs_unordered(drawn: Drawn) -> None:
    drawn.ordered = False
    _spurs(drawn, 3, 10)


@fault("spur from a spur", "spur_from_spur", "ring_with_spurs")
def _spur_from_spur(drawn: Drawn) -> None:
    first = drawn.hang(drawn.rng.choice(drawn.trunk), drawn.rng.uniform(3, 7))
    second = drawn.hang(first, drawn.rng.uniform(3, 7))
    if drawn.rng.random() < 0.5:
        drawn.traced |= {first, second}


@fault("ends joined wrongly, step 2", "ends_joined_wrongly")
def _wrong_two(drawn: Drawn) -> None:
    drawn.joins_ln = "same"


@fault("ends joined wrongly, step 3", "ends_joined_wrongly")
def _wrong_three(drawn: Drawn) -> None:
    drawn.joins_le = "same"


@fault("ends joined wrongly, both", "ends_joined_wrongly")
def _wrong_both(drawn: Drawn) -> None:
    drawn.joins_ln = drawn.joins_le = "same"


@fault("one join off, step 2", "one_join_left_off")
def _off_two(drawn: Drawn) -> None:
    drawn.joins_ln = drawn.rng.choice(("one", "two"))


@fault("one join off, step 3", "one_join_left_off")
def _off_three(drawn: Drawn) -> None:
    drawn.joins_le = drawn.rng.choice(("one", "two"))


def _bridge(drawn: Drawn, inside: int) -> None:
    count = len(drawn.trunk)
    a = drawn.rng.randint(0, count - inside - 2)
    b = drawn.rng.randint(a + inside + 1, count - 1)
    drawn.lay(drawn.trunk[a], drawn.trunk[b], drawn.rng.uniform(2, 12))
    drawn.truth["bridge"] = (a, b)


@fault("bridge, 1 or more inside", "bridged_ring", least=5)
def _bridge_one(drawn: Drawn) -> None:
    _bridge(drawn, 1)


@fault("bridge, 3 or more inside", "bridged_ring", least=6)
def _bridge_three(drawn: Drawn) -> None:
    _bridge(drawn, 3)


@fault("bridge, 5 or more inside", "bridged_ring", least=8)
def _bridge_five(drawn: Drawn) -> None:
    _bridge(drawn, 5)


def _open(conductor: str) -> Change:
    def change(drawn: Drawn) -> None:
        run = drawn.rng.randrange(len(drawn.gaps))
        drawn.part(run, conductor)
        drawn.truth["run"] = run

    return change


fault("line open", "open_line")(_open("L"))
fault("neutral open", "open_neutral")(_open("N"))
fault("cpc open", "open_cpc")(_open("E"))


@fault("two conductors open", "open_several", "swapped_inside_cable")
def _two_open(drawn: Drawn) -> None:
    for conductor in drawn.rng.sample(["L", "N", "E"], 2):
        drawn.part(drawn.rng.randrange(len(drawn.gaps)), conductor)


@fault("all three open in one run", "not_a_ring", "open_all", "two_radials")
def _all_open(drawn: Drawn) -> None:
    run = drawn.rng.randrange(len(drawn.gaps))
    for conductor in "LNE":
        drawn.part(run, conductor)


def _joint(conductor: str) -> Change:
    def change(drawn: Drawn) -> None:
        run = drawn.rng.randrange(len(drawn.gaps))
        drawn.joint(run, conductor, drawn.rng.uniform(0.15, 2.0))
        drawn.truth["run"] = run

    return change


fault("joint in the line", "joint_line", "size_line")(_joint("L"))
fault("joint in the neutral", "joint_neutral", "size_neutral")(_joint("N"))
fault("joint in the cpc", "joint_cpc", "size_cpc", "mixed_sizes")(_joint("E"))


def _lay_again(drawn: Drawn, size_of: Callable[[str, int], float | None]) -> None:
    for index, gap in enumerate(drawn.gaps):
        a, b = drawn.run(index)
        for conductor in "LNE":
            size = size_of(conductor, index)
            if size is not None:
                edge = next(iter(drawn.wires[(conductor, a)][(conductor, b)].values()))
                edge["ohm"] = OHM_PER_M[size] * drawn.warm * gap


@fault("cpc of another size", "size_cpc", "joint_cpc", "mixed_sizes")
def _cpc_size(drawn: Drawn) -> None:
    said = "ft_2_5"
    drawn.survey["cable"] = said
    size = drawn.rng.choice((1.0, 2.5))
    _lay_again(drawn, lambda c, _: size if c == "E" else 2.5)


@fault("mixed sizes of cpc", "mixed_sizes", "size_cpc", "joint_cpc", least=5)
def _mixed(drawn: Drawn) -> None:
    drawn.survey["cable"] = "ft_2_5"
    half = len(drawn.gaps) // 2
    _lay_again(drawn, lambda c, run: (2.5 if run < half else 1.5) if c == "E" else 2.5)


@fault("two radials", "not_a_ring", "two_radials", "open_all")
def _two_radials(drawn: Drawn) -> None:
    run = drawn.rng.randrange(1, len(drawn.gaps) - 1)
    for conductor in "LNE":
        drawn.part(run, conductor)


@fault("ring in two ways", "ring_in_two_ways", "not_a_ring", "crossed_rings")
def _two_ways(drawn: Drawn) -> None:
    drawn.survey |= {"line_ends": 1, "neutral_ends": 2, "cpc_ends": 2}
    drawn.extra.append({"test": "legs", "point": None, "answer": "wrong"})
    drawn.service = [(("N", "A"), ("N", "B")), (("E", "A"), ("E", "B"))]
    drawn.tests = ("zs", "ir")


@fault("two rings, legs crossed", "crossed_rings", "not_a_ring", "ring_in_two_ways")
def _crossed(drawn: Drawn) -> None:
    drawn.wires.remove_edge(*_edge(drawn, "L"))
    drawn.wires.remove_edge(*_edge(drawn, "N"))
    drawn.wires.remove_edge(*_edge(drawn, "E"))
    drawn.extra.append({"test": "legs", "point": None, "answer": "wrong"})
    drawn.tests = ("ends", "ir")


def _edge(drawn: Drawn, conductor: str) -> tuple[tuple[str, str], tuple[str, str]]:
    a, b = drawn.run(len(drawn.gaps) - 1)
    return ((conductor, a), (conductor, b))


@fault("a leg never connected", "leg_not_connected", least=4)
def _leg_off(drawn: Drawn) -> None:
    drawn.service = []


@fault("line and neutral reversed at a point", "line_neutral_swapped")
def _l_n(drawn: Drawn) -> None:
    _swap(drawn, {"L": "N", "N": "L"})


@fault("line and cpc reversed at a point", "line_earth_swapped")
def _l_e(drawn: Drawn) -> None:
    _swap(drawn, {"L": "E", "E": "L"})


@fault("neutral and cpc interchanged at a point", "neutral_earth_swapped")
def _n_e(drawn: Drawn) -> None:
    _swap(drawn, {"N": "E", "E": "N"})


def _swap(drawn: Drawn, swap: dict[str, str]) -> None:
    point = drawn.rng.choice(drawn.trunk)
    drawn.swapped[point] = swap
    drawn.tests = ("ends", "ln_cross", "le_cross", "ir")
    drawn.truth["where"] = {point}


@fault("leads not nulled, all", "leads_not_nulled")
def _leads(drawn: Drawn) -> None:
    drawn.lead_ends = drawn.lead_points = drawn.rng.uniform(0.1, 0.3)


@fault("leads not nulled, steps 2 and 3", "leads_not_nulled")
def _leads_points(drawn: Drawn) -> None:
    drawn.lead_points = drawn.rng.uniform(0.08, 0.3)


@fault("parallel earth path", "parallel_earth_path", true_too="intact_ring")
def _parallel(drawn: Drawn) -> None:
    low = drawn.rng.uniform(0.02, 0.08)
    drawn.gaps = [gap * max(1.0, 40.0 / sum(drawn.gaps)) for gap in drawn.gaps]
    drawn.tests = ("ends", "ln_cross", "le_cross", "r1_r2", "zs", "ir")
    _lay_again(drawn, lambda c, _: drawn.sizes[1] if c == "E" else drawn.sizes[0])
    drawn.truth["parallel"] = dict.fromkeys(drawn.points, low)


@fault("joint in the loop", "high_loop")
def _loop(drawn: Drawn) -> None:
    drawn.zs_add = drawn.rng.uniform(0.4, 2.0)


@fault("no-trip readings", "no_trip_mode")
def _no_trip(drawn: Drawn) -> None:
    drawn.zs_mode, drawn.zs_add = "no_trip", drawn.rng.uniform(0.25, 0.5)


@fault("cpc ends joined, off the bar", "cpc_off_bar")
def _off_bar(drawn: Drawn) -> None:
    drawn.zs_add = drawn.rng.choice((200.0, 800.0, 5000.0))
    if drawn.rng.random() < 0.5:
        drawn.extra.append({"test": "cpc_to_met", "point": None, "sign": "open"})


@fault("neutral-earth contact", "neutral_earth_contact")
def _n_e_contact(drawn: Drawn) -> None:
    drawn.extra.append({"test": "ir_ne", "point": None, "value": drawn.rng.choice((0.0, 1e4, 5e4))})


@fault("shared neutral", "shared_neutral")
def _shared(drawn: Drawn) -> None:
    drawn.extra.append({"test": "ir_neutrals", "point": None, "value": drawn.rng.choice((0.0, 1e4))})


@fault("worn contact", "worn_contact")
def _worn(drawn: Drawn) -> None:
    point = drawn.rng.choice(drawn.trunk)
    drawn.truth["where"] = {point}
    worn = drawn.rng.uniform(0.15, 0.8)
    drawn.at_point[point] = {
        test: worn * drawn.rng.uniform(0.4, 1.6) for test in ("ln_cross", "le_cross", "r1_r2", "zs")
    }
    drawn.truth["again"] = point


@fault("appliance left in", "appliance_left_in")
def _appliance(drawn: Drawn) -> None:
    drawn.extra.append({"test": "ir_ln", "point": None, "value": drawn.rng.choice((0.0, 1e4, 1e5))})


@fault("figures calculated", "figures_calculated", least=6)
def _calculated(drawn: Drawn) -> None:
    drawn.tests = ("ends", "ir")
    drawn.truth["after"] = "calculated"


@fault("every figure unlikely", "nothing_fits", least=5)
def _rubbish(drawn: Drawn) -> None:
    drawn.truth["after"] = "rubbish"


def _after(drawn: Drawn) -> None:
    """Figures that were made at a desk, and figures that belong to no circuit."""
    ends = {row["test"]: row["value"] for row in drawn.readings if row["test"] in ("r1", "rn", "r2")}
    if drawn.truth.get("after") == "calculated":
        ln, le = round((ends["r1"] + ends["rn"]) / 4, 2), round((ends["r1"] + ends["r2"]) / 4, 2)
        drawn.readings.append({"test": "ze", "point": None, "value": round(drawn.ze, 2)})
        for place, point in enumerate(drawn.trunk):
            x = (place + 1) / (len(drawn.trunk) + 1)
            r1_r2 = round(x * (1 - x) * (ends["r1"] + ends["r2"]), 2)
            drawn.readings += [
                {"test": "ln_cross", "point": point, "value": ln},
                {"test": "le_cross", "point": point, "value": le},
                {"test": "r1_r2", "point": point, "value": r1_r2},
                {"test": "zs", "point": point, "value": round(drawn.ze + r1_r2, 2), "mode": "high_current"},
            ]
    if drawn.truth.get("after") == "rubbish":
        for row in drawn.readings:
            if row["test"] in ("r1", "rn", "r2", "ln_cross", "le_cross", "r1_r2") and "value" in row:
                row["value"] = round(drawn.rng.uniform(0.05, 3.0), 2)


def draw(key: str, seed: str, points: int | None = None) -> Drawn:
    """One circuit with this fault, all its readings taken; with so many points where that is given."""
    drawn = FAULTS[key].draw(seed, points)
    if "after" in drawn.truth:
        _after(drawn)
    again = drawn.truth.get("again")
    if again is not None:
        # The front is read a second time after the plug was moved: it shows something else.
        for row in [row for row in drawn.readings if row["point"] == again and row["test"] in ("ln_cross", "le_cross")]:
            drawn.readings.append({**row, "value": round(max(0.0, row["value"] + drawn.rng.uniform(-0.3, 0.5)), 2)})
    return drawn
