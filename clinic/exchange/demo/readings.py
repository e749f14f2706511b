"""How an invented eye's truth becomes the entries a technician would type."""

import datetime as dt

import numpy as np

from clinic.exchange.demo.model import InventedEye
from clinic.exchange.demo.numbers import numbers
from clinic.exchange.demo.rows import Given, Readings

# Standard chart lines as printed, five letters each, from 20/10 (100 letters) down.
LINES_FT = (
    "20/10 20/12.5 20/16 20/20 20/25 20/32 20/40 20/50 20/63 20/80 20/100 20/125 20/160 20/200 "
    "20/250 20/320 20/400 20/500 20/630"
).split()
LINES_DECIMAL = (
    "2.0 1.6 1.25 1.0 0.8 0.63 0.5 0.4 0.32 0.25 0.2 0.16 0.125 0.1 0.08 0.063 0.05 0.04 0.032"
).split()
FIRST_LINE_LETTERS = 100


def as_entered(letters: int, chart: str) -> tuple[str, str, str]:
    """Return acuity as typed, its notation and its chart."""
    if chart == "etdrs_letters":
        return str(letters), "etdrs_letters", "etdrs"
    place = min(len(LINES_FT) - 1, max(0, round((FIRST_LINE_LETTERS - letters) / 5)))
    lines = LINES_FT if chart == "snellen_ft" else LINES_DECIMAL
    return lines[place], chart, "snellen"


def quality(rng: np.random.Generator) -> str:
    """Return how good the scan was said to be; now and then nobody said."""
    return str(rng.choice(("good", "poor", ""), p=(0.955, 0.015, 0.03)))


def fluid_grade(rng: np.random.Generator, seen: bool) -> str:
    """Return a grade of fluid; now and then unsure."""
    if rng.random() < 0.02:
        return "unsure"
    return "yes" if seen else "no"


def measure(
    rng: np.random.Generator, eye: InventedEye, scanner: tuple[str, str], chart: str, lens: str
) -> tuple[Readings, int]:
    """Return the measured part of one eye today, and the letters behind the typed acuity."""
    letters = eye.read_letters(rng)
    acuity, notation, kind = as_entered(letters, chart)
    graded = rng.random() > 0.08
    wet = eye.is_wet()
    srf = eye.shows_srf and eye.fluid_um > 2.5 * numbers()["fluid"]["wet_um"]
    with_iop = rng.random() > 0.05
    return (
        Readings(
            cst_um=eye.read_cst(rng, scanner[1]),
            scanner=scanner[0],
            scan_quality=quality(rng),
            irf=fluid_grade(rng, wet) if graded else "not_graded",
            srf=fluid_grade(rng, srf) if graded else "not_graded",
            grader="clinician" if graded else "",
            acuity=acuity,
            notation=notation,
            chart=kind,
            correction="glasses",
            iop_tenths=eye.read_iop_tenths(rng) if with_iop else None,
            iop_method="applanation" if with_iop else "",
            lens=lens,
            symptoms="none" if rng.random() < 0.5 else "",
        ),
        letters,
    )


def give(rng: np.random.Generator, agent: str, before_tenths: int | None) -> Given:
    """Return the treated part for one treatment, with the check after it where one was written."""
    table = numbers()["agent"][agent]
    checked = rng.random() < 0.4
    after = None
    if checked and before_tenths is not None and rng.random() < 0.6:
        after = before_tenths + 10 * int(rng.integers(1, 8))
    return Given(
        outcome="given",
        agent=agent,
        dose_ug=int(table["dose_ug"]),
        route="intravitreal",
        implant=bool(table.get("implant", False)),
        perception_after="fingers" if checked else "",
        iop_after_tenths=after,
    )


def months_before(day: dt.date, months: int) -> dt.date:
    """Return a day some months earlier, counting a month as 30 days."""
    return day - dt.timedelta(days=30 * months)
