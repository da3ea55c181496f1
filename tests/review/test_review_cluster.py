"""The review over a Dask cluster of two workers on this machine: the same rows as without one."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest
from distributed import LocalCluster

from fieldtool.commands import spread
from tests.review.trees import put, reviewed


@pytest.fixture(scope="module")
def cluster() -> Iterator[str]:
    with LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None, silence_logs=50) as running:
        yield running.scheduler_address


def test_two_workers_give_the_rows_that_one_process_gives(cluster: str, tmp_path: Path) -> None:
    for number in range(20):
        put(tmp_path, f"{number:02}.json", sample=("larch_row", "quarry_yard")[number % 2])
    (tmp_path / "11.json").write_text("{")
    code, out, err = reviewed(tmp_path, "--json", "--scheduler", cluster)
    here_code, here, _ = reviewed(tmp_path, "--json", "--cores", "1")
    assert (code, err) == (here_code, "")
    assert json.loads(out)["jobs"] == json.loads(here)["jobs"]


def test_both_workers_take_part(cluster: str) -> None:
    answers = list(spread.on_cluster(_who, range(64), _nobody, cluster))
    assert len(set(answers)) == 2
    assert os.getpid() not in answers


def _who(_number: int) -> int:
    import time

    time.sleep(0.02)
    return os.getpid()


def _nobody(_number: int) -> int:
    return 0


def test_no_cluster_there_is_one_sentence(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    put(tmp_path, "a.json")
    code, out, err = reviewed(tmp_path, "--json", "--scheduler", "nonsense://nowhere")
    assert (code, err.count("\n")) == (2, 1)
    assert json.loads(out)["error"]["code"] == "usage"
    monkeypatch.setitem(sys.modules, "distributed", None)
    code, _, err = reviewed(tmp_path, "--scheduler", "tcp://127.0.0.1:1")
    assert (code, "fieldtool[cluster]" in err) == (2, True)
