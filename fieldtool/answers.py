"""The shapes of what the core says: findings, verdicts, headroom, explanations, the next step.

A leaf of the standard library alone, so that the screens can show answers without loading what computes them.
Nothing here is stored.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

__all__ = [
    "MARKS",
    "CircuitReading",
    "EntryRemark",
    "Explanation",
    "Finding",
    "Growth",
    "Headroom",
    "Inferred",
    "Limit",
    "Mark",
    "Material",
    "Missing",
    "NextStep",
    "Odds",
    "Outcome",
    "Prediction",
    "Settle",
    "StateView",
    "Verdict",
    "VerdictWord",
    "WayAnswer",
    "worst_first",
]

Outcome = Literal["holds", "condition", "broken", "cannot_tell", "not_applicable"]
VerdictWord = Literal["go", "conditions", "stop", "more"]
Mark = Literal["ok", "if", "NO", "??", "--"]
Odds = Literal["almost_certainly", "probably", "could_be"]
Growth = Literal["rises", "falls", "mixed"]
FigureOrigin = Literal["measured", "calculated", "inferred", "assumed", "declared"]

MARKS: dict[str, Mark] = {
    "holds": "ok",
    "condition": "if",
    "broken": "NO",
    "cannot_tell": "??",
    "not_applicable": "--",
    "go": "ok",
    "conditions": "if",
    "stop": "NO",
    "more": "??",
}
"""The two-letter mark of each outcome and verdict: read aloud, and needing no colour."""

VERDICT_WORDS: dict[VerdictWord, str] = {
    "go": "GO AHEAD",
    "conditions": "GO AHEAD IF",
    "stop": "STOP",
    "more": "NOT ENOUGH YET",
}

AS_IT_STANDS: dict[VerdictWord, str] = {
    "go": "nothing found against it",
    "conditions": "could be added to, on conditions",
    "stop": "not to be added to",
    "more": "not known enough yet",
}
"""A verdict's words for a circuit to which nothing is added."""

_WORST: dict[Outcome, int] = {"broken": 0, "cannot_tell": 1, "condition": 2, "holds": 3, "not_applicable": 4}


@dataclass(frozen=True, slots=True)
class Limit:
    """A limit as a value: made once, used by the rule that judges it and by the headroom that reaches for it.

    ``basis`` says in words what is in it (edition, 80 %, Cmin); ``sure`` how sure the figure is.
    ``growth`` says how the quantity moves as new cable is added: metres of headroom exist only for ``rises``.
    """

    value: float
    unit: str
    basis: str
    table: str
    sure: str
    growth: Growth = "mixed"
    cmin: bool = False
    eighty_percent: bool = False


@dataclass(frozen=True, slots=True)
class Missing:
    """Something still to be read or seen. ``order`` sorts it into the order a visit takes things.

    ``test`` is a test key, or ``survey`` for a question of the survey whose path is ``field``
    (``supply.system``, ``circuit.rcd_covers``); ``place`` is a point id, ``board``, or the circuit's id.
    """

    test: str
    place: str
    words: str
    order: int
    field: str = ""


@dataclass(frozen=True, slots=True)
class Finding:
    """One rule's answer at one place.

    ``measured``, ``limit`` and ``tol`` (how far the meters can be off) are in ``unit``.
    ``says`` is the one-line sentence (74 cells); ``working`` the lines that a supervisor re-works by hand, values
    substituted; ``do`` what to do about it; ``assumed`` every assumption it rests on; ``limit_key`` names the
    limit for headroom; ``cures`` the cures that would turn a stop into a condition.
    """

    rule: str
    outcome: Outcome
    clause: str
    place: str
    says: str
    measured: float | None = None
    limit: float | None = None
    tol: float = 0.0
    unit: str = ""
    origin: FigureOrigin = "calculated"
    basis: Limit | None = None
    working: tuple[str, ...] = ()
    do: str = ""
    assumed: tuple[str, ...] = ()
    limit_key: str = ""
    missing: tuple[Missing, ...] = ()
    cures: tuple[str, ...] = ()
    designer_may_decide: bool = False
    overridden_by: str = ""
    figures: str = ""
    advice: bool = False
    merge_key: str = ""


@dataclass(frozen=True, slots=True)
class Headroom:
    """What is left before a limit is met.

    ``metres`` of new cable as the readings stand, ``metres_clear`` clear of the meter's tolerance, both rounded
    towards safety [m]; None with ``why`` where metres mean nothing; ``interval`` [m] for limits that do not grow
    steadily with length; ``spare`` in the limit's own unit.
    """

    limit_key: str
    place: str
    metres: float | None
    metres_clear: float | None
    spare: float | None = None
    unit: str = ""
    interval: tuple[float, float] | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class Prediction:
    """What a test must read after the work: value and band [unit], rounded towards safety."""

    test: str
    place: str
    value: float
    low: float
    high: float
    unit: str
    arrangement: str = "in_service"
    working: str = ""


@dataclass(frozen=True, slots=True)
class Material:
    """Something to fetch from the van: what, how many or how much, and its unit."""

    what: str
    amount: float
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Verdict:
    """All findings for one circuit as edited, with the margins."""

    outcome: VerdictWord
    findings: tuple[Finding, ...] = ()
    conditions: tuple[str, ...] = ()
    missing: tuple[Missing, ...] = ()
    headroom: tuple[Headroom, ...] = ()
    predicted: tuple[Prediction, ...] = ()
    governing: str = ""
    assumed: tuple[str, ...] = ()
    figures: str = ""

    def reasons(self, outcome: Outcome) -> tuple[Finding, ...]:
        """The findings with this outcome, in the verdict's own order."""
        return tuple(finding for finding in self.findings if finding.outcome == outcome)


@dataclass(frozen=True, slots=True)
class WayAnswer:
    """One way of adding for one request: its verdict, or the reason it does not serve here."""

    way: str
    words: str
    verdict: Verdict | None
    refused: str = ""
    applies: bool = True
    rank: int = 0
    stopped_by: str = ""
    material: tuple[Material, ...] = ()
    repeat_tests: tuple[str, ...] = ()
    document: str = ""
    work: int = 0

    @property
    def outcome(self) -> VerdictWord:
        """The verdict's word; a way that does not serve here is a stop."""
        return self.verdict.outcome if self.verdict is not None else "stop"


@dataclass(frozen=True, slots=True)
class Inferred:
    """A length, place or size that the readings imply, with its band [unit of ``what``]."""

    what: str
    place: str
    value: float
    low: float
    high: float
    unit: str = "m"


@dataclass(frozen=True, slots=True)
class Explanation:
    """One thing the circuit could be. Explanations with the same ``group`` cannot be told apart by these readings.

    ``stops_ring`` is True where ring-based ways wait until it is settled; ``predicted`` pairs each reading's cell
    with the value this explanation gives. ``stands`` is False where the leading explanation is more than twenty
    times as likely: it is shown, and nothing waits for it. ``test`` is the test whose readings a slip is in.
    """

    id: str
    group: str
    odds: Odds
    sentence: str
    where: tuple[str, ...] = ()
    inferred: tuple[Inferred, ...] = ()
    reasoning: tuple[str, ...] = ()
    predicted: tuple[tuple[str, str, float], ...] = ()
    stops_ring: bool = False
    danger: bool = False
    healthy: bool = False
    stands: bool = True
    test: str = ""


@dataclass(frozen=True, slots=True)
class Settle:
    """The next test that would tell the leading explanations apart."""

    test: str
    place: str
    sentence: str


@dataclass(frozen=True, slots=True)
class CircuitReading:
    """What the readings say the circuit is, best explanation first; empty while they say nothing yet."""

    sentence: str
    explanations: tuple[Explanation, ...] = ()
    settle: Settle | None = None
    shown_ring: bool = False
    nothing_fits: bool = False
    remarks: tuple[tuple[str, str], ...] = ()
    """Sentence beside a cell's row: (place, up to 38 cells)."""
    smallest_spur_m: float | None = None

    @property
    def leading(self) -> Explanation | None:
        """The best explanation, or None."""
        return self.explanations[0] if self.explanations else None


@dataclass(frozen=True, slots=True)
class EntryRemark:
    """What is said beside an entry as it is made: ``doubt`` marks it ``??`` until confirmed."""

    sentence: str
    doubt: bool = False
    expect: str = ""


@dataclass(frozen=True, slots=True)
class NextStep:
    """The one next safe step: one imperative line, why, and what it would do if accepted.

    ``kind`` is an isolation entry's kind, a test key, ``survey``, ``put_back``, ``part``, ``settle``, ``work``,
    ``choose``, ``hand_over`` or ``done``; ``place``, ``circuit`` and ``field`` say where.
    """

    sentence: str
    why: str
    kind: str
    place: str = ""
    circuit: str = ""
    field: str = ""
    test: str = ""


StateWord = Literal["not_known", "live", "off_not_proved", "proved_dead", "board_dead", "origin_test"]


@dataclass(frozen=True, slots=True)
class StateView:
    """The three lines of the strip, whole: state plate, next safe step, reminders.

    ``plate`` is the state in words (row 1), ``mind`` the reminders (58 cells); ``hot`` is True for every state
    that is treated as live.
    """

    state: StateWord
    plate: str
    plate_ascii: str
    mind: str
    hot: bool
    places: tuple[str, ...] = ()
    lapses_at: str = ""
    parted: tuple[str, ...] = ()


def worst_first(findings: tuple[Finding, ...]) -> tuple[Finding, ...]:
    """Findings ordered as every list shows them: worst outcome, then rule id, then place."""
    return tuple(sorted(findings, key=lambda f: (_WORST[f.outcome], f.rule, f.place)))
