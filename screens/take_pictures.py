"""Takes the pictures of the README from the sample jobs: ``python -m screens.take_pictures`` (needs rsvg-convert)."""

from __future__ import annotations

import asyncio
import os
import subprocess
import tempfile
from datetime import UTC, datetime
from pathlib import Path

__all__ = ["main"]

HERE = Path(__file__).parent
SHOTS = (("readings", ()), ("survey", ("f2",)), ("proposal", ("f4", "slash")), ("verdict", ("f5",)), ("map", ("f7",)))
"""Each picture's name and the keys that lead to it."""

_AT = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


async def _take(size: tuple[int, int]) -> None:
    from fieldtool.jobfile.shelf import open_sample
    from fieldtool.visit import Visit
    from screens.app import FieldApp

    sample = HERE.parent / "sample_jobs" / "larch_row.json"
    for name, keys in SHOTS:
        with tempfile.TemporaryDirectory() as folder:
            visit = Visit.open(open_sample(sample, Path(folder)), clock=lambda: _AT)
            app = FieldApp(visit, clock=lambda: _AT)
            async with app.run_test(size=size) as pilot:
                while app.bench is None or not app.bench.warm:
                    await pilot.pause(0.05)
                await pilot.pause(1.0)
                for key in keys:
                    await pilot.press(key)
                await pilot.pause(0.5)
                svg = app.export_screenshot().replace("<svg ", '<svg xml:space="preserve" ', 1)
        target = HERE / "pictures" / f"{name}-{size[0]}x{size[1]}"
        target.with_suffix(".svg").write_text(svg, encoding="utf-8")
        subprocess.run(["rsvg-convert", f"{target}.svg", "-o", f"{target}.png"], check=True)
        target.with_suffix(".svg").unlink()


def main() -> None:
    """Every picture at 80 by 24."""
    os.environ.pop("NO_COLOR", None)
    (HERE / "pictures").mkdir(exist_ok=True)
    asyncio.run(_take((80, 24)))


if __name__ == "__main__":
    main()
