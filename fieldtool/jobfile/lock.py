"""One writer for each job: a lock that dies with its process, and a note of who holds it."""

from __future__ import annotations

import contextlib
import getpass
import json
import os
import socket
from datetime import datetime
from pathlib import Path

from filelock import FileLock, Timeout

__all__ = ["WriterLock"]


class WriterLock:
    """The writer's lock of one job file. The file of the lock stays; the lock itself goes with its process."""

    def __init__(self, path: Path) -> None:
        self._lock = FileLock(str(path.with_name(f".{path.name}.lock")), timeout=0, mode=0o600)
        self._who = path.with_name(f".{path.name}.holder")

    def take(self, now: datetime) -> bool:
        """Take the lock if nobody alive holds it. True when it is ours."""
        try:
            self._lock.acquire()
        except Timeout:
            return False
        except OSError:
            # A folder that cannot be written has no writer.
            return False
        said = {"user": _user(), "host": socket.gethostname(), "pid": os.getpid(), "since": now.isoformat()}
        with contextlib.suppress(OSError):
            self._who.write_text(json.dumps(said), encoding="utf-8")
            os.chmod(self._who, 0o600)
        return True

    def holder(self) -> str:
        """One sentence about who writes this job now."""
        try:
            said = json.loads(self._who.read_text(encoding="utf-8"))
            since = datetime.fromisoformat(str(said["since"])).astimezone().strftime("%H:%M")
            name = "".join(char for char in f"{said['user']} on {said['host']}" if char.isprintable())[:24]
        except (OSError, ValueError, KeyError, TypeError):
            return "Somebody else has this job open. Here you can read it; it keeps up."
        return f"{name} has this job since {since}. Here you can read it; it keeps up."

    def release(self) -> None:
        """Let the job go."""
        if self._lock.is_locked:
            with contextlib.suppress(OSError):
                self._who.unlink()
            self._lock.release()


def _user() -> str:
    try:
        return getpass.getuser()
    except (KeyError, OSError):
        return "somebody"
