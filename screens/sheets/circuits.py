"""The circuits of a job: choose the one that is worked on, or add one by its name."""

from __future__ import annotations

from rich.text import Text

from fieldtool.job.circuit import Circuit
from fieldtool.quantities.show import plain
from screens.base import Line, Sheet, Target

__all__ = ["Circuits"]


class Circuits(Sheet):
    """One line a circuit; a name typed adds one."""

    key = "circuits"
    title = "Circuits"

    def count(self) -> int:
        """The circuits."""
        return len(self.bench.job.circuits)

    def lines(self) -> list[Line]:
        """The circuits of the job."""
        out = [Line(Text(" Circuits of this job", style=f"bold {self.palette.muted}"))]
        for number, circuit in enumerate(self.bench.job.circuits):
            here = number == self.cursor
            style = f"bold {self.palette.cur[0]} on {self.palette.cur[1]}" if here else self.palette.text
            worked = "  worked on now" if circuit.id == self.bench.circuit else ""
            out.append(
                Line(
                    Text(
                        f"{'>' if here else ' '} {plain(circuit.name or circuit.id)}, labelled {circuit.label_claims}{worked}",
                        style=style,
                    ),
                    number,
                )
            )
        if not self.bench.job.circuits:
            out.append(Line(Text("  None yet. Type its name: kitchen ring.", style=self.palette.text)))
        return out

    def target(self) -> Target:
        """A name adds a circuit; Enter alone chooses the one at the cursor."""
        return Target("name of a new circuit, or Enter to choose", "text", self._commit)

    def _commit(self, typed: str) -> tuple[bool, str]:
        visit = self.bench.visit
        if visit is None:
            return False, ""
        if not typed.strip():
            circuits = visit.job.circuits
            if circuits:
                self.bench.circuit = circuits[self.cursor].id
                self.bench.close_sheet()
                self.bench.front.shown()
            return True, ""
        circuit_id = visit.new_id("c")
        claims = "ring" if "ring" in typed.lower() else "radial" if "radial" in typed.lower() else "none"
        circuit = Circuit(id=circuit_id, board=visit.job.boards[0].id, name=typed.strip()[:60], label_claims=claims)  # type: ignore[arg-type]
        problem = visit.put("circuits", circuit, "circuit added")
        if problem:
            return False, problem
        self.bench.circuit = circuit_id
        self.bench.close_sheet()
        self.bench.front.shown()
        return True, ""
