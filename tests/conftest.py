"""What every test stands on: a home of its own, a fixed zone, no colours switched off, and honest skips."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

settings.register_profile(
    "ci", max_examples=60, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow]
)
settings.register_profile("deep", max_examples=2000, deadline=None)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "ci"))

OUTSIDE_PROGRAMS = ("ngspice", "tmux", "chromium")


@pytest.fixture(autouse=True)
def _home_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("FIELDTOOL_JOBS", str(tmp_path / "jobs"))
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setattr("screens.app.FieldApp.strict", True)


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    for program in OUTSIDE_PROGRAMS:
        if shutil.which(program) is None:
            terminalreporter.write_line(
                f"NOT CHECKED AGAINST {program}: it is not installed here; its tests were skipped", red=True
            )


def pytest_sessionfinish(session: pytest.Session, exitstatus: int) -> None:
    if os.environ.get("FIELDTOOL_REQUIRE_OUTSIDE") and any(shutil.which(p) is None for p in OUTSIDE_PROGRAMS):
        session.exitstatus = 1
