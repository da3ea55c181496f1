"""The table of quantities agrees with itself, with pint, and with the limits people work to."""

import dataclasses
import doctest
import subprocess
import sys

import pint
import pytest

from fieldtool.quantities import entry, fields, show, units
from fieldtool.quantities.fields import FIELDS, SYMBOLS, Field, NoSuchField, field, symbol_of_spelling
from fieldtool.quantities.units import UnitProblem, factor, warm

UNIT_TABLE: pint.UnitRegistry[float] = pint.UnitRegistry()
EVERY = pytest.mark.parametrize("each", FIELDS.values(), ids=FIELDS.keys())
PAIRS = sorted({(each.key, unit) for each in FIELDS.values() for _, unit in each.tokens})


@EVERY
def test_a_field_holds_its_spans_in_order(each: Field) -> None:
    assert each.low <= each.likely_low < each.likely_high <= each.high
    assert each.negative_ok == (each.low < 0)


@EVERY
def test_a_spelling_means_one_unit_with_a_sign(each: Field) -> None:
    spellings = [token for token, _ in each.tokens]
    assert len(spellings) == len(set(spellings))
    assert {unit for _, unit in each.tokens} <= set(SYMBOLS)
    assert not each.tokens or each.unit_for(each.unit) == each.bare_unit
    assert SYMBOLS[each.bare_unit] == each.unit


@EVERY
def test_the_shown_unit_is_worth_what_pint_says(each: Field) -> None:
    if each.si in ("count", "degC"):
        assert (each.si, each.scale) == (each.bare_unit, 1.0)
    else:
        assert UNIT_TABLE.Quantity(1.0, each.bare_unit).to(each.si).magnitude == pytest.approx(each.scale, rel=1e-12)


@EVERY
def test_the_example_is_an_entry_nobody_would_question(each: Field) -> None:
    understood = entry.parse(each, each.example)
    assert isinstance(understood, entry.Entry)
    assert understood.unlikely is None


@pytest.mark.parametrize("key, unit", PAIRS)
def test_every_spelling_has_pints_factor_and_the_fields_dimension(key: str, unit: str) -> None:
    each = FIELDS[key]
    if unit in ("watt", "kilowatt"):
        # A load may be given as power: amps are power over voltage.
        ours = factor(unit, "watt") / (each.at_volts or 0.0)
        theirs = UNIT_TABLE.Quantity(1.0, unit) / UNIT_TABLE.Quantity(230.0, "volt")
    elif unit == "degC":
        assert (each.si, factor(unit, each.si)) == ("degC", 1.0)
        return
    else:
        ours = factor(unit, each.si)
        theirs = UNIT_TABLE.Quantity(1.0, unit)
    assert theirs.check(UNIT_TABLE.Quantity(1.0, each.si).dimensionality)
    assert ours == pytest.approx(theirs.to(each.si).magnitude, rel=1e-12)


@pytest.mark.parametrize(
    "unit, si, prefix",
    [
        ("milliohm", "ohm", 1e-3),
        ("megaohm", "ohm", 1e6),
        ("gigaohm", "ohm", 1e9),
        ("kiloampere", "ampere", 1e3),
        ("second", "millisecond", 1e3),
        ("meter", "millimeter", 1e3),
        ("microampere", "milliampere", 1e-3),
    ],
)
def test_a_factor_is_the_si_prefix_to_the_last_bit(unit: str, si: str, prefix: float) -> None:
    assert factor(unit, si) == prefix


@pytest.mark.parametrize(
    "unit, si",
    [("volt", "ohm"), ("meter", "millimeter**2"), ("degC", "kelvin"), ("no_such_unit", "ohm"), ("", "ohm")],
)
def test_units_that_do_not_turn_into_each_other_are_refused(unit: str, si: str) -> None:
    with pytest.raises(UnitProblem):
        factor(unit, si)


def test_a_field_is_asked_for_by_its_key_only() -> None:
    assert field("loop_ohm").unit == "Ω"
    with pytest.raises(NoSuchField, match="zs"):
        field("zs")


def test_a_field_cannot_be_changed() -> None:
    with pytest.raises(dataclasses.FrozenInstanceError):
        field("loop_ohm").high = 1.0  # type: ignore[misc]
    with pytest.raises(TypeError):
        FIELDS["loop_ohm"] = field("low_ohm")  # type: ignore[index]


def test_a_spelling_that_fields_differ_on_has_no_sign_of_its_own() -> None:
    # "m" is a metre in a length and a thousandth in a resistance.
    assert symbol_of_spelling("m") is None
    assert symbol_of_spelling("V") == "V"
    assert symbol_of_spelling("furlong") is None


def test_every_test_of_the_job_has_a_field() -> None:
    from fieldtool.job.kinds import TESTS

    assert {spec.field for spec in TESTS.values() if spec.field is not None} <= set(FIELDS)


@pytest.mark.parametrize("module", [entry, fields, show, units], ids=lambda module: module.__name__)
def test_the_examples_in_the_docstrings_are_true(module: object) -> None:
    ran = doctest.testmod(module)  # type: ignore[arg-type]
    assert ran.failed == 0
    assert ran.attempted > 0 or module is fields


def _loaded_after(code: str) -> set[str]:
    program = f"import sys\n{code}\nprint(*(name for name in ('pint', 'numpy', 'pydantic') if name in sys.modules))"
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    return set(done.stdout.split())


def test_plain_numbers_are_read_and_shown_without_pint() -> None:
    code = """
from fieldtool.quantities.entry import parse
from fieldtool.quantities.show import show
from fieldtool.quantities.fields import FIELDS
for key, text in (("low_ohm", "0.53"), ("insulation_ohm", ">999 MΩ"), ("fault_a", "1.25"), ("temp_c", "20 C")):
    show(FIELDS[key], parse(FIELDS[key], text).value)
"""
    assert _loaded_after(code) == set()


def test_a_prefix_is_looked_up_in_pint() -> None:
    code = """
from fieldtool.quantities.entry import parse
from fieldtool.quantities.fields import FIELDS
assert parse(FIELDS["low_ohm"], "530 mohm").value == 0.53
"""
    assert "pint" in _loaded_after(code)


def test_warming_up_loads_pint() -> None:
    assert "pint" in _loaded_after("from fieldtool.quantities.units import warm; warm()")
    warm()
    assert "pint" in sys.modules
