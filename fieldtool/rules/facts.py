"""The one frozen view that rules read: a circuit as edited, its networks, readings and loops.

Built once for each edited layout. Every accessor either answers or raises ``NotKnown`` naming what is missing;
no rule ever sees an unknown.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property
from math import inf, isfinite
from typing import TypeVar, cast

from fieldtool.answers import CircuitReading, Missing
from fieldtool.job.circuit import Circuit, Point
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.place import Board, Device, Rcd
from fieldtool.job.reading import Reading
from fieldtool.job.request import NewOutlet, Request
from fieldtool.network.as_found import AsFound, latest
from fieldtool.network.grid import Grid, r1_r2, r1_rn, solve
from fieldtool.network.layout import BOARD, Layout, LayoutRun
from fieldtool.network.zones import zone_of
from fieldtool.reference.look import DeviceType, device
from fieldtool.rules.engine import NotKnown
from fieldtool.rules.needs import missing_for, missing_test
from fieldtool.rules.tolerance import tolerance
from fieldtool.ways.way import Edit

__all__ = ["Facts", "Loop", "Protection"]

FCU_TYPE = "bs1362"

T = TypeVar("T")

_MOST_SHARE = 0.2
"""A short run's reading is mostly digits; its tolerance is not carried to the whole circuit beyond this share."""

_LEAST_DIGITS_OHM = 0.02
"""Two last digits of a low-resistance meter [ohm]."""


@dataclass(frozen=True, slots=True)
class Loop:
    """The earth fault loop used at one place [ohm]: the higher of measured there and worked out.

    ``tol`` is how far the meters can be off [ohm]; ``dead`` the loop worked out from the board and R1+R2, None
    where that is not known; ``live`` the reading there; ``flattered`` is True where the reading is lower than
    worked out by more than the meters can miss (a parallel earth path, not counted).
    """

    place: str
    value: float
    tol: float
    dead: float | None
    live: Reading | None
    origin: str
    flattered: bool
    working: tuple[str, ...]
    assumed: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Protection:
    """The nearest device upstream of a place: its catalogue entry and rating [A], and where it sits."""

    kind: DeviceType
    in_a: float
    place: str
    fused: bool


class Facts:
    """Everything a rule may read about one circuit as it stands (``edit`` None) or as a way would leave it."""

    def __init__(
        self,
        job: Job,
        circuit_id: str,
        found: AsFound,
        *,
        edit: Edit | None = None,
        request: Request | None = None,
        way: str = "",
        reading: CircuitReading | None = None,
    ) -> None:
        self.job = job
        self.circuit: Circuit = job.circuit(circuit_id)
        self.board: Board = job.board(self.circuit.board)
        self.found = found
        self.edit = edit
        self.request = request
        self.way = way
        self.reading = reading
        self.layout: Layout = edit.layout if edit is not None else found.layout
        self.shape: str = edit.shape if edit is not None else found.shape
        self._loops: dict[str, Loop] = {}
        self._kept: dict[str, object] = {}

    # names and places ---------------------------------------------------------------------------------------
    def name(self, place: str) -> str:
        """What a person calls a place."""
        return self.job.point_name(place)

    @cached_property
    def points(self) -> Mapping[str, Point]:
        """The circuit's existing points by id."""
        return {point.id: point for point in self.job.points_of(self.circuit.id)}

    @cached_property
    def new_nodes(self) -> tuple[str, ...]:
        """Ids of the new outlets, in order of the cable; empty for the circuit as it stands."""
        return self.edit.new_nodes if self.edit is not None else ()

    @cached_property
    def outlets(self) -> tuple[NewOutlet, ...]:
        """The new outlets of the request."""
        return self.request.outlets if self.request is not None else ()

    @cached_property
    def new_runs(self) -> tuple[LayoutRun, ...]:
        """The runs of new cable."""
        return tuple(run for run in self.layout.runs if run.new)

    @cached_property
    def places(self) -> tuple[str, ...]:
        """Every point, spur end and new outlet on this circuit as edited."""
        if self.edit is not None and self.edit.own_circuit:
            return self.new_nodes
        return self.layout.nodes

    def missing(self, need: str) -> tuple[Missing, ...]:
        """What is missing of one declared need; empty when it is known."""
        return missing_for(self, need)

    # device and protection ----------------------------------------------------------------------------------
    @cached_property
    def device(self) -> Device:
        """The circuit's device as it will be."""
        chosen = self.edit.device if self.edit is not None else self.circuit.device
        if chosen is None:
            raise NotKnown(Missing("survey", self.circuit.id, "the circuit's device", 40, "circuit.device"))
        return chosen

    @cached_property
    def device_type(self) -> DeviceType:
        """The catalogue entry of the circuit's device as it will be."""
        return device(self.device.type)

    @property
    def rcd(self) -> Rcd | None:
        """The RCD that covers the circuit as it will be; None where none does. NotKnown where not surveyed."""
        covers = self.edit.rcd_covers if self.edit is not None else self.circuit.rcd_covers
        found = self.edit.rcd if self.edit is not None else self.circuit.rcd
        if covers is None or (covers == "some" and found is None):
            raise NotKnown(Missing("survey", self.circuit.id, "whether an RCD covers it", 42, "circuit.rcd_covers"))
        return found if covers == "some" else None

    def protection(self, place: str) -> Protection:
        """The nearest device upstream of a place: a plug fuse behind a fused unit, else the circuit's device."""
        edit = self.edit
        if edit is not None and edit.fuse_a is not None and place in edit.new_nodes:
            return Protection(device(FCU_TYPE), edit.fuse_a, edit.attach[0] if edit.attach else BOARD, True)
        # New cable hangs in the zone of the place it is fed from: an existing fused unit's own fuse protects it only
        # where a way starts on that unit's load side and says so by ``fuse_a``.
        fed_from = edit.attach[0] if edit is not None and place in self.new_nodes and edit.attach else place
        if fed_from in self.found.layout.nodes:
            zone = zone_of(self.found.layout, fed_from)
            if zone.fuse_a is not None:
                return Protection(device(FCU_TYPE), zone.fuse_a, zone.head, True)
        return Protection(self.device_type, self.device.in_a, BOARD, False)

    # readings -----------------------------------------------------------------------------------------------
    def read(self, test: str, place: str | None = None, stage: str = "as_found") -> Reading:
        """The newest reading of a cell that counts; NotKnown where there is none."""
        found = self.maybe(test, place, stage)
        if found is None:
            raise NotKnown(missing_test(self, test, place))
        return found

    def maybe(self, test: str, place: str | None = None, stage: str = "as_found") -> Reading | None:
        """The newest reading of a cell that counts, or None."""
        spec = TESTS[test]  # type: ignore[index]
        if spec.where == "board":
            return self.job.counted_at(self.board.id, test, stage)
        return latest(self.job, self.circuit.id, place if spec.where == "point" else None, test, stage)

    @cached_property
    def zdb(self) -> Reading:
        """The loop at this board: the higher of what was read here and, at the origin, of Ze."""
        here, origin = self.maybe("zdb"), self.maybe("ze")
        own = [r for r in (here, origin if not self.board.fed_from else None) if r is not None and r.value is not None]
        if not own:
            raise NotKnown(missing_test(self, "zdb" if self.board.fed_from else "ze", None))
        return max(own, key=lambda r: r.value or 0.0)

    @cached_property
    def pfc_a(self) -> float:
        """Prospective fault current at the board [A]: the higher of what was read and what the loop implies."""
        shown = self.read("pfc")
        implied = self.job.supply.u0_v / self.zdb.value if self.zdb.value else inf
        return max(shown.value or 0.0, implied if isfinite(implied) else 0.0)

    def tol(self, reading: Reading) -> float:
        """How far the true value may be from a reading [its unit]."""
        return tolerance(self.job, reading)

    def once(self, key: str, make: Callable[[], T]) -> T:
        """What ``make`` gives, worked out once for these facts."""
        if key not in self._kept:
            self._kept[key] = make()
        return cast(T, self._kept[key])

    # networks -----------------------------------------------------------------------------------------------
    @cached_property
    def grid(self) -> Grid:
        """The circuit as edited, solved."""
        if self.edit is None or self.edit.layout is self.found.layout:
            return self.base_grid
        return solve(self.layout)

    @cached_property
    def base_grid(self) -> Grid:
        """The circuit as found, solved."""
        return solve(self.found.layout)

    @cached_property
    def base_r(self) -> Mapping[str, float]:
        """In-service R1+R2 at every existing point as found [ohm]."""
        return r1_r2(self.base_grid)

    @cached_property
    def r(self) -> Mapping[str, float]:
        """In-service R1+R2 at every point as edited [ohm]."""
        return self.base_r if self.grid is self.base_grid else r1_r2(self.grid)

    @cached_property
    def rn(self) -> Mapping[str, float]:
        """In-service R1+Rn at every point as edited [ohm]."""
        return r1_rn(self.grid)

    def placed(self, place: str) -> bool:
        """True where the network knows the resistance to an existing place."""
        if place == BOARD:
            return True
        return self.found.known and place not in self.found.unmeasured and isfinite(self.base_r.get(place, inf))

    # loops --------------------------------------------------------------------------------------------------
    def loop_as_found(self, place: str) -> Loop:
        """The loop at an existing place before the work [ohm]: the higher of measured and worked out.

        A lower live reading never counts: it may ride on a parallel earth path (domain practice; 411.4.4 sets
        the limit that it is held against).
        """
        if place in self._loops:
            return self._loops[place]
        zdb = self.zdb
        board = zdb.value or 0.0
        if place == BOARD:
            loop = Loop(BOARD, board, self.tol(zdb), board, zdb, _origin(zdb), False, (f"Z at board {board:.2f}",))
            self._loops[BOARD] = loop
            return loop
        live = self.maybe("zs", place)
        live_value = live.value if live is not None and live.sign == "=" else None
        if live is not None and live.sign in (">", "open"):
            live_value = inf
        dead: float | None = None
        dead_tol = 0.0
        lines: list[str] = []
        if self.placed(place):
            r = self.base_r[place]
            own = self.maybe("r1_r2", place)
            if own is not None and own.value is not None and own.sign == "=" and own.value > r:
                r = own.value
            dead = board + r
            dead_tol = self.tol(zdb) + self.dead_tol(r)
            lines.append(f"Z at board {board:.2f} + R1+R2 {r:.3f} = {dead:.3f} Ω")
        if dead is None and live_value is None:
            raise NotKnown(missing_test(self, "zs", place))
        if live is not None and live_value is not None:
            lines.append(f"read there {_ohms(live_value, 2)}, {(live.mode or 'mode not given').replace('_', ' ')}")
        flattered = (
            dead is not None
            and live is not None
            and live_value is not None
            and dead - live_value > self.tol(live) + dead_tol
        )
        if live_value is not None and (dead is None or live_value >= dead):
            value, tol, origin = live_value, self.tol(live) if live is not None else 0.0, "measured"
        else:
            value, tol, origin = dead or 0.0, dead_tol, "calculated"
        assumed = list(self.found.assumed) if dead is not None and origin == "calculated" else []
        if dead is None:
            assumed.append("parallel earth paths not excluded: R1+R2 was not read here")
        loop = Loop(place, value, tol, dead, live, origin, flattered, tuple(lines), tuple(assumed))
        self._loops[place] = loop
        return loop

    def dead_tol(self, r: float) -> float:
        """How far R1+R2 worked out from dead readings may be off [ohm]: the worst of the readings it came from."""
        share = self.once("dead share", self._dead_share)
        if share is None or not isfinite(r):
            return 0.0
        return max(min(share, _MOST_SHARE) * r, _LEAST_DIGITS_OHM if r > 0 else 0.0)

    def _dead_share(self) -> float | None:
        """The largest share by which a dead reading that R1+R2 rests on may be off [-]; None without any."""
        dead = [
            item
            for item in self.job.counted().values()
            if item.circuit == self.circuit.id and item.test in ("r1", "rn", "r2", "r1_r2") and item.value
        ]
        return max((self.tol(item) / (item.value or 1.0) for item in dead), default=None)

    def loop(self, place: str) -> Loop:
        """The loop at any place as edited [ohm].

        New cable adds its own line and cpc at 20 °C to the loop at the place it is fed from; where the ring
        itself is changed the whole network is solved again, and what a reading showed above the sum stays added.
        """
        edit = self.edit
        if edit is None or edit.layout is self.found.layout:
            return self.loop_as_found(place)
        key = f"after {place}"
        if key in self._loops:
            return self._loops[key]
        if place in self.new_nodes and edit.hung:
            loop = self._hung_loop(place)
        elif place in self.found.layout.nodes and not edit.opened and edit.hung:
            loop = self.loop_as_found(place)
        else:
            loop = self._solved_loop(place)
        self._loops[key] = loop
        return loop

    def _hung_loop(self, place: str) -> Loop:
        edit = self.edit
        assert edit is not None
        foot = self.loop_as_found(edit.attach[0] if edit.attach else BOARD)
        added = 0.0
        metres = 0.0
        for run in self.new_runs:
            added += run.ohms.line + run.ohms.cpc
            metres += run.length_m or 0.0
            if run.b == place:
                break
        total = _ohms(foot.value + added)
        lines = (*foot.working, f"{_ohms(foot.value)} + {added:.3f} ({metres:.1f} m new) = {total}")
        dead = None if foot.dead is None else foot.dead + added
        return Loop(
            place, foot.value + added, foot.tol, dead, foot.live, "calculated", foot.flattered, lines, foot.assumed
        )

    def _solved_loop(self, place: str) -> Loop:
        edit = self.edit
        assert edit is not None
        if not self.found.known:
            raise NotKnown(*(self.found.missing or (missing_test(self, "r2", None),)))
        board = self.loop_as_found(BOARD)
        excess, tol, assumed = 0.0, board.tol, list(self.found.assumed) + list(edit.assumed)
        for near in (*edit.attach, place):
            if near not in self.found.layout.nodes:
                continue
            before = self.loop_as_found(near)
            if before.dead is not None:
                excess = max(excess, before.value - before.dead)
            tol = max(tol, before.tol)
        r = self.r[place]
        value = board.value + r + excess
        tol = max(tol, board.tol + self.dead_tol(r))
        lines = [f"Z at board {board.value:.2f} + R1+R2 as edited {r:.3f} = {board.value + r:.3f} Ω"]
        if excess > 0:
            lines.append(f"+ {_ohms(excess)} that the reading showed above the sum = {_ohms(value)}")
        return Loop(
            place,
            value,
            tol,
            board.value + r,
            None,
            "calculated",
            False,
            tuple(lines),
            tuple(dict.fromkeys(assumed)),
        )


def _ohms(value: float, places: int = 3) -> str:
    """A resistance as a working line shows it; a person reads "open", never an infinity."""
    return f"{value:.{places}f} Ω" if isfinite(value) else "open"


def _origin(reading: Reading) -> str:
    if reading.mode == "enquiry":
        return "declared"
    return reading.origin
