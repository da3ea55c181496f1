"""The last net: an error that nobody foresaw goes into a file for whoever mends it, never onto a user's screen."""

from __future__ import annotations

import traceback
from datetime import UTC, datetime
from pathlib import Path

from platformdirs import user_log_path

__all__ = ["keep"]

_MOST_BYTES = 1_000_000
"""A log larger than this is begun anew."""


def keep(problem: BaseException) -> Path | None:
    """Append an error with its place in the code to the log file; the file, or None where it cannot be written."""
    path = user_log_path("fieldtool", appauthor=False) / "mishaps.log"
    told = f"{datetime.now(UTC).isoformat(timespec='seconds')}\n{''.join(traceback.format_exception(problem))}\n"
    try:
        path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
        anew = path.exists() and path.stat().st_size > _MOST_BYTES
        with path.open("w" if anew else "a", encoding="utf-8") as log:
            log.write(told)
        path.chmod(0o600)
    except OSError:
        return None
    return path
