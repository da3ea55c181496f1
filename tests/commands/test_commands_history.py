"""The history as a command: who entered what when, and without the customer where it is passed on."""

from __future__ import annotations

import io
from pathlib import Path

import pytest

from fieldtool.commands import history
from fieldtool.visit import Visit
from tests.jobs import NOON, facts, written


def told(path: Path, *more: str) -> str:
    out, err = io.StringIO(), io.StringIO()
    assert history.run([str(path), *more], out, err) == 0
    assert err.getvalue() == ""
    return out.getvalue()


@pytest.mark.parametrize("form", [(), ("--json",)])
def test_what_names_the_customer_is_left_out_and_what_was_read_stays(tmp_path: Path, form: tuple[str, ...]) -> None:
    body = facts("larch_row")
    body["site"].update(customer="Mrs Quillfeather", address="9 Nowhere Lane")
    path = written(tmp_path / "job.json", body)
    visit = Visit.open(path, clock=lambda: NOON)
    point = visit.job.points[0]
    visit.enter((point.circuit, point.id, "zs", "as_found"), "0.58")
    visit.note((point.circuit, point.id, "zs", "as_found"), "behind Mrs Quillfeather's dresser")
    visit.close()
    whole, bare = told(path, *form), told(path, "--without-customer", *form)
    assert "Quillfeather" in whole
    assert "Quillfeather" not in bare
    assert "Nowhere Lane" not in bare
    assert "0.58" in bare
    assert len(bare.splitlines()) == len(whole.splitlines())
