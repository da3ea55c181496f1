"""What a way of adding is: an edit of a circuit's layout, registered under a key, and nothing that judges.

A way says what would be built. Whether that may be done is the one checker's business, so that a new rule
protects every way and no way brings softer rules of its own.
"""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from typing import Literal

from fieldtool.answers import Material
from fieldtool.job.circuit import Circuit, Point
from fieldtool.job.job import Job
from fieldtool.job.kinds import WayKey
from fieldtool.job.place import Device, Rcd
from fieldtool.job.request import Request
from fieldtool.network.as_found import AsFound, cable_ohms
from fieldtool.network.layout import Layout, LayoutRun, Ohms

__all__ = ["WAYS", "Edit", "Refusal", "Setting", "Way", "chain_of", "every_way", "way"]

Role = Literal["none", "unfused_spur", "fused_spur", "ring", "radial", "swap", "new_circuit", "moved"]


@dataclass(frozen=True, slots=True)
class Setting:
    """What a way works on: the job, the circuit as found, and the request. ``metres`` overrides the outward length.

    ``scale`` moves along the question "how far could it go": the metres of the last new run [m], None as requested.
    """

    job: Job
    circuit: Circuit
    request: Request
    found: AsFound
    metres: float | None = None

    @property
    def layout(self) -> Layout:
        """The circuit's layout as found."""
        return self.found.layout

    def point(self, point_id: str | None) -> Point | None:
        """The existing point with this id; None where it is the board, a new outlet or not named."""
        return next((p for p in self.job.points if p.id == point_id), None)

    def first_metres(self) -> float:
        """Metres of new cable to the first new outlet, as asked or as the headroom question overrides it [m]."""
        if self.metres is not None:
            return self.metres
        return self.request.outlets[0].metres if self.request.outlets else 0.0


@dataclass(frozen=True, slots=True)
class Refusal:
    """Why a way does not serve here. ``applies`` is False where it is not about this circuit at all."""

    reason: str
    clause: str = ""
    applies: bool = True


@dataclass(frozen=True, slots=True)
class Edit:
    """The circuit as a way would leave it, with the facts that rules judge.

    ``new_nodes`` are the new outlets' ids in order of the cable; ``attach`` the existing places that new cable
    joins; ``role`` what the addition is; ``fuse_a`` the plug fuse ahead of it [A]; ``device`` what protects it
    afterwards; ``new_runs`` the ids of new cable; ``opened`` runs taken out; ``current_a`` what the first new run
    is rated against [A].
    """

    layout: Layout
    shape: Literal["ring", "radial"]
    role: Role
    device: Device | None
    rcd: Rcd | None
    rcd_covers: Literal["none", "some"] | None
    new_nodes: tuple[str, ...] = ()
    attach: tuple[str, ...] = ()
    new_runs: tuple[str, ...] = ()
    opened: tuple[str, ...] = ()
    fuse_a: float | None = None
    accessories_on_spur: int = 0
    joint_boxes: int = 0
    device_changed: bool = False
    needs_way: bool = False
    own_circuit: bool = False
    keeps_old_link: bool = False
    disturbs_ring: bool = False
    hung: bool = True
    terminals: tuple[tuple[str, tuple[float, ...]], ...] = ()
    material: tuple[Material, ...] = ()
    repeat_tests: tuple[str, ...] = ()
    document: str = "minor works"
    work: int = 1
    conditions: tuple[str, ...] = ()
    assumed: tuple[str, ...] = ()


Apply = Callable[[Setting], Edit | Refusal]


@dataclass(frozen=True, slots=True)
class Way:
    """One way of adding: its key, its words, the order it is offered in, and the edit it makes."""

    key: WayKey
    words: str
    order: int
    apply: Apply


WAYS: dict[str, Way] = {}
"""Every way that has been imported, by key; ask ``every_way`` for the whole list."""


def way(key: WayKey, words: str, order: int) -> Callable[[Apply], Apply]:
    """Register a function as a way of adding. ValueError when the key is taken."""

    def register(apply: Apply) -> Apply:
        if key in WAYS:
            raise ValueError(f"the way {key} is registered twice")
        WAYS[key] = Way(key, words, order, apply)
        return apply

    return register


@cache
def every_way() -> tuple[Way, ...]:
    """Every way in the package, in the order they are offered. A new way is one new file."""
    package = importlib.import_module("fieldtool.ways")
    for module in pkgutil.iter_modules(package.__path__):
        importlib.import_module(f"fieldtool.ways.{module.name}")
    return tuple(sorted(WAYS.values(), key=lambda way: way.order))


def chain_of(setting: Setting, start: str, *, cable: str | None = None) -> tuple[LayoutRun, ...]:
    """New cable from ``start`` through every new outlet in order, as proposed runs.

    Each run takes the cable of the request's route; the first takes the setting's metres where given [m].
    """
    key = cable or setting.request.route.cable
    runs: list[LayoutRun] = []
    at = start
    for number, outlet in enumerate(setting.request.outlets):
        metres = setting.first_metres() if number == 0 else outlet.metres
        ohms = cable_ohms(key, metres) or Ohms(0.0, 0.0, 0.0)
        runs.append(
            LayoutRun(f"new_{outlet.id}", at, outlet.id, ohms, key, metres, "proposed", new=True, on_ring=False)
        )
        at = outlet.id
    return tuple(runs)
