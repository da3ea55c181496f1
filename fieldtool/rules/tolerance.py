"""What a meter can be wrong by: gain and digits of the instrument, and the mode of a loop test.

Within one instrument errors are taken as a straight sum, because gain and lead error are shared; default
±(2 % of the reading + 2 digits), common practice.
"""

from __future__ import annotations

from functools import lru_cache

from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.place import Instrument
from fieldtool.job.reading import Reading
from fieldtool.quantities.entry import last_digit as shown_digit
from fieldtool.quantities.fields import field

__all__ = ["DEFAULT_DIGITS", "DEFAULT_GAIN", "NO_TRIP_OHM", "agree_ohm", "instrument_of", "last_digit", "tolerance"]

DEFAULT_GAIN = 0.02
"""Share of the reading [-]; common practice where the maker's figure was not entered."""

DEFAULT_DIGITS = 2.0
"""Last digits [-]; common practice where the maker's figure was not entered."""

NO_TRIP_OHM = 0.3
"""How far a no-trip loop reading may be off [ohm]; common practice."""

_AGREE_OHM = 0.05


def last_digit(reading: Reading, *, default: float = 0.01) -> float:
    """Worth of the last digit that the meter showed, in the reading's SI unit; ``default`` where not known."""
    key = TESTS[reading.test].field
    if key is None or not reading.raw:
        return default
    return _shown(key, reading.raw)


@lru_cache(maxsize=4096)
def _shown(key: str, raw: str) -> float:
    return shown_digit(field(key), raw)


def instrument_of(job: Job, reading: Reading) -> Instrument | None:
    """The instrument a reading was taken with; None where it was not named."""
    return next((item for item in job.instruments if item.id == reading.instrument), None)


def tolerance(job: Job, reading: Reading) -> float:
    """How far the true value may be from this reading, either way [unit of the reading].

    A figure given by the distributor or worked out elsewhere carries none of the meter's own.
    """
    if reading.value is None or reading.mode in ("enquiry", "calculated") or reading.origin == "calculated":
        return 0.0
    tool = instrument_of(job, reading)
    gain = tool.gain_percent / 100 if tool is not None else DEFAULT_GAIN
    digits = tool.digits if tool is not None else DEFAULT_DIGITS
    own = gain * reading.value + digits * last_digit(reading)
    if reading.test in ("zs", "zdb", "ze", "zln") and reading.mode == "no_trip":
        own = max(own, tool.no_trip_ohm if tool is not None else NO_TRIP_OHM)
    return own


def agree_ohm(first: float, second: float) -> float:
    """The difference within which two readings of one loop agree [ohm]: the larger of 0.05 and their tolerances."""
    return max(_AGREE_OHM, first + second)
