"""Shown figures round towards safety, limits are met as a supervisor reads them, and text keeps to its cells."""

import math
from fractions import Fraction

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from rich.cells import cell_len

from fieldtool.quantities.fields import FIELDS
from fieldtool.quantities.show import (
    NotShowable,
    cells,
    decimal_of,
    exceeds,
    number_text,
    plain,
    round_headroom_down_m,
    round_iz_down,
    round_limit_down,
    round_prediction_up,
    round_reading_nearest,
    round_volt_drop_up,
    shorten,
    show,
)


def zs_limit(multiple: int, in_a: int) -> float:
    """0.8 of the loop limit with Cmin 0.95 and 230 V, for a breaker opening at ``multiple`` times its rating."""
    return 0.8 * 0.95 * 230 / (multiple * in_a)


B32, B20, C32 = zs_limit(5, 32), zs_limit(5, 20), zs_limit(10, 32)


@pytest.mark.parametrize(
    "key, value, sign, text",
    [
        ("loop_ohm", 0.53, "=", "0.53 Ω"),
        ("loop_ohm", 0.5, "=", "0.50 Ω"),
        ("loop_ohm", 26.0, "=", "26 Ω"),
        ("loop_ohm", 12.34, "=", "12.34 Ω"),
        ("loop_ohm", 0.0, "=", "0.00 Ω"),
        ("low_ohm", None, "open", "OL"),
        ("low_ohm", math.inf, "=", "OL"),
        ("low_ohm", 99.9, ">", ">99.9 Ω"),
        ("low_ohm", 1.005, "=", "1.01 Ω"),  # a float just under the half
        ("insulation_ohm", 200e6, ">", ">200 MΩ"),
        ("insulation_ohm", 0.5e6, "=", "0.5 MΩ"),
        ("insulation_ohm", 1e3, "=", "0 MΩ"),
        ("fault_a", 1250.0, "=", "1.25 kA"),
        ("fault_a", 16000.0, "=", "16.00 kA"),
        ("trip_ms", 24.0, "=", "24 ms"),
        ("length_m", 10.1, "=", "10.1 m"),
        ("length_m", 6.0, "=", "6 m"),
        ("area_mm2", 2.5, "=", "2.5 mm²"),
        ("area_mm2", 4.0, "=", "4 mm²"),
        ("temp_c", -5.0, "=", "-5 °C"),
        ("temp_c", -0.01, "=", "0 °C"),
        ("electrode_ohm", 85.4, "=", "85 Ω"),
        ("electrode_ohm", 9.9, "=", "9.9 Ω"),
        ("electrode_ohm", 5.0, "=", "5.0 Ω"),
        ("count", 3.0, "=", "3"),
        ("percent", 2.0, "=", "2 %"),
    ],
)
def test_a_value_is_shown_as_the_trade_writes_it(key: str, value: float | None, sign: str, text: str) -> None:
    assert show(FIELDS[key], value, sign) == text  # type: ignore[arg-type]


@pytest.mark.parametrize("value", [None, math.nan, -math.inf])
def test_what_is_no_value_is_not_shown(value: float | None) -> None:
    with pytest.raises(NotShowable):
        show(FIELDS["loop_ohm"], value)


def test_the_number_alone_is_in_the_shown_unit() -> None:
    assert number_text(FIELDS["insulation_ohm"], 0.35e6) == "0.35"


@pytest.mark.parametrize(
    "limit, shown",
    [(B32, 1.092), (B20, 1.748), (C32, 0.546), (0.8 * 2.30, 1.840), (0.1 + 0.2, 0.3), (1.0, 1.0)],
)
def test_a_limit_is_shown_to_three_places_rounded_down(limit: float, shown: float) -> None:
    assert round_limit_down(limit) == shown


@pytest.mark.parametrize(
    "limit, at_the_limit, over", [(B32, 1.09, 1.10), (B20, 1.75, 1.76), (C32, 0.55, 0.56), (1.84, 1.84, 1.85)]
)
def test_a_reading_is_over_by_more_than_half_its_last_digit(limit: float, at_the_limit: float, over: float) -> None:
    assert not exceeds(at_the_limit, limit, 0.01)
    assert exceeds(over, limit, 0.01)


def test_exactly_half_a_digit_over_is_at_the_limit() -> None:
    # 0.29 against 0.285, and 1.15 against 1.145: binary floats fall on either side of the half.
    assert not exceeds(0.29, 0.285, 0.01)
    assert not exceeds(1.15, 1.145, 0.01)
    assert exceeds(1.15, 1.1449, 0.01)


def test_a_finer_reading_has_less_to_spare() -> None:
    assert not exceeds(1.75, B20, 0.01)
    assert exceeds(1.750, B20, 0.001)
    assert exceeds(1.7480001, B20, 0.0)


def test_an_open_circuit_is_over_any_limit_and_nothing_is_over_none() -> None:
    assert exceeds(math.inf, B32, 0.01)
    assert not exceeds(5.0, math.inf, 0.01)


@pytest.mark.parametrize(
    "bad",
    [(math.nan, 1.0, 0.01), (1.0, math.nan, 0.01), (1.0, 1.0, math.nan), (1.0, 1.0, -0.01), (1.0, 1.0, math.inf)],
)
def test_a_comparison_with_what_is_no_number_is_refused(bad: tuple[float, float, float]) -> None:
    with pytest.raises(NotShowable):
        exceeds(*bad)


@settings(max_examples=200, deadline=None)
@given(st.integers(0, 2000), st.integers(0, 200_000))
@example(175, 174_800)
def test_meeting_a_limit_is_exact_arithmetic(hundredths: int, hundred_thousandths: int) -> None:
    reading, limit = Fraction(hundredths, 100), Fraction(hundred_thousandths, 100_000)
    assert exceeds(float(reading), float(limit), 0.01) == (reading - limit > Fraction(1, 200))


@pytest.mark.parametrize(
    "rounding, value, shown",
    [
        (round_headroom_down_m, 3.4, 3.0),
        (round_headroom_down_m, 3.5, 3.5),
        (round_headroom_down_m, 2.9999999999999996, 3.0),
        (round_headroom_down_m, 0.49, 0.0),
        (round_headroom_down_m, -0.1, -0.5),
        (round_headroom_down_m, math.inf, math.inf),
        (round_iz_down, 27 * 0.85, 22.9),
        (round_iz_down, 0.1 * 3 * 100, 30.0),
        (round_volt_drop_up, 26 * 40 * 0.018 / 4, 4.7),
        (round_volt_drop_up, 4.7, 4.7),
        (round_prediction_up, 0.701, 0.71),
        (round_prediction_up, 0.1 + 0.2, 0.3),
        (round_prediction_up, 0.35 + 0.36, 0.71),
        (round_reading_nearest, 0.345, 0.35),
    ],
)
def test_figures_round_towards_safety_and_not_on_float_noise(rounding: object, value: float, shown: float) -> None:
    assert rounding(value) == shown  # type: ignore[operator]


@pytest.mark.parametrize(
    "rounding", [round_headroom_down_m, round_iz_down, round_limit_down, round_prediction_up, round_volt_drop_up]
)
def test_what_is_not_a_number_is_not_rounded(rounding: object) -> None:
    with pytest.raises(NotShowable):
        rounding(math.nan)  # type: ignore[operator]


@settings(max_examples=200, deadline=None)
@given(st.floats(min_value=-1000, max_value=1000))
def test_rounding_never_goes_against_safety(value: float) -> None:
    noise = 1e-11 * max(1.0, abs(value))
    assert value - 0.5 - noise <= round_headroom_down_m(value) <= value + noise
    assert value - 0.1 - noise <= round_iz_down(value) <= value + noise
    assert value - 0.001 - noise <= round_limit_down(value) <= value + noise
    assert value - noise <= round_prediction_up(value) <= value + 0.01 + noise
    assert value - noise <= round_volt_drop_up(value) <= value + 0.1 + noise
    assert round_headroom_down_m(round_headroom_down_m(value)) == round_headroom_down_m(value)
    assert round_prediction_up(round_prediction_up(value)) == round_prediction_up(value)


def test_noise_beyond_twelve_figures_is_cleared() -> None:
    assert decimal_of(0.1 + 0.2) == decimal_of(0.3)
    assert decimal_of(0.3) != decimal_of(0.30000000001)


@pytest.mark.parametrize(
    "text",
    [
        "0.53 Ω",
        "═══ PROVED DEAD ═══",
        "─/ ─ OFF",
        "left of hob",
        "台所の右",
        "e\u0301té",
        "2.5 mm²",
        "20 °C",
        "µA",
        "❤\ufe0f",
        "🔌",
        "…",
    ],
)
def test_cells_are_what_the_terminal_draws(text: str) -> None:
    assert cells(text) == cell_len(text)


@settings(max_examples=200, deadline=None)
@given(st.text(max_size=80), st.integers(-1, 40))
@example("台" * 40, 7)
@example("\u0301" * 2000, 10)
def test_a_shortened_text_fits_and_keeps_its_beginning(text: str, most: int) -> None:
    short = shorten(text, most)
    assert cells(short) <= max(most, 0)
    assert len(short) <= 4 * max(most, 0)
    assert short == text or most <= 0 or (short.endswith("…") and text.startswith(short[:-1]))


def test_a_text_that_fits_is_left_alone() -> None:
    assert shorten("left of hob", 11) == "left of hob"
    assert shorten("left of hob", 10) == "left of h…"
    assert shorten("hob", 0) == ""


@pytest.mark.parametrize(
    "text, shown",
    [
        ("left of hob, 2.5 mm² Ω", "left of hob, 2.5 mm² Ω"),
        ("a\nb\tc\r", "a\\nb\\tc\\r"),
        ("\x1b[2Jgone", "\\x1b[2Jgone"),
        ("\x9b31m", "\\x9b31m"),
        ("GO\u202eDAED", "GO\\u202eDAED"),
        ("a\u200bb\u2028c", "a\\u200bb\\u2028c"),
        ("\ud800", "\\ud800"),
        ("\U000e0041", "\\U000e0041"),
    ],
)
def test_hidden_characters_are_written_out(text: str, shown: str) -> None:
    assert plain(text) == shown


@settings(max_examples=200, deadline=None)
@given(st.text(max_size=60))
def test_plain_text_is_one_line_and_stays_as_it_is(text: str) -> None:
    once = plain(text)
    assert plain(once) == once
    assert len(once.splitlines()) <= 1
    once.encode("utf-8")
