"""The strip: state plate and reminders, each a whole sentence within its cells."""

from __future__ import annotations

from datetime import datetime

from fieldtool.answers import StateView, StateWord
from fieldtool.job.isolation import Parted
from fieldtool.job.job import Job
from fieldtool.quantities.show import cells, shorten
from fieldtool.reference.edition import EDITION_SHORT
from fieldtool.safety.budget import MIND_CELLS, fit, name_of
from fieldtool.safety.parting import earth_unproved, outstanding
from fieldtool.safety.states import WARNINGS, CircuitState, state

__all__ = ["strip"]

_PLATES: dict[StateWord, tuple[str, str]] = {
    "not_known": ("??? NOT KNOWN: TREAT AS LIVE ???", "??? NOT KNOWN: TREAT AS LIVE ???"),
    "live": ("~~~ LIVE ~~~", "~~~ LIVE ~~~"),
    "off_not_proved": ("─/ ─ OFF, NOT PROVED DEAD: TREAT AS LIVE", "-/ - OFF, NOT PROVED DEAD: TREAT AS LIVE"),
    "origin_test": ("~~~ ORIGIN TEST: INCOMING LIVE ~~~", "~~~ ORIGIN TEST: INCOMING LIVE ~~~"),
    "proved_dead": ("═══ PROVED DEAD ═══", "=== PROVED DEAD ==="),
    "board_dead": ("═══ BOARD DEAD, INCOMING LIVE ═══", "=== BOARD DEAD, INCOMING LIVE ==="),
}

_WORST: tuple[StateWord, ...] = ("live", "origin_test", "not_known", "off_not_proved", "proved_dead", "board_dead")


def strip(job: Job, circuit_id: str | None, now: datetime) -> StateView:
    """The strip's plate and reminders. Without a circuit, the worst state of all circuits that were touched."""
    if circuit_id is None:
        touched = {entry.circuit for entry in job.isolation if entry.circuit}
        states = [state(job, item, now) for item in sorted(touched)]
        found = min(states, key=lambda item: _WORST.index(item.word), default=CircuitState("not_known"))
        if found.dead:
            # Proved dead is said of a circuit that was chosen, never of a shelf or a board.
            found = CircuitState("not_known", reason="No circuit chosen: treat every circuit as live.")
    else:
        found = state(job, circuit_id, now)
    plate, plain = _PLATES[found.word]
    if found.dead and found.proved_at is not None and found.lapses_at is not None:
        where = ", ".join(name_of(job, place) for place in found.places[:2])
        more = f" +{len(found.places) - 2}" if len(found.places) > 2 else ""
        at = "" if found.word == "board_dead" else f" at {where}{more}"
        tail = f"{at} {_clock(found.proved_at, now)}, lapses {_clock(found.lapses_at, now)}"
        plate, plain = plate + tail, plain + tail
    return StateView(
        state=found.word,
        plate=plate,
        plate_ascii=plain,
        mind=_mind(job, circuit_id, found, now),
        hot=not found.dead,
        places=found.places,
        lapses_at="" if found.lapses_at is None else _clock(found.lapses_at, now),
        parted=tuple(row.what for row in outstanding(job)),
    )


def _mind(job: Job, circuit_id: str | None, found: CircuitState, now: datetime) -> str:
    said: list[str] = []
    if found.lapses_at is not None:
        left = found.lapses_at - now
        for early in sorted(WARNINGS):
            if left <= early:
                said.append(f"Proof lapses in {int(left.total_seconds() // 60)} min.")
                break
    rows = outstanding(job)
    for sort, word in (("joined", "Joined"), ("parted", "Parted")):
        mine = [row for row in rows if row.sort == sort]
        if mine:
            said.append(f"{word}: {_parted_words(job, mine)}.")
    if circuit_id is not None and not rows and earth_unproved(job, circuit_id):
        said.append("Earth back, not proved: one live Zs.")
    detail = dict(found.detail)
    if "locked" in detail:
        said.append("Locked, key kept.")
    if not said:
        return fit(EDITION_SHORT, MIND_CELLS)
    # Whole sentences only, the most pressing first: one that would be cut is left to the log.
    kept = said[0]
    for more in said[1:]:
        if cells(f"{kept} {more}") <= MIND_CELLS:
            kept = f"{kept} {more}"
    return fit(kept, MIND_CELLS)


def _parted_words(job: Job, rows: list[Parted]) -> str:
    conductors = [row.conductor for row in rows]
    legs = [letter for letter, key in (("L", "line"), ("N", "neutral"), ("E", "cpc")) if key in conductors]
    if rows[0].sort == "parted" and len(legs) == len(rows):
        return f"legs {' '.join(legs)} at {name_of(job, rows[0].place)}"
    if rows[0].sort == "joined" and rows[0].conductor == "cross":
        return f"{'L-N' if 'to N' in rows[0].what else 'L-E'} crossed at board"
    first = shorten(rows[0].what, 28)
    return first if len(rows) == 1 else f"{first} +{len(rows) - 1}"


def _clock(moment: datetime, now: datetime) -> str:
    """Local time as HH:MM, with the day in front when it is not today."""
    here, today = moment.astimezone(), now.astimezone()
    return f"{here:%H:%M}" if here.date() == today.date() else f"{here:%a %H:%M}"
