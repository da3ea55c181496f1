"""Isolation states as pure functions of the log and the time.

Everything starts and reopens as NOT KNOWN, which is treated as live. Only the whole sequence, in order, gives
PROVED DEAD, at the places that were proved; everything in ``LAPSES`` takes it away again.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from datetime import datetime, timedelta

from fieldtool.answers import StateWord
from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job

__all__ = [
    "LAPSES",
    "PROOF_LASTS",
    "SEQUENCE",
    "WARNINGS",
    "CircuitState",
    "blocked_by",
    "both_poles_needed",
    "next_change",
    "sequence",
    "state",
]

PROOF_LASTS = timedelta(hours=4)
"""How long a proof counts; common practice is to prove again after every break, and after this at the latest."""

WARNINGS = (timedelta(minutes=30), timedelta(minutes=10))
"""How long before a proof lapses the reminders say so."""

SEQUENCE = (
    "survey_eye",
    "metalwork_checked",
    "permission",
    "identified",
    "off",
    "main_switch_off",
    "locked",
    "sources_isolated",
    "tester_proved_before",
    "dead_tested",
    "tester_proved_after",
)
"""The steps in the order they are done. Main switch and other sources only where the survey calls for them."""

LAPSES: dict[str, tuple[StateWord, str]] = {
    "opened": ("not_known", "The job was closed. Nobody knows what was switched since."),
    "left_site": ("not_known", "You left the site. Nobody knows what was switched since."),
    "other_circuit": ("not_known", "Another circuit was worked on since."),
    "unlocked": ("not_known", "The lock came off."),
    "stopped": ("not_known", "The log was stopped."),
    "struck": ("not_known", "A step of the log was struck through."),
    "restored": ("live", "The supply is back on."),
    "handed_over": ("live", "The circuit was handed over."),
}
"""Entries that end a proof: what the circuit is afterwards, and why."""


@dataclass(slots=True)
class _Fold:
    """What the log adds up to so far."""

    done: dict[str, IsolationEntry] = field(default_factory=dict)
    pending: list[IsolationEntry] = field(default_factory=list)
    proved: dict[str, datetime] = field(default_factory=dict)
    after: StateWord = "not_known"
    reason: str = "Nothing is logged yet."
    alarm: str = ""
    origin: bool = False

    def clear(self, word: StateWord, reason: str) -> None:
        self.done.clear()
        self.pending.clear()
        self.proved.clear()
        self.after, self.reason, self.origin = word, reason, False


@dataclass(frozen=True, slots=True)
class CircuitState:
    """One circuit's state now: the word, the places proved, until when, why, and what alarm stands.

    ``done`` gives the time of each step that counts towards the next proof.
    """

    word: StateWord
    places: tuple[str, ...] = ()
    proved_at: datetime | None = None
    lapses_at: datetime | None = None
    reason: str = ""
    alarm: str = ""
    done: tuple[tuple[str, datetime], ...] = ()
    detail: tuple[tuple[str, str], ...] = ()

    @property
    def dead(self) -> bool:
        """True only for a proof that holds."""
        return self.word in ("proved_dead", "board_dead")


def both_poles_needed(job: Job, circuit_id: str) -> str:
    """Why the main switch must be off and both poles parted for this circuit; empty where its own device will do."""
    circuit = job.circuit(circuit_id)
    poles = circuit.device.poles if circuit.device is not None else None
    if job.supply.system == "tt" and poles != 2:
        return "TT: a single pole off leaves the neutral connected. Both poles go off."
    if job.supply.system is None and poles != 2:
        return "The earthing system is not known: both poles go off."
    if any(row.circuit == circuit_id and row.place == "board" and row.back_at is None for row in job.parted):
        return "Conductors are parted or joined at the board: the whole board goes off."
    if circuit.label_claims == "ring" and circuit.line_ends == 1:
        return "One line end at the way: the other leg may sit in another way. The whole board goes off."
    ends = {circuit.line_ends, circuit.neutral_ends, circuit.cpc_ends} - {None}
    if len(ends) > 1:
        return "The conductors at the way do not match: a leg or a neutral may be another's. The board goes off."
    if circuit.other_circuits_in_boxes == "yes":
        return "Another circuit sits in its boxes: the whole board goes off."
    for reading in job.standing():
        if reading.circuit == circuit_id and reading.counts:
            low = reading.value is not None and reading.value < 1e6 and reading.sign != ">"
            if (reading.test == "ir_neutrals" and low) or (reading.test == "legs" and reading.answer == "wrong"):
                return "Its neutral or a leg meets another circuit: the whole board goes off."
    taken = {cell[2] for cell in job.counted() if cell[0] == circuit_id and cell[3] == "as_found"}
    if not _READ_PARTED["radial" if circuit.label_claims == "radial" else "ring"] <= taken:
        return "Its ends are still to be parted and read at the board: the whole board goes off."
    return ""


_READ_PARTED = {"ring": {"r1", "rn", "r2"}, "radial": {"legs"}}
"""Tests that are read with conductors parted at the board, which takes the whole board off."""


def blocked_by(job: Job, circuit_id: str) -> str:
    """What keeps this circuit from ever being proved dead as the survey stands; empty where nothing does."""
    circuit, supply = job.circuit(circuit_id), job.supply
    if supply.sources is None:
        return "Say whether there are other sources of supply."
    if circuit.back_feed in ("found", "unknown"):
        return "Something may feed back into it: find it and unplug it."
    board = job.board(circuit.board)
    if both_poles_needed(job, circuit_id) and board.main_switch in ("line_only", "none"):
        return "The main switch does not cut all poles: isolate both poles ahead of it."
    if job.site.asbestos == "yes":
        return "Asbestos suspected: do not open, do not drill."
    return ""


def sequence(job: Job, circuit_id: str) -> tuple[str, ...]:
    """The steps that this circuit's proof takes, in order."""
    main = bool(both_poles_needed(job, circuit_id)) or _main_is_off(job, circuit_id)
    left_out = set()
    if not main:
        left_out.add("main_switch_off")
    if job.supply.sources != "some":
        left_out.add("sources_isolated")
    return tuple(step for step in SEQUENCE if step not in left_out)


def _main_is_off(job: Job, circuit_id: str) -> bool:
    off = False
    for entry in _mine(job, circuit_id):
        if entry.kind == "main_switch_off":
            off = True
        elif entry.kind in LAPSES:
            off = False
    return off


def _mine(job: Job, circuit_id: str) -> Iterator[IsolationEntry]:
    """The log as it concerns one circuit: its own steps, its board's, and work begun on another circuit."""
    struck = {entry.strikes for entry in job.isolation}
    for entry in job.isolation:
        if entry.id in struck and entry.kind != "struck":
            continue
        if entry.circuit in (None, circuit_id):
            yield entry
        elif entry.kind in ("identified", "off", "restored"):
            yield entry.model_copy(update={"kind": "other_circuit"})


def state(job: Job, circuit_id: str, now: datetime) -> CircuitState:
    """The state of one circuit at a moment, from the log alone."""
    latest = max((entry.at for entry in job.isolation), default=None)
    if latest is not None and now < latest:
        return CircuitState("not_known", reason="The clock stands before the last entry of the log.")
    wanted = sequence(job, circuit_id)
    fold = _Fold()
    for entry in _mine(job, circuit_id):
        _step(fold, entry, wanted)
    _lapse_parted(job, circuit_id, fold)
    if blocked_by(job, circuit_id):
        fold.proved.clear()
    live = {place: at for place, at in fold.proved.items() if now - at <= PROOF_LASTS}
    done = tuple((kind, entry.at) for kind, entry in fold.done.items())
    detail = tuple((kind, entry.detail) for kind, entry in fold.done.items() if entry.detail)
    if fold.origin:
        return CircuitState("origin_test", reason="Incoming terminals live; the earth may be parted.", done=done)
    if live and not fold.alarm:
        first = min(live.values())
        word: StateWord = "board_dead" if "main_switch_off" in fold.done and "board" in live else "proved_dead"
        return CircuitState(
            word, tuple(live), first, first + PROOF_LASTS, "The whole sequence is logged.", "", done, detail
        )
    if fold.proved and not live:
        when = max(fold.proved.values()) + PROOF_LASTS
        fold.reason = f"The proof lapsed at {when.astimezone():%H:%M}."
        kept = tuple((kind, at) for kind, at in done if kind not in _PROOF)
        return CircuitState("off_not_proved", reason=fold.reason, done=kept, detail=detail)
    if "off" in fold.done or "main_switch_off" in fold.done:
        return CircuitState("off_not_proved", reason=fold.reason, alarm=fold.alarm, done=done, detail=detail)
    return CircuitState(fold.after, reason=fold.reason, alarm=fold.alarm, done=done, detail=detail)


_PROOF = ("tester_proved_before", "dead_tested", "tester_proved_after")


def _step(fold: _Fold, entry: IsolationEntry, wanted: tuple[str, ...]) -> None:
    """One entry of the log. A step whose earlier steps are not there counts for nothing."""
    kind = entry.kind
    if kind in LAPSES:
        fold.clear(*LAPSES[kind])
        return
    if kind == "origin_test_begins":
        fold.origin = "main_switch_off" in fold.done and "locked" in fold.done
        return
    if kind == "origin_test_ends":
        fold.origin = False
        fold.reason = "The origin test is over and the earth is back."
        return
    if kind not in SEQUENCE or kind not in wanted:
        return
    before = wanted[: wanted.index(kind)]
    again = kind in _PROOF
    needed = [step for step in before if step not in _PROOF] if again else list(before)
    if any(step not in fold.done for step in needed):
        return
    if entry.found_well is False:
        fold.clear("not_known", "Something was found that stops the work.")
        fold.alarm = _ALARMS.get(kind, "Something was found that stops the work.")
        return
    if kind in ("survey_eye", "metalwork_checked"):
        fold.alarm = ""
    if kind == "tester_proved_before":
        fold.pending.clear()
        for step in _PROOF:
            fold.done.pop(step, None)
        fold.done[kind] = entry
        fold.alarm = ""
    elif kind == "dead_tested":
        if "tester_proved_before" not in fold.done:
            return
        if entry.volts is None or any(volts != 0 for volts in entry.volts):
            fold.pending.clear()
            fold.proved.clear()
            fold.done.pop("tester_proved_before", None)
            fold.reason = "Volts were found where it should be dead."
            fold.alarm = "Volts found: it is not dead. Stop; find out why."
            return
        fold.pending.append(entry)
        fold.done[kind] = entry
    elif kind == "tester_proved_after":
        if not fold.pending:
            return
        for proof in fold.pending:
            fold.proved[proof.place or "board"] = proof.at
        fold.pending.clear()
        fold.done[kind] = entry
    else:
        fold.done[kind] = entry
        fold.reason = "Not all steps of the log are done."
        if kind == "main_switch_off" and "locked" in fold.done:
            # The whole board goes off later than the circuit did: it is locked and proved there anew.
            for step in ("locked", *_PROOF):
                fold.done.pop(step, None)
            fold.pending.clear()
            fold.proved.pop("board", None)


_ALARMS = {
    "survey_eye": "Heat, crumbling cable or asbestos: do not open. Stop.",
    "metalwork_checked": "Metalwork is not at earth: hands off. Call the distributor.",
}


def _lapse_parted(job: Job, circuit_id: str, fold: _Fold) -> None:
    """Parting a neutral or an earth ends the proof at that place: it can rise when its circuit lets it."""
    for row in job.parted:
        if row.circuit != circuit_id or row.sort != "parted" or row.conductor not in ("neutral", "cpc"):
            continue
        proved = fold.proved.get(row.place)
        if proved is not None and row.at > proved:
            fold.proved.pop(row.place)
            for step in _PROOF:
                done = fold.done.get(step)
                if done is not None and done.at <= row.at:
                    fold.done.pop(step)
            fold.reason = f"The {row.conductor.replace('cpc', 'earth')} was parted since: prove it dead again."


def next_change(job: Job, now: datetime) -> datetime | None:
    """When some circuit's strip changes by itself next: a warning or a lapse; None while nothing is proved."""
    moments = []
    for circuit in job.circuits:
        found = state(job, circuit.id, now)
        if found.lapses_at is not None:
            moments += [found.lapses_at - early for early in (*WARNINGS, timedelta(0))]
    later = [moment for moment in moments if moment > now]
    # A proof holds up to its last instant: the strip turns just after it.
    return min(later) + timedelta(milliseconds=1) if later else None
