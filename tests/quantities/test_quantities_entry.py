"""What a person types is understood exactly, or refused with one sentence; nothing in between."""

import math
import unicodedata

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from fieldtool.quantities.entry import MOST_CELLS, Entry, EntryProblem, last_digit, parse
from fieldtool.quantities.fields import FIELDS, Field
from fieldtool.quantities.show import cells, number_text, plain, show


def entry(key: str, text: str) -> Entry:
    understood = parse(FIELDS[key], text)
    assert isinstance(understood, Entry), understood
    return understood


def refusal(key: str, text: str) -> str:
    refused = parse(FIELDS[key], text)
    assert isinstance(refused, EntryProblem), refused
    return refused.sentence


@pytest.mark.parametrize(
    "key, text, value, sign, echo",
    [
        ("low_ohm", ".52", 0.52, "=", "0.52 Ω"),
        ("low_ohm", "0.53", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "0.50", 0.5, "=", "0.50 Ω"),
        ("low_ohm", "  0.53\n", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "0.53 Ω", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "0.53\u00a0\u2126", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "0.53\u03a9", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "0.53 OHM", 0.53, "=", "0.53 Ω"),
        ("low_ohm", "530 mΩ", 530 / 1000, "=", "0.53 Ω"),
        ("low_ohm", "530 m\u2126", 530 / 1000, "=", "0.53 Ω"),
        ("low_ohm", "530mohm", 530 / 1000, "=", "0.53 Ω"),
        ("low_ohm", ">99.9", 99.9, ">", ">99.9 Ω"),
        ("loop_ohm", "<0.01 ohm", 0.01, "<", "<0.01 Ω"),
        ("insulation_ohm", "200", 200e6, "=", "200 MΩ"),
        ("insulation_ohm", ">999 MΩ", 999e6, ">", ">999 MΩ"),
        ("insulation_ohm", "> 999", 999e6, ">", ">999 MΩ"),
        ("insulation_ohm", "0.5 M", 0.5e6, "=", "0.5 MΩ"),
        ("insulation_ohm", "500 kΩ", 500e3, "=", "0.5 MΩ"),
        ("insulation_ohm", "2 GΩ", 2e9, "=", "2000 MΩ"),
        ("fault_a", "1.25", 1250.0, "=", "1.25 kA"),
        ("fault_a", "1.1", 1100.0, "=", "1.1 kA"),
        ("fault_a", "650 A", 650.0, "=", "0.65 kA"),
        ("trip_ms", "24", 24.0, "=", "24 ms"),
        ("trip_ms", "0.024 s", 24.0, "=", "24 ms"),
        ("trip_ms", ">300 ms", 300.0, ">", ">300 ms"),
        ("length_m", "12 m", 12.0, "=", "12 m"),
        ("length_m", "350 cm", 3.5, "=", "3.5 m"),
        ("area_mm2", "2.5 mm²", 2.5, "=", "2.5 mm²"),
        ("area_mm2", "2.5 mm2", 2.5, "=", "2.5 mm²"),
        ("depth_mm", "5 cm", 50.0, "=", "50 mm"),
        ("temp_c", "20 degC", 20.0, "=", "20 °C"),
        ("temp_c", "20 °C", 20.0, "=", "20 °C"),
        ("temp_c", "-5", -5.0, "=", "-5 °C"),
        ("electrode_ohm", "1.2 k", 1200.0, "=", "1200 Ω"),
        ("leakage_ma", "0.003 A", 3.0, "=", "3 mA"),
        ("leakage_ma", "20 \u00b5A", 0.02, "=", "0.02 mA"),
        ("leakage_ma", "20 \u03bcA", 0.02, "=", "0.02 mA"),
        ("breaking_ka", "6", 6.0, "=", "6 kA"),
        ("breaking_ka", "6000 A", 6.0, "=", "6 kA"),
        ("percent", "2 %", 2.0, "=", "2 %"),
        ("count", "3", 3.0, "=", "3"),
        ("floor_m2", "60 m2", 60.0, "=", "60 m²"),
        ("volts", "230", 230.0, "=", "230 V"),
        ("current_a", "250 mA", 0.25, "=", "0.25 A"),
        ("rating_a", "32 A", 32.0, "=", "32 A"),
    ],
)
def test_an_entry_is_understood_to_the_last_bit(key: str, text: str, value: float, sign: str, echo: str) -> None:
    understood = entry(key, text)
    assert (understood.value, understood.sign, understood.echo) == (value, sign, echo)
    assert understood.raw == text.strip()


@pytest.mark.parametrize("text", ["OL", "ol", "Ol", "o/l", "O/L", "O.L", "open", "Open", " OL "])
@pytest.mark.parametrize("key", ["low_ohm", "loop_ohm", "electrode_ohm"])
def test_an_open_circuit_has_no_value(key: str, text: str) -> None:
    understood = entry(key, text)
    assert (understood.value, understood.sign, understood.echo) == (None, "open", "OL")


@pytest.mark.parametrize(
    "key, hint",
    [
        ("insulation_ohm", ">200"),
        ("fault_a", ">1.25"),
        ("trip_ms", ">300"),
        ("length_m", "a number"),
        ("count", "3"),
    ],
)
def test_where_ol_gives_no_figure_it_asks_for_the_bound(key: str, hint: str) -> None:
    assert hint in refusal(key, "OL")


@pytest.mark.parametrize(
    "key, text",
    [
        # What pint by itself reads as something else, without a word; measured on pint 0.25.
        ("low_ohm", "0,53"),  # 0
        ("low_ohm", "1,53"),  # 153
        ("volts", "1,5 V"),  # 15 V
        ("depth_mm", "12,50 mm"),  # 1250 mm
        ("volts", "≥5 V"),  # 5 V
        ("volts", "~5 V"),  # 5 V
        ("volts", "\u22125 V"),  # +5 V
        ("volts", "5 V 3"),  # 15 V
        ("low_ohm", "1.2.3"),  # 0.36
        ("low_ohm", "5;6"),  # 30
        ("volts", "5 V!"),  # 5 V
        ("volts", "5 V#x"),  # 5 V
        ("low_ohm", "12 R"),  # the gas constant
        ("rating_a", "12 k"),  # the Boltzmann constant
        ("rating_a", "12 M"),  # molar
        ("length_m", "10 a"),  # years
        ("low_ohm", "nan"),
        ("low_ohm", "inf"),
        ("low_ohm", "Infinity"),
        ("low_ohm", "3*4"),  # 12
        ("low_ohm", "2**3"),
        ("low_ohm", "1e3"),
        ("low_ohm", "1E-3"),
        # What pint raises on, or Python's own float takes.
        ("low_ohm", "4R7"),
        ("low_ohm", "1k2"),
        ("low_ohm", ""),
        ("low_ohm", " "),
        ("volts", "5 V-"),
        ("volts", "5 V)"),
        ("low_ohm", "1_0"),
        ("low_ohm", "\u0661\u0662"),  # Arabic digits
        ("low_ohm", "\uff15"),  # full-width digit
        ("low_ohm", "²"),
        ("low_ohm", "½"),
        ("low_ohm", "+5"),
        ("low_ohm", "0x1F"),
        # What is half a number.
        ("low_ohm", "5."),
        ("low_ohm", "."),
        ("low_ohm", ">"),
        ("low_ohm", "> Ω"),
        ("low_ohm", "5..3"),
        ("low_ohm", "0.53 0.27"),
        ("low_ohm", "0.530.27"),
        ("low_ohm", ">>5"),
        ("low_ohm", "5 >"),
        ("low_ohm", "0.53 ΩΩ"),
        ("low_ohm", "0L"),
        ("low_ohm", "0.53\x00"),
        ("low_ohm", "0.53\u200b"),
        ("low_ohm", "0.\u202e53"),
        ("low_ohm", "0.53\n0.27"),
        ("low_ohm", "026"),
        ("low_ohm", "00.26"),
        ("low_ohm", "-0.5"),
        ("length_m", "-3"),
        ("temp_c", "\u22125"),
        ("temp_c", "68 F"),
        ("count", "2.5"),
        ("count", "3 V"),
        ("area_mm2", "2.5 mm"),
        ("floor_m2", "60 m"),
        ("insulation_ohm", "200 Ω"),
        ("insulation_ohm", "200 mΩ"),
        ("leakage_ma", "3 MA"),
    ],
)
def test_what_is_not_one_number_in_this_unit_is_refused(key: str, text: str) -> None:
    assert cells(refusal(key, text)) <= MOST_CELLS


@pytest.mark.parametrize(
    "key, text, sentence",
    [
        ("low_ohm", "0,53", "'0,53' has a comma. Type the point: 0.53. Nothing was kept."),
        ("low_ohm", "1,250", "'1,250' has a comma. Type 1.250 or 1250. Nothing was kept."),
        ("low_ohm", "1,2,3", "'1,2,3' has a comma. Type a point instead. Nothing was kept."),
        ("low_ohm", "5..3", "'5..3' is not a number. Type it again, for example 0.53."),
        ("low_ohm", "5.", "'5.' stops at the point. Type the rest, or leave the point off."),
        ("low_ohm", "026", "'026' starts with 0. Is the point missing? Type it again, as 0.26."),
        ("depth_mm", "050", "'050' starts with 0. Type it again, for example 50."),
        ("low_ohm", "-3", "A resistance cannot be below 0. Null the leads and read again."),
        ("low_ohm", "\u22123", "A resistance cannot be below 0. Null the leads and read again."),
        ("insulation_ohm", "-3", "An IR cannot be below 0. Type it again, or read again."),
        ("temp_c", "\u22125", "'\u22125' has a long dash. Type the short minus: -5."),
        ("insulation_ohm", "200 Ω", "This is an IR in MΩ and you typed Ω. Type M after it, or only the number."),
        ("breaking_ka", "6 Ω", "This is in kA and you typed Ω. Type kA after it, or only the number."),
        ("low_ohm", "5 R", "'R' is no unit here. Type Ω after it, or only the number."),
        ("low_ohm", "530 MΩ", "M is a million, m a thousandth: 530 MΩ is too much. Type it again."),
        ("fault_a", "650", "650 kA is over 100 kA, the most taken here. For amps, type A after it."),
        ("load_a", "500 kW", "500 kW is over 2000 A, the most taken here. Type it again."),
        ("rating_a", "0", "0 A is under 0.5 A, the least taken here. Type it again."),
        ("length_m", ">3", "This wants the number itself. Leave off the >, for example 12.5."),
        ("volts", "≥5", "'≥' has no meaning here. Type > for over the range, < for under it."),
        ("low_ohm", "", "Nothing was typed. Type a number, for example 0.53."),
        ("count", "2.5", "'2.5' is not a whole number. This counts things: type 3, say."),
        ("count", "3 V", "This counts things. Type only the number, without 'V'."),
    ],
)
def test_a_refusal_says_what_happened_then_what_to_do(key: str, text: str, sentence: str) -> None:
    assert refusal(key, text) == sentence


def test_control_characters_of_the_person_are_written_out_in_the_answer() -> None:
    sentence = refusal("low_ohm", "\x1b[31m\u202e5")
    assert "\\x1b[31m" in sentence
    assert plain(sentence) == sentence


@pytest.mark.parametrize(
    "text",
    ["9" * 2_000_000, "a\u0315\u0300" * 500_000, "0." + "0" * 1_000_000 + "1", "," * 50_000],
    ids=["digits", "marks", "noughts", "commas"],
)
def test_a_text_of_megabytes_is_refused_like_any_other(text: str) -> None:
    assert refusal("low_ohm", text).endswith("…' is too long. Type one number, for example 0.53.")


@pytest.mark.parametrize(
    "key, text, unlikely",
    [
        ("low_ohm", "26", "26 Ω is high for this reading. Kept, marked to look at again."),
        ("loop_ohm", "53", "53 Ω is high for this reading. Kept, marked to look at again."),
        ("low_ohm", "0.00", "0.00 Ω is low for this reading. Kept, marked to look at again."),
        ("insulation_ohm", "0.05", "0.05 MΩ is low for this reading. Kept, marked to look at again."),
        ("loop_ohm", ">99", ">99 Ω is high for this reading. Kept, marked to look at again."),
        ("length_m", "400", "400 m is high for a length. Kept, marked to look at again."),
        ("low_ohm", "0.26", None),
        ("low_ohm", ">0.001", None),  # at least that much: says nothing of being low
        ("low_ohm", "<20", None),  # at most that much: says nothing of being high
        ("insulation_ohm", ">999", None),
    ],
)
def test_an_unlikely_value_is_kept_and_marked(key: str, text: str, unlikely: str | None) -> None:
    assert entry(key, text).unlikely == unlikely


def test_a_caller_who_knows_the_supply_sets_what_is_likely() -> None:
    # 85 ohm is an ordinary loop on a TT supply and a slip of the point on any other.
    zs = FIELDS["loop_ohm"]
    assert entry("loop_ohm", "85").unlikely is not None
    on_tt = parse(zs, "85", likely=(1.0, 500.0))
    assert isinstance(on_tt, Entry)
    assert on_tt.unlikely is None


@pytest.mark.parametrize("text", [">5", "<5", "OL"])
def test_a_survey_field_can_ask_for_the_number_alone(text: str) -> None:
    assert isinstance(parse(FIELDS["loop_ohm"], text), Entry)
    assert isinstance(parse(FIELDS["loop_ohm"], text, only_number=True), EntryProblem)
    assert isinstance(parse(FIELDS["loop_ohm"], "0.3", only_number=True), Entry)


@pytest.mark.parametrize(
    "text, amps, notice",
    [
        ("3 kW", 13.0, "3 kW is taken as 13 A: up to 3 kW counts as 13 A."),
        ("3000 W", 13.0, "3000 W is taken as 13 A: up to 3 kW counts as 13 A."),
        ("2990 W", 2990 / 230, "2990 W at 230 V is 13 A."),
        ("2 kW", 2000 / 230, "2 kW at 230 V is 8.7 A."),
        ("3001 W", 3001 / 230, "3001 W at 230 V is 13 A."),
        ("7.2 kW", 7200 / 230, "7.2 kW at 230 V is 31.3 A."),
        ("13", 13.0, None),
    ],
)
def test_a_load_in_watts_becomes_amps_at_230_v(text: str, amps: float, notice: str | None) -> None:
    understood = entry("load_a", text)
    assert understood.value == pytest.approx(amps, rel=1e-12)
    assert understood.notice == notice


def test_a_bare_prefix_is_taken_and_said() -> None:
    assert entry("low_ohm", "530 m").value == 530 / 1000
    assert entry("low_ohm", "530 m").notice == "530 m is 530 mΩ, that is 0.53 Ω. M is a million, m a thousandth."
    assert entry("low_ohm", "530 mΩ").notice is None


@pytest.mark.parametrize(
    "key, text, step",
    [
        ("loop_ohm", "1.10", 0.01),
        ("loop_ohm", "1.1", 0.01),
        ("loop_ohm", "1", 0.01),
        ("loop_ohm", "1.093", 0.001),
        ("loop_ohm", "1093 mΩ", 0.001),
        ("loop_ohm", "1.0 kΩ", 0.01),
        ("insulation_ohm", "1.05", 0.01e6),
        ("fault_a", "1.25", 10.0),
        ("fault_a", "1.253", 1.0),
        ("loop_ohm", "not a number", 0.01),
        ("loop_ohm", "", 0.01),
        ("loop_ohm", "OL", 0.01),
        ("count", "3", 1.0),
    ],
)
def test_the_last_digit_is_never_coarser_than_the_meter_shows(key: str, text: str, step: float) -> None:
    # 1.1 typed for 1.10 would otherwise widen by ten times what still meets a limit.
    assert last_digit(FIELDS[key], text) == pytest.approx(step, rel=1e-12)


FORBIDDEN = ("error", "invalid", "failed", "please", "safe", "pass")
ANY_FIELD = st.sampled_from(sorted(FIELDS))
NEAR_MISSES = st.text(alphabet="0123456789.,<>-−+eE_ mMkKΩ\u2126ohmOLVA²°%\u00a0\u202e\x1b/", max_size=45)


def _holds(field: Field, text: str) -> None:
    answer = parse(field, text)
    if isinstance(answer, EntryProblem):
        sentences = [answer.sentence]
    else:
        sentences = [each for each in (answer.unlikely, answer.notice) if each is not None]
        assert cells(answer.echo) <= 24
        assert len(answer.raw) <= 200
        assert not any(unicodedata.category(char) in ("Cc", "Cf", "Cs") for char in answer.raw)
        if answer.sign == "open":
            assert answer.value is None
        else:
            assert answer.value is not None
            assert math.isfinite(answer.value)
            assert field.low <= answer.value <= field.high
        assert 0 < answer.last_digit <= field.resolution
    for sentence in sentences:
        assert sentence.endswith(".")
        assert cells(sentence) <= MOST_CELLS
        assert plain(sentence) == sentence


@settings(max_examples=400, deadline=None)
@given(ANY_FIELD, st.text(max_size=60) | NEAR_MISSES)
@example("low_ohm", "\ud800")
@example("low_ohm", "0" * 40)
@example("low_ohm", "0" * 5)
@example("low_ohm", "0" * 6)
@example("insulation_ohm", "9" * 40)
@example("low_ohm", "0" * 11 + ",0")
@example("low_ohm", "12345,678")
@example("low_ohm", "12345,6789")
@example("low_ohm", "." + "1" * 39)
@example("low_ohm", "台" * 40)
@example("low_ohm", "5 " + "台" * 30)
@example("breaking_ka", "5 " + "\u0301" * 30)
@example("load_a", "0.00000000000000000000000000000000001 kW")
@example("low_ohm", "12345.678901234567 m")
@example("temp_c", "-0")
def test_any_text_gets_an_entry_or_one_short_sentence(key: str, text: str) -> None:
    _holds(FIELDS[key], text)


@settings(max_examples=200, deadline=None)
@given(
    ANY_FIELD,
    st.from_regex(r"(0|[1-9][0-9]{0,14})(\.[0-9]{1,12})?|\.[0-9]{1,12}", fullmatch=True),
    st.data(),
)
def test_any_plain_number_with_a_known_unit_is_short_and_clear(key: str, number: str, data: st.DataObject) -> None:
    field = FIELDS[key]
    unit = data.draw(st.sampled_from(["", *(token for token, _ in field.tokens)]))
    sign = data.draw(st.sampled_from(["", ">", "<"]))
    _holds(field, f"{sign}{number} {unit}")
    answer = parse(field, f"{sign}{number} {unit}")
    sentence = answer.sentence if isinstance(answer, EntryProblem) else f"{answer.unlikely}{answer.notice}"
    assert not any(word in sentence.lower() for word in FORBIDDEN)


@settings(max_examples=300, deadline=None)
@given(ANY_FIELD, st.data())
def test_what_is_shown_can_be_typed_back(key: str, data: st.DataObject) -> None:
    field = FIELDS[key]
    value = data.draw(st.floats(min_value=field.low, max_value=field.high, allow_nan=False))
    sign = data.draw(st.sampled_from(["=", ">", "<"] if field.may_be_bounded else ["="]))
    shown = show(field, value, sign)  # type: ignore[arg-type]
    understood = parse(field, shown)
    assert isinstance(understood, Entry)
    assert understood.sign == sign
    assert show(field, understood.value, understood.sign) == shown
    half_a_step = (1.0 if float(number_text(field, value)) >= field.whole_from else field.resolution) / 2
    assert understood.value == pytest.approx(value, abs=half_a_step * (1 + 1e-9), rel=1e-11)
    assert understood.value == pytest.approx(float(number_text(field, value)) * field.scale, rel=1e-12)


@settings(max_examples=200, deadline=None)
@given(st.integers(min_value=0, max_value=9_999_999))
def test_milliohms_and_ohms_give_the_same_float(milliohms: int) -> None:
    whole, part = divmod(milliohms, 1000)
    assert entry("low_ohm", f"{milliohms} mΩ").value == entry("low_ohm", f"{whole}.{part:03d}").value
