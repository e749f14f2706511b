"""Intraocular pressure in tenths of mmHg, mean arterial and perfusion pressure.

Perfusion pressure is two thirds of MAP minus IOP, seated (Van Keer et al., IOVS 2016;57:2260): the
other grouping, two thirds of the difference, overestimates by 5 to 25 %. Context only, no rule.
"""

import re

from trends.errors import EbblineError
from trends.measures.ranges import ranges

TENTHS = re.compile(r"^[0-9]{1,3}(?:[.,][0-9])?$")


class PressureRefused(EbblineError):
    """A pressure that can't be taken."""


def refuse(what: str, value: object, allowed: str, why: str) -> PressureRefused:
    """Return the error for a pressure."""
    return PressureRefused(what, value, allowed, why, "Check the reading and type it again.")


def tenths(text: str) -> int:
    """Return a typed IOP in tenths of mmHg; point or comma; raises ``PressureRefused``."""
    bounds = ranges("iop_tenths")
    plain = text.strip()
    if not TENTHS.match(plain):
        raise refuse("IOP", text, bounds.text("allowed"), "Tonometers read no finer than a tenth.")
    whole, _, part = plain.replace(",", ".").partition(".")
    value = int(whole) * 10 + int(part or 0)
    if not bounds.number("least") <= value <= bounds.number("most"):
        raise refuse("IOP", text, bounds.text("allowed"), bounds.text("why"))
    return value


def shown(value_tenths: int) -> str:
    """Return tenths as mmHg in words: ``17`` or ``17.5``."""
    whole, part = divmod(value_tenths, 10)
    return f"{whole}.{part}" if part else str(whole)


def mean_arterial(systolic: float, diastolic: float) -> float:
    """Return MAP = DBP + (SBP - DBP)/3 in mmHg; raises when systolic isn't above diastolic."""
    if systolic <= diastolic:
        raise refuse(
            "blood pressure",
            f"{systolic:g}/{diastolic:g}",
            "systolic above diastolic",
            "The two may be swapped.",
        )
    return diastolic + (systolic - diastolic) / 3


def perfusion(systolic: float, diastolic: float, iop_mmhg: float) -> float:
    """Return mean ocular perfusion pressure, 2/3 MAP - IOP, mmHg: an estimate, seated."""
    return 2 * mean_arterial(systolic, diastolic) / 3 - iop_mmhg


def part_perfusion(arterial_mmhg: float, iop_mmhg: float) -> float:
    """Return systolic or diastolic perfusion pressure, mmHg: that arterial pressure minus IOP.

    From memory, check the original.
    """
    return arterial_mmhg - iop_mmhg
