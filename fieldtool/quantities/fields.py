"""Every quantity a person can enter: its unit, the spellings understood, its decimals and its spans.

What a spelling is worth is not written here; `units` asks for it. Nothing here knows a circuit or a rule.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

__all__ = ["FIELDS", "NO_OPEN", "SYMBOLS", "Field", "NoSuchField", "field", "symbol_of_spelling"]

Tokens = tuple[tuple[str, str], ...]


NO_OPEN = "OL has no place here. Type a number, for example {example}."


class NoSuchField(KeyError):
    """A quantity was asked for by a key that is not in `FIELDS`."""


@dataclass(frozen=True, slots=True)
class Field:
    """One enterable quantity.

    ``unit`` is the sign shown and the unit meant by a bare number; ``bare_unit`` is that unit's name and ``scale``
    how many stored units it is worth [``si`` per ``unit``]. ``si`` names the unit the value is stored in.
    ``tokens`` pairs each accepted spelling with the name of the unit it means. ``low``/``high`` are hard limits
    and ``likely_low``/``likely_high`` the plausible span, all in the stored unit. ``may_be_bounded`` marks what a
    meter may show as over or under its range. From ``trim_from`` shown units on, trailing noughts are dropped;
    from ``whole_from`` on, the number is shown whole. ``at_volts`` turns a load typed in watts into amps [V].
    ``if_low``, ``if_high`` and ``if_open`` end the sentences that refuse such an entry.
    """

    key: str
    name: str
    unit: str
    si: str
    bare_unit: str
    tokens: Tokens
    decimals: int
    low: float
    high: float
    likely_low: float
    likely_high: float
    example: str
    scale: float = 1.0
    may_be_open: bool = False
    may_be_bounded: bool = False
    negative_ok: bool = False
    whole: bool = False
    trim_from: float = 0.0
    whole_from: float = float("inf")
    at_volts: float | None = None
    if_low: str = "Type it again."
    if_high: str = "Type it again."
    if_open: str = NO_OPEN

    def unit_for(self, spelling: str) -> str | None:
        """The unit name that a typed spelling means in this field; None when it is not understood here."""
        for token, unit in self.tokens:
            if token == spelling:
                return unit
        return None

    @property
    def resolution(self) -> float:
        """The last digit this quantity is read to [stored unit], when a reading does not say it itself."""
        return float(f"{self.scale * 10.0**-self.decimals:.12g}")

    @property
    def a_name(self) -> str:
        """The name with its article, for the middle of a sentence."""
        return f"{'an' if self.name[0] in 'aeiouI' else 'a'} {self.name}"


def _spellings(unit: str, text: str) -> Tokens:
    return tuple((spelling, unit) for spelling in text.split())


SYMBOLS: Mapping[str, str] = MappingProxyType(
    {
        "ohm": "Ω",
        "milliohm": "mΩ",
        "kiloohm": "kΩ",
        "megaohm": "MΩ",
        "gigaohm": "GΩ",
        "ampere": "A",
        "milliampere": "mA",
        "microampere": "µA",
        "kiloampere": "kA",
        "volt": "V",
        "millivolt": "mV",
        "kilovolt": "kV",
        "watt": "W",
        "kilowatt": "kW",
        "millisecond": "ms",
        "second": "s",
        "meter": "m",
        "centimeter": "cm",
        "millimeter": "mm",
        "meter**2": "m²",
        "millimeter**2": "mm²",
        "degC": "°C",
        "percent": "%",
        "count": "",
    }
)
"""The sign of each unit named in `FIELDS` (SI brochure, 9th edition; mm² and % as the trade writes them)."""

_OHM = _spellings("ohm", "Ω ohm ohms Ohm Ohms OHM OHMS")
# "m" and "M" alone are taken as prefixes of the field's own unit, since a meter's sign is often typed that way.
_MILLIOHM = _spellings("milliohm", "mΩ mohm mohms mOhm mOhms milliohm milliohms m")
_KILOOHM = _spellings("kiloohm", "kΩ KΩ kohm kohms kOhm Kohm k K")
_MEGAOHM = _spellings("megaohm", "MΩ Mohm Mohms MOhm MOhms megohm megohms M")
_GIGAOHM = _spellings("gigaohm", "GΩ Gohm Gohms GOhm G")
_AMPERE = _spellings("ampere", "A a amp amps Amp Amps")
_MILLIAMPERE = _spellings("milliampere", "mA ma")
_MICROAMPERE = _spellings("microampere", "µA μA uA")
_KILOAMPERE = _spellings("kiloampere", "kA ka KA k K")
_VOLT = _spellings("volt", "V v volt volts Volt Volts")
_POWER = _spellings("watt", "W w watt watts Watt Watts") + _spellings("kilowatt", "kW kw KW Kw")
_METRE = _spellings("meter", "m metre metres meter meters")
_CENTIMETRE = _spellings("centimeter", "cm")
_MILLIMETRE = _spellings("millimeter", "mm")
_READ_AGAIN = "Null the leads and read again."
_OVER_RANGE = "OL has no figure here. Type > and the top of the range: >{example}."

_ALL = (
    Field(
        "loop_ohm", "loop impedance", "Ω", "ohm", "ohm", _OHM + _MILLIOHM + _KILOOHM + _MEGAOHM,
        decimals=2, low=0.0, high=10_000.0, likely_low=0.02, likely_high=5.0, example="0.53",
        may_be_open=True, may_be_bounded=True, trim_from=10.0, if_low=_READ_AGAIN,
    ),
    Field(
        "low_ohm", "resistance", "Ω", "ohm", "ohm", _OHM + _MILLIOHM + _KILOOHM + _MEGAOHM,
        decimals=2, low=0.0, high=100_000.0, likely_low=0.01, likely_high=5.0, example="0.53",
        may_be_open=True, may_be_bounded=True, trim_from=10.0, if_low=_READ_AGAIN,
    ),
    Field(
        "insulation_ohm", "IR", "MΩ", "ohm", "megaohm", _KILOOHM + _MEGAOHM + _GIGAOHM,
        decimals=2, low=0.0, high=1e12, likely_low=1e5, likely_high=1e10, example="200", scale=1e6,
        may_be_bounded=True, if_low="Type it again, or read again.", if_open=_OVER_RANGE,
    ),
    Field(
        "fault_a", "fault current", "kA", "ampere", "kiloampere", _KILOAMPERE + _AMPERE,
        decimals=2, low=0.0, high=100_000.0, likely_low=50.0, likely_high=20_000.0, example="1.25", scale=1000.0,
        may_be_bounded=True, trim_from=100.0, if_high="For amps, type A after it.", if_open=_OVER_RANGE,
    ),
    Field(
        "volts", "voltage", "V", "volt", "volt",
        _VOLT + _spellings("millivolt", "mV mv") + _spellings("kilovolt", "kV kv"),
        decimals=1, low=0.0, high=1000.0, likely_low=0.0, likely_high=450.0, example="230",
    ),
    Field(
        "current_a", "current", "A", "ampere", "ampere", _AMPERE + _MILLIAMPERE,
        decimals=1, low=0.0, high=2000.0, likely_low=0.0, likely_high=100.0, example="12.5",
    ),
    Field(
        "load_a", "load", "A", "ampere", "ampere", _AMPERE + _POWER,
        decimals=1, low=0.0, high=2000.0, likely_low=0.0, likely_high=100.0, example="13", at_volts=230.0,
        if_high="For watts, type W after it.",
    ),
    Field(
        "trip_ms", "trip time", "ms", "millisecond", "millisecond",
        _spellings("millisecond", "ms mS") + _spellings("second", "s sec"),
        decimals=1, low=0.0, high=10_000.0, likely_low=1.0, likely_high=500.0, example="24",
        may_be_bounded=True, if_open="OL has no figure here. If it did not trip, type > and the time: >300.",
    ),
    Field(
        "length_m", "length", "m", "meter", "meter", _METRE + _CENTIMETRE + _MILLIMETRE,
        decimals=1, low=0.0, high=1000.0, likely_low=0.0, likely_high=150.0, example="12.5",
        if_high="For mm, type mm after it.",
    ),
    Field(
        "area_mm2", "cable size", "mm²", "millimeter**2", "millimeter**2",
        _spellings("millimeter**2", "mm² mm2 mm^2 sqmm"),
        decimals=2, low=0.2, high=300.0, likely_low=1.0, likely_high=35.0, example="2.5",
    ),
    Field(
        "depth_mm", "depth", "mm", "millimeter", "millimeter", _MILLIMETRE + _CENTIMETRE + _METRE,
        decimals=0, low=0.0, high=5000.0, likely_low=0.0, likely_high=2000.0, example="50",
    ),
    Field(
        "temp_c", "temperature", "°C", "degC", "degC", _spellings("degC", "°C ℃ C c degC °c"),
        decimals=1, low=-20.0, high=80.0, likely_low=-5.0, likely_high=50.0, example="20", negative_ok=True,
    ),
    Field(
        "electrode_ohm", "electrode resistance", "Ω", "ohm", "ohm", _OHM + _KILOOHM,
        decimals=1, low=0.0, high=20_000.0, likely_low=1.0, likely_high=500.0, example="85",
        may_be_open=True, may_be_bounded=True, trim_from=10.0, whole_from=10.0, if_low=_READ_AGAIN,
    ),
    Field(
        "leakage_ma", "leakage current", "mA", "milliampere", "milliampere",
        _MILLIAMPERE + _MICROAMPERE + _AMPERE,
        decimals=2, low=0.0, high=10_000.0, likely_low=0.0, likely_high=30.0, example="3.5", may_be_bounded=True,
        if_open=_OVER_RANGE,
    ),
    Field(
        "rating_a", "rating", "A", "ampere", "ampere", _AMPERE,
        decimals=1, low=0.5, high=800.0, likely_low=1.0, likely_high=125.0, example="32",
    ),
    Field(
        "breaking_ka", "breaking capacity", "kA", "kiloampere", "kiloampere", _KILOAMPERE + _AMPERE,
        decimals=2, low=0.1, high=100.0, likely_low=1.0, likely_high=50.0, example="6",
        if_high="For amps, type A after it.",
    ),
    Field(
        "percent", "percentage", "%", "percent", "percent", _spellings("percent", "% percent pc"),
        decimals=1, low=0.0, high=100.0, likely_low=0.0, likely_high=100.0, example="2",
    ),
    Field(
        "count", "count", "", "count", "count", (),
        decimals=0, low=0.0, high=500.0, likely_low=0.0, likely_high=500.0, example="3", whole=True,
    ),
    Field(
        "floor_m2", "floor area", "m²", "meter**2", "meter**2", _spellings("meter**2", "m² m2 m^2 sqm"),
        decimals=1, low=0.0, high=2000.0, likely_low=0.0, likely_high=200.0, example="60",
    ),
)  # fmt: skip

FIELDS: Mapping[str, Field] = MappingProxyType({each.key: each for each in _ALL})
"""Every enterable quantity by its key.

Hard limits lie past anything an instrument or a dwelling shows; likely spans are common practice (loop and
continuity of an LV final circuit; IR of sound cable; PFC of a public supply), not figures of a standard.
"""


def field(key: str) -> Field:
    """The quantity with this key.

    Raises NoSuchField when there is none.
    """
    try:
        return FIELDS[key]
    except KeyError:
        raise NoSuchField(key) from None


def symbol_of_spelling(spelling: str) -> str | None:
    """The sign of the unit a spelling means in any field; None when no field knows it or fields differ on it."""
    meant = {unit for each in _ALL if (unit := each.unit_for(spelling)) is not None}
    return SYMBOLS[meant.pop()] if len(meant) == 1 else None
