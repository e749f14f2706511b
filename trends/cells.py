"""One reader a column of the tidy file: text in, number out, or what is allowed and why.

Each reader takes the cell's text (never blank) and returns a whole number; it raises
``EbblineError`` or returns through ``closed`` for words of a list.
"""

import datetime as dt
import re
from collections.abc import Callable, Mapping

from trends import words
from trends.errors import EbblineError
from trends.measures import agents, blood, context, pressure, symptoms, thickness
from trends.measures.ranges import ranges
from trends.visits import day_number

Reader = Callable[[str], int]
ISO = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")


def refuse(what: str, text: str, allowed: str, why: str) -> EbblineError:
    """Return the error of one cell."""
    return EbblineError(what, text, allowed, why, "Correct the cell.")


def day(text: str) -> int:
    """Read an ISO date as a day number."""
    try:
        if not ISO.fullmatch(text):
            raise ValueError
        return day_number(dt.date.fromisoformat(text))
    except ValueError as error:
        raise refuse(
            "date", text, "a date such as 2026-03-04", "03/04/2026 is two days in two countries"
        ) from error


def closed(list_of_words: tuple[str, ...], what: str) -> Reader:
    """Return a reader of one closed list."""

    def read(text: str) -> int:
        if text not in list_of_words:
            raise refuse(what, text, ", ".join(list_of_words), "the word is not of the list")
        return list_of_words.index(text)

    return read


def birth_year(text: str) -> int:
    """Read a year of birth."""
    if not re.fullmatch(r"(19|20)[0-9]{2}", text):
        raise refuse("year of birth", text, "a year such as 1958", "only the year is kept")
    return int(text)


def dose_ug(text: str) -> int:
    """Read a dose in mg as whole µg."""
    bounds = ranges("dose_ug")
    plain = text.replace(",", ".")
    if not re.fullmatch(r"[0-9]{1,2}(\.[0-9]{1,3})?", plain):
        raise refuse("dose", text, bounds.text("allowed"), "a dose is a number of mg")
    whole, _, part = plain.partition(".")
    value = int(whole) * 1000 + int(part.ljust(3, "0") or 0)
    if not bounds.number("least") <= value <= bounds.number("most"):
        raise refuse("dose", text, bounds.text("allowed"), bounds.text("why"))
    return value


def _checked_agent(text: str) -> int:
    agents.parse(text)
    return 0


def _symptom_bits(text: str) -> int:
    found = symptoms.parse(text) or symptoms.Symptoms((), ())
    return found.present_bits | found.gone_bits << len(words.SYMPTOMS)


def _context_bits(text: str) -> int:
    found = context.parse(text)
    return found.bits if found else words.NOT_RECORDED


def _checked_lot(text: str) -> int:
    bounds = ranges("lot")
    if not lots_of(text) or max(map(len, lots_of(text))) > bounds.number("longest"):
        raise refuse("lot", text, bounds.text("allowed"), bounds.text("why"))
    return 0


def lots_of(text: str) -> list[str]:
    """Return the lots of one cell, without outer blanks, in lower case."""
    return [one.strip().lower() for one in text.split("+") if one.strip()]


# Tidy column -> reader. Person, eye and date are always needed; acuity is read with its notation.
READERS: Mapping[str, Reader] = {
    "eye": closed(words.SIDES, "eye"),
    "date": day,
    "kind": closed(words.KINDS, "kind of visit"),
    "cst_um": thickness.micrometres,
    "oct_class": closed(words.OCT_CLASSES, "OCT class"),
    "scan_quality": closed(words.QUALITIES, "scan quality"),
    "irf": closed(words.GRADES, "intraretinal fluid"),
    "srf": closed(words.GRADES, "subretinal fluid"),
    "acuity_notation": closed(words.NOTATIONS, "acuity notation"),
    "acuity_chart": closed(words.CHARTS, "acuity chart"),
    "acuity_correction": closed(words.CORRECTIONS, "correction"),
    "iop_mmhg": pressure.tenths,
    "iop_method": closed(words.IOP_METHODS, "tonometer"),
    "iop_after_mmhg": pressure.tenths,
    "agent": _checked_agent,
    "dose_mg": dose_ug,
    "laser": closed(("no", "yes", "focal", "grid", "panretinal"), "laser"),
    "sex": closed(words.SEXES, "sex"),
    "birth_year": birth_year,
    "cause": closed(words.CAUSES, "cause"),
    "status": closed(words.STATUSES, "status"),
    "regimen": closed(words.REGIMENS, "regimen"),
    "due_date": day,
    "symptoms": _symptom_bits,
    "contact": closed(("no", "yes"), "contact"),
    "lot": _checked_lot,
    "treatment_planned": closed(("no", "yes"), "treatment planned"),
    "context": _context_bits,
    "systolic_mmhg": blood.systolic,
    "diastolic_mmhg": blood.diastolic,
    "total_protein_g_dl": blood.protein_tenths,
}
NUMBERS = (
    "cst_um",
    "iop_mmhg",
    "iop_after_mmhg",
    "birth_year",
    "due_date",
    "systolic_mmhg",
    "diastolic_mmhg",
    "total_protein_g_dl",
)
"""Columns of numbers, blank as ``MISSING``; the others hold codes."""
NEEDED = ("person", "eye", "date")
TIDY_COLUMNS = (
    "person",
    "eye",
    "date",
    "kind",
    "cst_um",
    "oct_class",
    "scanner",
    "scan_quality",
    "irf",
    "srf",
    "acuity",
    "acuity_notation",
    "acuity_chart",
    "acuity_correction",
    "iop_mmhg",
    "iop_method",
    "iop_after_mmhg",
    "agent",
    "dose_mg",
    "laser",
    "sex",
    "birth_year",
    "cause",
    "status",
    "regimen",
    "due_date",
    "symptoms",
    "contact",
    "lot",
    "treatment_planned",
    "context",
    "systolic_mmhg",
    "diastolic_mmhg",
    "total_protein_g_dl",
)
