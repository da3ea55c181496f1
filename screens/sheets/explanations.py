"""Everything the readings could mean, best first, with the reasoning and the test that would settle it."""

from __future__ import annotations

from rich.text import Text

from fieldtool.quantities.show import plain
from screens.base import Line, Sheet, Target

__all__ = ["Explanations"]

_ODDS = {"almost_certainly": "almost certainly", "probably": "probably", "could_be": "could be"}


class Explanations(Sheet):
    """One line an explanation; its reasoning below it."""

    key = "explanations"
    title = "What the readings say"

    def lines(self) -> list[Line]:
        """Explanations, reasoning, what to test next."""
        visit, circuit, palette = self.bench.visit, self.bench.circuit, self.palette
        if visit is None or circuit is None:
            return []
        reading = visit.circuit_reading(circuit)
        claims = visit.job.circuit(circuit).label_claims
        out = [
            Line(
                Text(
                    f" labelled {claims}; shown to be a ring: {'yes' if reading.shown_ring else 'not yet'}",
                    style=f"bold {palette.muted}",
                )
            )
        ]
        for item in reading.explanations:
            out.append(Line(Text(f"  {_ODDS[item.odds]}: {plain(item.sentence)}", style=palette.text)))
            out += [Line(Text(f"      {plain(line)}", style=palette.muted)) for line in item.reasoning]
            for one in item.inferred:
                place = visit.job.point_name(one.place) if one.place != circuit else "the ring"
                words = one.what.removesuffix("_m").removesuffix("_ohm").replace("_", " ")
                out.append(
                    Line(
                        Text(
                            f"      {words}, {plain(place)}: about {one.value:.1f} {one.unit}, {one.low:.1f} to {one.high:.1f}",
                            style=palette.muted,
                        )
                    )
                )
        if not reading.explanations:
            out.append(
                Line(Text(f"  {reading.sentence or 'Nothing was read that says anything yet.'}", style=palette.text))
            )
        if reading.settle is not None:
            out.append(Line(Text(f"  what would settle it: {reading.settle.sentence}", style=palette.text)))
        if reading.smallest_spur_m:
            out.append(
                Line(
                    Text(
                        f"  a spur shorter than about {reading.smallest_spur_m:g} m does not show", style=palette.muted
                    )
                )
            )
        return out

    def target(self) -> Target:
        """Enter goes back."""
        return Target("Enter: back", "none", lambda _: (self.bench.close_sheet(), ""))

    def back(self) -> None:
        """``-``: back."""
        self.bench.close_sheet()
