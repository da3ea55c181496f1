"""Meter tolerances carried to a worked-out loop, against the `uncertainties` library's derivatives."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from uncertainties import ufloat

from fieldtool.rules.facts import Facts as View
from fieldtool.rules.tolerance import DEFAULT_DIGITS, DEFAULT_GAIN, tolerance
from fieldtool.verdict.check import existing_facts
from tests.jobs import Facts, sample, set_reading

DIGIT = 0.01


def no_figures(body: Facts) -> None:
    """The maker's figures not entered: ±(2 % + 2 digits), common practice."""
    body["instruments"] = [{"id": "t1", "kind": "multifunction", "name": "METER 1"}]


def worst_case(r1: float, r2: float, zdb: float) -> float:
    """How far Zs = Zdb + (r1 + r2)/4 may be off: every derivative times its bound, the gain shared by all three."""
    gain = ufloat(0.0, DEFAULT_GAIN, "gain")
    digits = [ufloat(0.0, DEFAULT_DIGITS * DIGIT, f"digits {n}") for n in range(3)]
    loop = zdb * (1 + gain) + digits[0] + ((r1 * (1 + gain) + digits[1]) + (r2 * (1 + gain) + digits[2])) / 4
    return sum(abs(loop.derivatives[each]) * each.std_dev for each in loop.derivatives)


@given(r1=st.floats(0.2, 1.2), ratio=st.floats(1.4, 2.7), ze=st.floats(0.05, 0.8))
def test_a_worked_out_loop_is_never_given_less_than_its_meters_can_miss(r1: float, ratio: float, ze: float) -> None:
    r1, r2, ze = round(r1, 2), round(r1 * ratio, 2), round(ze, 2)

    def edit(body: Facts) -> None:
        no_figures(body)
        for test, value in (("r1", r1), ("rn", r1), ("r2", r2), ("ze", ze)):
            set_reading(body, test, value, mode=None, instrument="t1")

    view: View = existing_facts(sample("larch_row", edit), "c3")
    ours = view.tol(view.zdb) + view.dead_tol((r1 + r2) / 4)
    theirs = worst_case(r1, r2, ze)
    assert ours >= theirs - 1e-9 or (r1 + r2) / 4 * 0.2 < theirs
    assert ours <= 2.5 * theirs


def test_one_reading_is_its_gain_and_its_digits() -> None:
    job = sample("larch_row", no_figures, lambda body: set_reading(body, "zs", 0.62, instrument="t1"))
    reading = next(r for r in job.readings if r.test == "zs" and r.mode == "high_current")
    gain, digits = ufloat(0.0, DEFAULT_GAIN), ufloat(0.0, DEFAULT_DIGITS * DIGIT)
    shown = 0.62 * (1 + gain) + digits
    expected = sum(abs(shown.derivatives[each]) * each.std_dev for each in shown.derivatives)
    assert tolerance(job, reading) == pytest.approx(expected)
