"""One open job, whole: what was entered, what the core answers, and the isolation log."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from datetime import datetime
from typing import Any, cast

from fieldtool.answers import (
    CircuitReading,
    Missing,
    StateView,
    Verdict,
    WayAnswer,
)
from fieldtool.job.changes import (
    Change,
    Put,
    new_ids,
)
from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job
from fieldtool.job.kinds import IsolationKind, Stage
from fieldtool.job.reading import Cell
from fieldtool.job.request import KeptFinding, Override, VerdictKept
from fieldtool.reference.edition import EDITION, RULE_SET
from fieldtool.safety.after import after_work
from fieldtool.visit.entering import Entering

__all__ = ["Visit", "warm"]


class Visit(Entering):
    """An open job with its file, its clock and its answers."""

    # answers ------------------------------------------------------------------------------------------------
    def _cached(self, key: tuple[Any, ...], make: Callable[[], Any]) -> Any:
        if key not in self._memo:
            self._memo[key] = make()
        return self._memo[key]

    def circuit_reading(self, circuit_id: str, stage: str = "as_found") -> CircuitReading:
        """What the readings say the circuit is."""
        from fieldtool.diagnosis.explain import explain

        return cast(
            CircuitReading,
            self._cached(("reading", circuit_id, stage), lambda: explain(self.job, circuit_id, stage)),
        )

    def existing(self, circuit_id: str) -> Verdict:
        """The circuit as it stands, judged."""
        from fieldtool.verdict.compare import existing

        return cast(
            Verdict,
            self._cached(
                ("existing", circuit_id), lambda: existing(self.job, circuit_id, self.circuit_reading(circuit_id))
            ),
        )

    def ways(self, request_id: str) -> tuple[WayAnswer, ...]:
        """Every way for one request, best first."""
        from fieldtool.verdict.compare import compare

        request = self.job.request(request_id)
        return cast(
            "tuple[WayAnswer, ...]",
            self._cached(
                ("ways", request_id), lambda: compare(self.job, request, self.circuit_reading(request.circuit))
            ),
        )

    def has_ways(self, request_id: str) -> bool:
        """True where the ways of a request are already worked out for the job as it stands."""
        return ("ways", request_id) in self._memo

    def asks(self, request_id: str) -> bool:
        """True where a request asks for something."""
        request = self.job.request(request_id)
        return bool(request.outlets) or request.swap is not None

    def adopt(
        self, job: Job, request_id: str, circuit_id: str, reading: CircuitReading, ways: tuple[WayAnswer, ...]
    ) -> bool:
        """Take over answers that were worked out elsewhere. False, and nothing kept, when the job moved on."""
        if job is not self.job:
            return False
        self._memo[("reading", circuit_id, "as_found")] = reading
        self._memo[("ways", request_id)] = ways
        return True

    def answer(self, request_id: str) -> WayAnswer | None:
        """The answer for the way that was chosen, else for the best one; None where nothing is asked for."""
        request = self.job.request(request_id)
        if not request.outlets and request.swap is None:
            return None
        answers = self.ways(request_id)
        if request.chosen_way is not None:
            return next((item for item in answers if item.way == request.chosen_way), None)
        real = (item for item in answers if item.applies and item.way != "leave_it")
        return next(real, answers[0] if answers else None)

    def verdict(self, request_id: str) -> Verdict | None:
        """The verdict of the chosen way, else of the best one."""
        found = self.answer(request_id)
        return found.verdict if found is not None else None

    def repeat_tests(self, request_id: str) -> tuple[str, ...]:
        """The tests that the chosen way calls for after the work; empty while the ways are not worked out."""
        if not self.has_ways(request_id) or not self.asks(request_id):
            return ()
        found = self.answer(request_id)
        return found.repeat_tests if found is not None else ()

    def walk(self, circuit_id: str, by: str = "test", stage: Stage = "as_found") -> tuple[Cell, ...]:
        """The cells of one circuit in the order a visit takes them; after the work those of the chosen way alone."""
        request_id = self.request_of(circuit_id) if stage == "after_work" else None
        repeat = self.repeat_tests(request_id) if request_id is not None else ()
        if request_id is None or not repeat or self.job.request(request_id).chosen_way is None:
            return super().walk(circuit_id, by, stage)
        due = after_work(self.job, self.job.request(request_id), repeat)
        return tuple((circuit_id, None if place == circuit_id else place, test, stage) for test, place, _ in due)

    def request_of(self, circuit_id: str) -> str | None:
        """The newest request on a circuit; None where there is none."""
        mine = [request.id for request in self.job.requests if request.circuit == circuit_id]
        return mine[-1] if mine else None

    def judged(self, circuit_id: str) -> Verdict:
        """The verdict that stands for a circuit now: of its request where there is one, else as it stands."""
        request_id = self.request_of(circuit_id)
        found = self.verdict(request_id) if request_id is not None else None
        return found if found is not None else self.existing(circuit_id)

    def missing(self, circuit_id: str) -> tuple[Missing, ...]:
        """What is still to be read or seen, in the order a visit takes it."""
        return self.judged(circuit_id).missing

    def keep_verdict(self, request_id: str, why: str) -> str:
        """Keep the verdict as it stands now, with its figures and the rule set, for whoever re-works it later."""
        found = self.answer(request_id)
        if found is None or found.verdict is None:
            return "There is no verdict to keep yet."
        self.job, (row_id,) = new_ids(self.job, ["v"])
        row = VerdictKept(
            id=row_id,
            request=request_id,
            way=found.way,
            at=self.clock(),
            why=cast(Any, why),
            rule_set=RULE_SET,
            edition=EDITION,
            figures=found.verdict.figures[:200],
            outcome=found.verdict.outcome,
            findings=tuple(
                KeptFinding(
                    rule=f.rule, place=f.place, outcome=f.outcome, measured=f.measured, limit=f.limit, unit=f.unit
                )
                for f in found.verdict.findings
                if f.outcome != "not_applicable"
            ),
        )
        return self._apply([Put("verdicts", row)], why="verdict kept")

    def override(self, request_id: str, rule: str, place: str, by: str, reason: str) -> str:
        """Record a designer's decision on one finding, bound to the figures as they are."""
        judged = [item.verdict for item in self.ways(request_id) if item.verdict is not None]
        finding = next(
            (
                f
                for verdict in judged
                for f in verdict.findings
                if (f.rule, f.place, f.outcome) == (rule, place, "broken")
            ),
            None,
        )
        if finding is None:
            return "There is nothing here for a designer to decide."
        if not finding.designer_may_decide:
            return "The standard leaves no choice here; nothing was recorded."
        if not reason.strip():
            return "Give the reason: it stands on the record."
        self.job, (row_id,) = new_ids(self.job, ["d"])
        row = Override(
            id=row_id,
            request=request_id,
            rule=rule,
            place=place,
            rule_set=RULE_SET,
            figures=finding.figures,
            by=by,
            reason=reason,
            at=self.clock(),
        )
        return self._apply([Put("overrides", row)], why="designer's decision")

    # safety -------------------------------------------------------------------------------------------------
    def strip(self, circuit_id: str | None) -> StateView:
        """The state plate and the reminders, for the strip."""
        from fieldtool.safety.strip import strip

        return strip(self.job, circuit_id, self.now())

    def next_change(self) -> datetime | None:
        """When the strip changes by itself: a warning or a lapse."""
        from fieldtool.safety.states import next_change

        return next_change(self.job, self.now())

    def log_steps(self, circuit_id: str, place: str = "board") -> tuple[Any, ...]:
        """The steps of the isolation log for one circuit at one place."""
        from fieldtool.safety.log import steps

        return steps(self.job, circuit_id, self.now(), place=place)

    def log(
        self,
        kind: IsolationKind,
        circuit_id: str | None,
        *,
        place: str = "board",
        detail: str = "",
        volts: tuple[float, float, float] | None = None,
        found_well: bool | None = None,
        tester: str = "",
        proving_unit: str = "",
    ) -> str:
        """Log one step of the isolation. Empty when it is kept, else why not and what comes first."""
        from fieldtool.safety.log import Refused, accept

        self.job, (row_id,) = new_ids(self.job, ["i"])
        tick = self.running_s()
        answer = accept(
            self.job,
            kind,
            circuit_id,
            self.clock(),
            entry_id=row_id,
            place=place,
            detail=detail,
            volts=volts,
            found_well=found_well,
            tester=tester,
            proving_unit=proving_unit,
            tick_s=tick,
            last_tick_s=self._last_log_tick,
        )
        if isinstance(answer, Refused):
            return answer.sentence
        self._last_log_tick = tick
        return self._apply([Put("isolation", answer.entry)], why="isolation log")

    def strike(self, entry_id: str, why: str = "a mistake") -> str:
        """Strike an entry of the log through. It stays to be read, and can only lower the state."""
        entry = next((row for row in self.job.isolation if row.id == entry_id), None)
        if entry is None:
            return "There is no such entry in the log."
        self.job, (row_id,) = new_ids(self.job, ["i"])
        row = IsolationEntry(
            id=row_id,
            kind="struck",
            board=entry.board,
            circuit=entry.circuit,
            at=self.clock(),
            strikes=entry_id,
            detail=why,
        )
        return self._apply([Put("isolation", row)], why="struck through")

    def part(self, circuit_id: str, what: str, sort: str, conductor: str = "", place: str = "board") -> str:
        """Log something parted from its terminals, or joined for a test."""
        from fieldtool.safety.parting import may_part

        refused = may_part(self.job, circuit_id, what, cast(Any, sort), self.now(), place)
        if refused:
            return refused
        from fieldtool.job.isolation import Parted

        self.job, (row_id,) = new_ids(self.job, ["x"])
        row = Parted(
            id=row_id,
            circuit=circuit_id,
            what=what,
            sort=cast(Any, sort),
            conductor=conductor,
            place=place,
            at=self.clock(),
        )
        return self._apply([Put("parted", row)], why=sort)

    def part_all(self, circuit_id: str, things: Sequence[tuple[str, str]], place: str = "board") -> str:
        """Log several conductors parted together, as one entry: they were parted in one go."""
        from fieldtool.job.isolation import Parted
        from fieldtool.safety.parting import may_part, outstanding

        known = {row.what for row in outstanding(self.job, circuit_id)}
        changes: list[Change] = []
        for what, conductor in things:
            if what in known:
                continue
            refused = may_part(self.job, circuit_id, what, "parted", self.now(), place)
            if refused:
                return refused
            self.job, (row_id,) = new_ids(self.job, ["x"])
            changes.append(
                Put(
                    "parted",
                    Parted(
                        id=row_id,
                        circuit=circuit_id,
                        what=what,
                        sort="parted",
                        conductor=conductor,
                        place=place,
                        at=self.clock(),
                    ),
                )
            )
        return self._apply(changes, why="parted")

    def metres_left(self, circuit_id: str) -> dict[str, str]:
        """How far an unfused spur (or, on a radial, a branch) could reach from each point [m], as the map shows it."""
        from fieldtool.verdict.reach import reach

        found = reach(self.job, circuit_id, self.circuit_reading(circuit_id))
        return {point: "--" if metres is None else f"{metres:g}" for point, metres in found.items()}

    def leg_shares(self, circuit_id: str) -> dict[str, str]:
        """What the heavier leg carries of 20 A taken at each point of a ring [A]; empty where it is no ring."""
        from fieldtool.verdict.reach import heavier_leg

        return {point: f"{amps:.1f}" for point, amps in heavier_leg(self.job, circuit_id).items()}

    def put_back(self, parted_id: str) -> str:
        """Say that something parted is back in its terminals, or that something joined is off and proved open."""
        row = next((item for item in self.job.parted if item.id == parted_id), None)
        if row is None or row.back_at is not None:
            return "That is not parted or joined."
        return self._apply([Put("parted", row.model_copy(update={"back_at": self.clock()}))], why="put back")


def warm() -> None:
    """Import what the first answer needs, after the first paint, so that no entry waits for it."""
    from fieldtool.quantities import units

    units.warm()
