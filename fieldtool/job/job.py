"""One visit to one installation, in one file, with the cross-checks that hold it together."""

from __future__ import annotations

from typing import Annotated, Literal, TypeVar

from pydantic import BaseModel, ConfigDict, Field, PrivateAttr, model_validator

from fieldtool.job.circuit import Circuit, Load, Point, Run
from fieldtool.job.cross import cross_problems
from fieldtool.job.isolation import IsolationEntry, Parted
from fieldtool.job.place import Board, Instrument, Person, Site, Supply
from fieldtool.job.reading import Cell, Reading
from fieldtool.job.request import NewOutlet, Override, Request, VerdictKept
from fieldtool.job.rows import Moment, Row, Text

__all__ = ["ROW_TABLES", "SCHEMA", "About", "HistoryEntry", "Job", "TableName"]

SCHEMA = 1
"""Version of the job's shape in the file."""

TableName = Literal[
    "people",
    "instruments",
    "boards",
    "circuits",
    "points",
    "runs",
    "loads",
    "requests",
    "readings",
    "isolation",
    "parted",
    "overrides",
    "verdicts",
]


class About(BaseModel):
    """What the file says of itself. ``check`` and ``generation`` are written by the job file alone."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", allow_inf_nan=False)

    schema_version: Annotated[int, Field(alias="schema", ge=1)] = SCHEMA
    edition: Text = ""
    next_id: int = Field(1, ge=1)
    generation: int | None = Field(None, ge=1)
    check: Text | None = None


class HistoryEntry(BaseModel):
    """One accepted entry: who, when, what it touched, what stood there and what stands now (JSON text)."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", allow_inf_nan=False)

    n: int = Field(ge=1)
    at: Moment
    by: Text = ""
    what: Text
    was: str | None = None
    now: str | None = None
    why: Text = ""
    undoes: int | None = None
    group: int | None = None


class Job(BaseModel):
    """Everything entered on one visit. Derived answers are never stored, kept verdicts excepted."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", allow_inf_nan=False)

    about: About = About()
    site: Site = Site()
    supply: Supply = Supply()
    people: tuple[Person, ...] = ()
    instruments: tuple[Instrument, ...] = ()
    boards: tuple[Board, ...] = ()
    circuits: tuple[Circuit, ...] = ()
    points: tuple[Point, ...] = ()
    runs: tuple[Run, ...] = ()
    loads: tuple[Load, ...] = ()
    requests: tuple[Request, ...] = ()
    readings: tuple[Reading, ...] = ()
    isolation: tuple[IsolationEntry, ...] = ()
    parted: tuple[Parted, ...] = ()
    overrides: tuple[Override, ...] = ()
    verdicts: tuple[VerdictKept, ...] = ()
    history: tuple[HistoryEntry, ...] = ()

    _counted: dict[Cell, Reading] | None = PrivateAttr(None)
    _at_boards: dict[tuple[str | None, str, str], Reading] = PrivateAttr(default_factory=dict)

    def counted(self) -> dict[Cell, Reading]:
        """The reading that counts in each cell: the newest, one at the terminals before one at the front.

        Worked out once for each job, which never changes.
        """
        if self._counted is None:
            found: dict[Cell, Reading] = {}
            for reading in self.standing():
                if not reading.counts:
                    continue
                before = found.get(reading.cell)
                if before is None or before.probes != "terminals" or reading.probes == "terminals":
                    found[reading.cell] = reading
                if reading.circuit is None:
                    self._at_boards[(reading.board, reading.test, reading.stage)] = reading
            self._counted = found
        return self._counted

    def counted_at(self, board_id: str, test: str, stage: str = "as_found") -> Reading | None:
        """The reading that counts of a test taken at one board; one without a board's name is of every board."""
        self.counted()
        return self._at_boards.get((board_id, test, stage)) or self._at_boards.get((None, test, stage))

    def circuit(self, circuit_id: str) -> Circuit:
        """The circuit with this id; KeyError when the job has none."""
        return _by_id(self.circuits, circuit_id)

    def board(self, board_id: str) -> Board:
        """The board with this id; KeyError when the job has none."""
        return _by_id(self.boards, board_id)

    def request(self, request_id: str) -> Request:
        """The request with this id; KeyError when the job has none."""
        return _by_id(self.requests, request_id)

    def points_of(self, circuit_id: str) -> tuple[Point, ...]:
        """The circuit's points in walking order; those without one follow in order of their ids.

        The order in which rows stand in the file means nothing.
        """
        mine = (point for point in self.points if point.circuit == circuit_id)
        return tuple(sorted(mine, key=lambda p: (p.walk_order is None, p.walk_order or 0, _natural(p.id))))

    def point_name(self, point_id: str | None) -> str:
        """What a person calls a point, a new outlet or the board; the id where it has no name."""
        if point_id is None or point_id == "board":
            return "board"
        for point in self.points:
            if point.id == point_id:
                return point.name or point.id
        for _, outlet in self.new_outlets():
            if outlet.id == point_id:
                return outlet.name or outlet.id
        return point_id

    def new_outlets(self) -> tuple[tuple[Request, NewOutlet], ...]:
        """Every proposed outlet with its request."""
        return tuple((request, outlet) for request in self.requests for outlet in request.outlets)

    def standing(self) -> tuple[Reading, ...]:
        """Readings that were not replaced, withdrawn or set aside, oldest first."""
        gone = {reading.replaces for reading in self.readings} | {reading.withdraws for reading in self.readings}
        return tuple(
            reading
            for reading in self.readings
            if reading.id not in gone and reading.withdraws is None and not reading.set_aside
        )

    @model_validator(mode="after")
    def _hangs_together(self) -> Job:
        for problem in cross_problems(self):
            raise ValueError(problem)
        return self


R = TypeVar("R", bound=Row)


def _natural(row_id: str) -> tuple[str, int, str]:
    letters = row_id.rstrip("0123456789")
    digits = row_id[len(letters) :]
    return (letters, int(digits) if digits else 0, row_id)


def _by_id(rows: tuple[R, ...], row_id: str) -> R:
    for row in rows:
        if row.id == row_id:
            return row
    raise KeyError(row_id)


ROW_TABLES: dict[TableName, type[Row]] = {
    "people": Person,
    "instruments": Instrument,
    "boards": Board,
    "circuits": Circuit,
    "points": Point,
    "runs": Run,
    "loads": Load,
    "requests": Request,
    "readings": Reading,
    "isolation": IsolationEntry,
    "parted": Parted,
    "overrides": Override,
    "verdicts": VerdictKept,
}
"""Tables whose rows have ids, with the model of a row."""
