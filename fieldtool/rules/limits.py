"""Every numerical limit as a value, made once: what it is, what is in it, where it stands, how it grows.

Rules judge against these and headroom reaches for them, so no limit is written down twice.
"""

from __future__ import annotations

from fieldtool.answers import Growth, Limit
from fieldtool.job.place import Rcd
from fieldtool.reference.look import Figure, constant, least_insulation_mohm, rcd_most_ms, zs_max_ohm
from fieldtool.rules.facts import Protection

__all__ = [
    "insulation_limit",
    "made",
    "rcd_time_limit",
    "touch_limit",
    "volt_drop_limit",
    "zs_limit",
]


def made(figure: Figure, basis: str, growth: Growth = "mixed", value: float | None = None) -> Limit:
    """A limit from a looked-up figure, its provenance carried along."""
    return Limit(
        figure.value if value is None else value,
        figure.unit,
        basis,
        figure.provenance.cite(),
        figure.provenance.sure,
        growth,
    )


def zs_limit(protection: Protection) -> Limit:
    """The most that a loop reading may be at ambient for 0.4 s [ohm]: 0.8 of the unrounded book value.

    Source: 411.4.4 with Tables 41.2 and 41.3; the 80 % of Appendix 3 allows for the conductors' running
    temperature. Plug fuses of 5, 7 and 10 A are held to the 13 A limit, which is the lower.
    """
    book = zs_max_ohm(protection.kind.key, protection.in_a)
    share = constant("loop.measured_share").value
    name = f"{protection.kind.words} {protection.in_a:g} A"
    if protection.fused and 3 < protection.in_a < 13:
        name += ", held to the 13 A limit"
    return Limit(
        book.value * share,
        "ohm",
        f"{name}: {book.value:.4g} × {share:g}, Cmin in, 80 % in",
        book.provenance.cite(),
        book.provenance.sure,
        "rises",
        cmin=True,
        eighty_percent=True,
    )


def touch_limit(rcd: Rcd) -> Limit:
    """The most that the earth loop may be on TT with an RCD [ohm]: 50 V / I∆n. Source: 411.5.3."""
    volts = constant("rcd.touch_v")
    return made(volts, f"50 V / {rcd.i_dn_ma:g} mA", "rises", volts.value / (rcd.i_dn_ma / 1000))


def volt_drop_limit(u0_v: float) -> Limit:
    """The most voltage lost to the farthest point [V]: 5 % on a public supply. Source: 525.202, Appendix 4."""
    share = constant("voltdrop.other_share")
    value = share.value * u0_v
    return Limit(value, "V", "5 % of the supply", share.provenance.cite(), share.provenance.sure, "rises")


def insulation_limit(test_v: float = 500.0) -> Limit:
    """Least insulation resistance [ohm]. Source: Table 64."""
    figure = least_insulation_mohm(test_v)
    return Limit(figure.value * 1e6, "ohm", f"at {test_v:g} V", figure.provenance.cite(), figure.provenance.sure)


def rcd_time_limit(rcd: Rcd) -> Limit:
    """Longest trip time at rated residual current [ms]. Source: 643.8."""
    kind = "bs4293" if rcd.standard == "4293" else "s" if rcd.delay == "s" else "general"
    return made(rcd_most_ms(kind), f"one test at {rcd.i_dn_ma:g} mA, {kind.replace('s', 'S') if kind == 's' else kind}")
