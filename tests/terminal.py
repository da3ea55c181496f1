"""The app in a real pseudo-terminal, its screen read through a terminal emulator: nothing of it runs in this process."""

from __future__ import annotations

import contextlib
import fcntl
import os
import pty
import select
import signal
import struct
import sys
import termios
import threading
import time
from collections.abc import Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Self

import pyte

ROOT = Path(__file__).parent.parent


class Terminal:
    """One child on a pseudo-terminal of a given size. What it paints is kept as lines of text."""

    def __init__(
        self, command: Sequence[str], *, columns: int = 80, rows: int = 24, env: Mapping[str, str] | None = None
    ) -> None:
        self.screen = pyte.Screen(columns, rows)
        self._stream = pyte.ByteStream(self.screen)
        self._lock = threading.Lock()
        self.pid, self.fd = pty.fork()
        if self.pid == 0:
            os.chdir(ROOT)
            os.execvpe(command[0], list(command), {**os.environ, "TERM": "xterm-256color", **(env or {})})
        self.resize(columns, rows)
        self._reader = threading.Thread(target=self._read, daemon=True)
        self._reader.start()

    @classmethod
    def app(cls, job: Path, *, columns: int = 80, rows: int = 24, env: Mapping[str, str] | None = None) -> Self:
        """The app on one job file, jobs and settings kept beside it."""
        own = {"FIELDTOOL_JOBS": str(job.parent), "HOME": str(job.parent), **(env or {})}
        return cls((sys.executable, "-m", "fieldtool", str(job)), columns=columns, rows=rows, env=own)

    def _read(self) -> None:
        while True:
            try:
                data = os.read(self.fd, 65536)
            except OSError:
                return
            if not data:
                return
            # An answer to a question about the terminal is not drawn by the emulator.
            with self._lock:
                self._stream.feed(data)

    def resize(self, columns: int, rows: int) -> None:
        """Give the terminal another size, as a window manager does."""
        fcntl.ioctl(self.fd, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
        with self._lock:
            self.screen.resize(rows, columns)

    def send(self, keys: str) -> None:
        """Type: all of it in as few writes as the terminal takes."""
        data = keys.encode()
        while data:
            select.select([], [self.fd], [])
            data = data[os.write(self.fd, data) :]

    def lines(self) -> list[str]:
        """What stands on the screen."""
        with self._lock:
            return list(self.screen.display)

    def wait_for(self, words: str, seconds: float = 30.0) -> list[str]:
        """The screen, as soon as these words stand on it; AssertionError with the screen where they never do."""
        end = time.monotonic() + seconds
        while time.monotonic() < end:
            lines = self.lines()
            if any(words in line for line in lines):
                return lines
            time.sleep(0.03)
        raise AssertionError(f"{words!r} never stood on the screen:\n" + "\n".join(self.lines()))

    def settled(self, quiet: float = 0.12, most: float = 4.0) -> list[str]:
        """The screen once it has not changed for a while [s]."""
        end, before, since = time.monotonic() + most, self.lines(), time.monotonic()
        while time.monotonic() < end:
            time.sleep(0.02)
            now = self.lines()
            if now != before:
                before, since = now, time.monotonic()
            elif time.monotonic() - since >= quiet:
                break
        return before

    def kill(self) -> None:
        """End the child as a flat battery does."""
        with contextlib.suppress(ProcessLookupError):
            os.kill(self.pid, signal.SIGKILL)
        with contextlib.suppress(ChildProcessError):
            os.waitpid(self.pid, 0)
        with contextlib.suppress(OSError):
            os.close(self.fd)
        self._reader.join(2)

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, problem: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.kill()
