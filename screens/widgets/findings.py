"""One finding on one line: its mark, its sentence, its regulation. The same everywhere it is shown."""

from __future__ import annotations

from rich.text import Text

from fieldtool.answers import MARKS, Finding
from fieldtool.quantities.show import plain, shorten
from screens.base import Line
from screens.theme import Palette
from screens.words import wrapped

__all__ = ["counted", "finding_text", "told"]


def counted(findings: tuple[Finding, ...]) -> list[Finding]:
    """The findings that keep a verdict from being a plain yes, advice left out."""
    return [f for f in findings if f.outcome in ("broken", "condition", "cannot_tell") and not f.advice]


def finding_text(finding: Finding, palette: Palette, width: int, *, lead: str = "  ", strong: bool = False) -> Text:
    """A finding in ``width`` cells, its sentence cut before its regulation is."""
    mark = MARKS[finding.outcome]
    room = max(24, width - len(lead) - len(mark) - 20)
    out = Text(lead, no_wrap=True, overflow="crop", style=f"bold {palette.text}")
    out.append(mark, style=palette.mark(mark))
    says = shorten(plain(finding.says), room)
    out.append(f"  {says:<{room}}", style=f"{'bold' if strong else 'not bold'} {palette.text}")
    out.append(f"  {finding.clause}", style=f"not bold {palette.muted}")
    return out


def told(lead: str, sentences: tuple[str, ...], style: str, width: int) -> list[Line]:
    """Conditions or assumptions, each whole: what must be done before energising is never cut short."""
    out: list[Line] = []
    for sentence in sentences:
        for number, part in enumerate(wrapped(plain(sentence), max(24, width - len(lead) - 4))):
            out.append(Line(Text(f"  {lead if not number else ' ' * len(lead)}{part}", style=style)))
    return out
