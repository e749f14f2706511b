"""Central subfield thickness: whole µm, by OCT class and boundary."""

import re

from trends.errors import EbblineError
from trends.measures.ranges import ranges

CLASS_WORDS = {
    "TD": "time-domain",
    "SD-RPE": "spectral-domain to the pigment epithelium",
    "SD-BM": "spectral-domain to Bruch's membrane",
    "SS": "swept-source",
}


class ThicknessRefused(EbblineError):
    """A thickness that can't be taken."""


def micrometres(text: str) -> int:
    """Return a typed CST in whole µm; raises ``ThicknessRefused`` (mm and decimals too)."""
    bounds = ranges("cst_um")
    plain = text.strip()
    whole = int(plain) if re.fullmatch(r"[0-9]{1,6}", plain) else None
    if whole is None or not bounds.number("least") <= whole <= bounds.number("most"):
        looks_like_mm = re.fullmatch(r"[01]?[.,][0-9]{2,3}", plain) is not None
        why = "This looks like millimetres." if looks_like_mm else bounds.text("why").capitalize()
        raise ThicknessRefused(
            "CST", text, bounds.text("allowed"), why + ".", "Type whole µm from the scan."
        )
    return whole


def is_unlikely(cst_um: int) -> bool:
    """Say whether a thickness is worth a question before it is stored."""
    bounds = ranges("cst_um")
    return cst_um < bounds.number("unlikely_below") or cst_um > bounds.number("unlikely_above")
