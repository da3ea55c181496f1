"""The diagnosis against circuits drawn with one fault each: forty a fault here, any number by ``python -m tests.simulator``."""

from __future__ import annotations

from math import sqrt

import pytest

from tests.diagnosis.scoring import Score, score
from tests.simulator.faults import FAULTS

N = 40
SEED = "ci"
HEALTHY = ("intact", "intact, walk not known")


def least(share: float, n: int) -> float:
    """The share that a diagnosis as good as ``share`` still reaches in ``n`` draws, two deviations down."""
    return share - 2.0 * sqrt(share * (1 - share) / n)


@pytest.mark.parametrize("key", list(FAULTS))
def test_a_fault_that_can_be_told_comes_first(key: str) -> None:
    found: Score = score(key, N, SEED)
    told = max(found.told, 1)
    assert found.told_first / told >= least(0.95, told), found.line()
    assert found.told_sure_wrong / told <= 1 - least(0.99, told), found.line()
    if key in HEALTHY:
        assert found.first / N >= least(0.99, N), found.line()
    if found.told == N:
        assert found.shown / N >= least(0.98, N), found.line()
    if found.spurs:
        assert found.spurs_in_band / found.spurs >= least(0.95, found.spurs), found.line()
