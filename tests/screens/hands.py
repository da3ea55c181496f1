"""A pair of hands that does what NEXT says, by the keys that the screen names, in a real terminal.

It knows no more than the words of the screen and what a meter would show; where NEXT leads nowhere it stops.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

from fieldtool.jobfile.opening import JobFile
from tests.jobs import NOON, facts, made
from tests.terminal import Terminal

F2, F3, F4, F5, F9 = "\x1bOQ", "\x1bOR", "\x1bOS", "\x1b[15~", "\x1b[20~"
METER = {
    "Ze": "0.20", "prospective": "1.2", "line end": "0.60", "neutral end": "0.60", "cpc end": "1.00",
    "L-N crossed": "0.30", "L-E crossed": "0.40", "IR": "200", "Zs": "0.66", "RCD trip": "24", "R1+R2": "0.45",
}  # fmt: skip
"""What the meter shows, by words of the cell's name: a ring of 81 m, the new outlet 3 m away."""

OFFERS = (
    ("Main switch off", "main switch off"), ("Take the join off", "off, checked open"), ("Take off", "off, checked open"),
    ("put legs", "all of these back"), ("join L to N", "joined: L to N"), ("join L to E", "joined: L to E"),
    ("link line to earth", "joined: line to earth"), ("part and mark", "parted and marked"),
    ("log it restored", "supply restored"), ("restore the supply", "supply restored"), ("Hand over", "handed over"),
    ("Insulate dead ends", "left insulated"),
)  # fmt: skip
"""What NEXT says, and the words of the offer that says it was done."""


def short_ring(folder: Path) -> Path:
    """A ring of three sockets of which nothing was read yet, and one outlet asked for; invented."""
    body = facts("larch_row")
    request = body["requests"][0]
    outlet = {**request["outlets"][0], "id": "w1", "name": "new w1", "kind": "twin", "metres": 3.0}
    body["readings"], body["runs"], body["loads"], body["isolation"], body["parted"] = [], [], [], [], []
    body["points"] = [point for point in body["points"] if point["id"] in ("p1", "p2", "p5")]
    body["requests"] = [
        {"id": "q1", "circuit": "c3", "attach": "point", "at": "p5", "outlets": [outlet], "route": request["route"]}
    ]
    path = folder / "ring.json"
    JobFile.create(path, made(body), NOON).close()
    return path


class Stuck(AssertionError):
    """NEXT asked for something that its own keys do not do."""


class Hands:
    """Does what NEXT says until it says that nothing is left."""

    def __init__(self, terminal: Terminal) -> None:
        self.terminal = terminal
        self.told: list[str] = []

    def key(self, keys: str, shows: str = "", gone: str = "", quiet: float = 0.08) -> list[str]:
        """Press, and look until the screen shows these words (or they are gone) and has come to rest."""
        self.terminal.send(keys)
        for _ in range(200):
            lines = self.terminal.settled(quiet)
            text = "\n".join(lines)
            if (not shows or re.search(shows, text)) and (not gone or gone not in text):
                return lines
        raise Stuck(f"{keys!r}: {shows or gone}\n" + "\n".join(self.terminal.lines()))

    def next(self) -> str:
        """The next step, once the verdict is worked out."""
        for _ in range(40):
            said = self.terminal.settled(0.2)[1]
            if "worked out" not in said and "NEXT" in said:
                return said.strip()
        raise Stuck("the verdict was never worked out")

    def visit(self, until: Callable[[str], bool] = lambda said: "Nothing left" in said, most: int = 130) -> str:
        """Follow NEXT until it says what ``until`` waits for; what it then says."""
        said = ""
        for _ in range(most):
            before, said = said, self.next()
            if until(said):
                return said
            if said == before and said == (self.told[-2] if len(self.told) > 1 else ""):
                raise Stuck("\n".join([*self.told[-6:], *self.terminal.lines()]))
            self.told.append(said)
            self.step(said)
        raise Stuck("\n".join([*self.told[-6:], *self.terminal.lines()]))

    def step(self, said: str) -> None:
        """One step."""
        if "F9 +" in said:
            self.say(next((offer for words, offer in OFFERS if words in said), "no such offer"))
        elif re.search(r"F9[.:]", said):
            self._log()
        elif "Choose the way" in said:
            self.key(F3, r"\[F3")
            if "RCD trip" in self.terminal.lines()[-2]:
                self.key(f"{METER['RCD trip']}\r", gone="RCD trip")
                self.next()
            self.key(F4, r"\[F4")
            self.key("/", "Enter chooses it")
            self.key("1", "> ok  1 ")
            self.key("\r", r"\[F5")
        elif (pane := re.search(r"(F5), then (\d)", said)) is not None:
            self.key(F5, r"\[F5.*\]")
            self.key(pane.group(2), "Logged|is kept")
            self.key(F3, r"\[F3")
        elif re.search(r"[Rr]ead |right", said):
            self._reading()
        else:
            raise Stuck("\n".join([said, *self.terminal.lines()]))

    def say(self, offer: str) -> None:
        """Say on the sheet of what is parted, joined and restored that something was done."""
        self.key(F9, "Isolation log ")
        shown = self.key("+", "Say what your hands have done")
        lines = [line for line in shown if re.match(r"^[> ] [\d ]  \w", line)]
        place = next((number for number, line in enumerate(lines) if offer in line), None)
        if place is None:
            raise Stuck("\n".join([offer, *self.terminal.lines()]))
        self.key("\x1b[B" * place + "\r", quiet=0.2)
        self.key(F9, "Isolation log ")
        self.key(F9, gone="Isolation log ")

    def _log(self) -> None:
        lines = self.key(F9, r"\n> \d ")
        due = next(line for line in lines if re.match(r"^> \d ", line))
        # The log takes no two steps within the time that hands need.
        asked = self.key(due[2], quiet=0.7)[-2]
        if "all well" in asked:
            self.key("1")
        elif "volts" in asked:
            self.key("0\r", "L-E volts")
            self.key("0\r", "N-E volts")
            self.key("0\r", "digit does")
        elif "tester" in asked:
            self.key("TESTER 2\r", "digit does")
        elif "digit does" not in asked:
            self.key("occupier\r", "digit does")
        self.key(F9, gone="Isolation log ")

    def _reading(self) -> None:
        self.key(F3, r"\[F3")
        cell = self.key("/", quiet=0.15)[-2]
        shown = next((value for words, value in METER.items() if words in cell), None)
        if "1 right" in cell:
            self.key("1")
        elif shown is not None:
            self.key(f"{shown}\r")
        else:
            raise Stuck("\n".join(self.terminal.lines()))
