"""Blood pressure in whole mmHg and total protein in tenths of g/dL. Context, used by no rule."""

import re

from trends.errors import EbblineError
from trends.measures.ranges import ranges

WHOLE = re.compile(r"[0-9]{1,3}")
DECIMAL = re.compile(r"[0-9]{1,3}(?:[.,][0-9])?")


class BloodRefused(EbblineError):
    """A blood pressure or protein that can't be taken."""


def _refused(what: str, text: str, allowed: str, why: str) -> BloodRefused:
    return BloodRefused(what, text, allowed, why, "Check the value and type it again.")


def _mmhg(name: str, what: str, text: str) -> int:
    bounds = ranges(name)
    if not WHOLE.fullmatch(text.strip()) or not (
        bounds.number("least") <= int(text) <= bounds.number("most")
    ):
        raise _refused(what, text, bounds.text("allowed"), bounds.text("why"))
    return int(text)


def systolic(text: str) -> int:
    """Return a typed systolic pressure in mmHg; raises ``BloodRefused``."""
    return _mmhg("systolic_mmhg", "systolic blood pressure", text)


def diastolic(text: str) -> int:
    """Return a typed diastolic pressure in mmHg; raises ``BloodRefused``."""
    return _mmhg("diastolic_mmhg", "diastolic blood pressure", text)


def protein_tenths(text: str) -> int:
    """Return a typed total protein in tenths of g/dL; 70 is refused as g/L."""
    bounds = ranges("total_protein_tenths")
    plain = text.strip().replace(",", ".")
    if not DECIMAL.fullmatch(plain):
        raise _refused("total protein", text, bounds.text("allowed"), bounds.text("why"))
    whole, _, part = plain.partition(".")
    value = int(whole) * 10 + int(part or 0)
    if bounds.number("least") <= value <= bounds.number("most"):
        return value
    as_g_l = (
        bounds.number("looks_like_g_l_from") <= int(whole) <= bounds.number("looks_like_g_l_to")
    )
    why = bounds.text("looks_like_g_l_why" if as_g_l else "why")
    raise _refused("total protein", text, bounds.text("allowed"), why)


def protein_shown(tenths: int) -> str:
    """Return a total protein in g/dL as text, ``7.2``."""
    return f"{tenths // 10}.{tenths % 10}"
