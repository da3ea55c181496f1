"""No network: a whole visit with every socket refused."""

from __future__ import annotations

import socket
from datetime import UTC, datetime
from pathlib import Path

import pytest

from fieldtool.jobfile.shelf import open_sample
from fieldtool.record.paper import record_bytes
from fieldtool.verdict.contract import contract
from fieldtool.visit import Visit
from tests.jobs import SAMPLES


def test_a_visit_opens_no_socket(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_: object, **__: object) -> None:
        raise AssertionError("a socket was opened")

    monkeypatch.setattr(socket, "socket", refused)
    monkeypatch.setattr(socket, "create_connection", refused)
    monkeypatch.setattr(socket, "getaddrinfo", refused)
    path = open_sample(SAMPLES / "larch_row.json", tmp_path)
    visit = Visit.open(path, clock=lambda: datetime(2026, 12, 1, 10, 0, tzinfo=UTC))
    assert visit.enter(("c3", "p1", "zs", "as_found"), "0.31", mode="high_current").accepted
    assert visit.ways("q1")
    assert visit.keep_verdict("q1", "kept") == ""
    for suffix in (".pdf", ".html"):
        assert len(record_bytes(visit.job, suffix, visit.clock())) > 10_000
    visit.close()
    assert contract(visit.job)["exit"] == 0
