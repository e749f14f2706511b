"""Invented visits in bulk for the engine's bench: plausible values, drawn in columns."""

import datetime as dt
from typing import Any

import numpy as np

from trends import words
from trends.frames import SCALES
from trends.measures.logmar import e4_of_letters
from trends.visits import MISSING, Ints, Visits, sorted_visits

FIRST_DAY = dt.date(2019, 1, 7)
GAP_DAYS = (28, 28, 29, 30, 35, 42, 56, 70)
AGENTS = ("none", "aflibercept", "bevacizumab", "ranibizumab")
NOT_RECORDED = -1


def wandering(rng: np.random.Generator, start: Any, step: float, each: int) -> Any:
    """Return one random walk an eye, visits in a row, as one long column."""
    steps = rng.normal(0.0, step, size=(start.size, each))
    return (start[:, None] + np.cumsum(steps, axis=1)).ravel()


def blanked(rng: np.random.Generator, values: Any, share: float, absent: int = MISSING) -> Any:
    """Return whole numbers with a share of them missing."""
    return np.where(rng.random(values.size) < share, absent, np.rint(values)).astype(np.int64)


def days(rng: np.random.Generator, eyes: int, each: int) -> Ints:
    """Return day numbers, each eye's visits four to ten weeks apart."""
    gaps = rng.choice(GAP_DAYS, size=(eyes, each))
    gaps[:, 0] = (FIRST_DAY - dt.date(1970, 1, 1)).days
    return np.asarray(np.cumsum(gaps, axis=1).ravel(), dtype=np.int64)


def many_visits(eyes: int, each: int, seed: int = 7) -> Visits:
    """Return ``eyes`` eyes (two a person) with ``each`` visits, as the engine's own store."""
    rng = np.random.default_rng(seed)
    rows = eyes * each
    eye = np.repeat(np.arange(eyes), each)
    day = days(rng, eyes, each)
    letters = np.clip(wandering(rng, rng.uniform(40, 82, eyes), 2.5, each), 0, 95)
    letters = blanked(rng, letters, 0.02)
    with_letters = letters != MISSING
    columns = {
        "kind": np.zeros(rows),
        "cst_um": blanked(
            rng, np.clip(wandering(rng, rng.uniform(250, 420, eyes), 12.0, each), 160, 900), 0.03
        ),
        "oct_class": np.full(rows, words.OCT_CLASSES.index("SD-BM")),
        "scanner": np.zeros(rows),
        "scan_quality": rng.choice([NOT_RECORDED, 0, 1], p=[0.03, 0.02, 0.95], size=rows),
        "irf": rng.integers(0, len(words.GRADES), rows),
        "srf": rng.integers(-1, 2, rows),
        "acuity_level": np.where(with_letters, words.ON_CHART, NOT_RECORDED),
        "letters": letters,
        "logmar_e4": np.where(with_letters, e4_of_letters(0) - 200 * letters, MISSING),
        "acuity_scale": np.where(with_letters, SCALES.index("etdrs"), NOT_RECORDED),
        "five_letter_chart": with_letters.astype(np.int64),
        "acuity_correction": np.full(rows, words.CORRECTIONS.index("glasses")),
        "iop_tenths": blanked(
            rng, 10 * np.clip(wandering(rng, rng.uniform(12, 18, eyes), 1.0, each), 6, 40), 0.05
        ),
        "iop_method": np.zeros(rows),
        "agents": rng.choice([NOT_RECORDED, 0, 1, 2, 3], p=[0.05, 0.2, 0.4, 0.15, 0.2], size=rows),
        "symptoms_recorded": rng.integers(0, 2, rows),
        "due_day": day + 28,
        "sex": (eye // 2) % 2,
        "cause": np.zeros(rows),
        "status": np.zeros(rows),
        "regimen": np.repeat(rng.integers(0, len(words.REGIMENS), eyes), each),
    }
    lists = {"scanner": ("A",), "agents": AGENTS, "regimen": words.REGIMENS}
    persons = np.char.add("P", (eye // 2).astype("U8")).tolist()
    return sorted_visits(persons, eye % 2, day, columns, lists)


def day_after(each: int) -> dt.date:
    """Return an as-of day later than every visit drawn."""
    return FIRST_DAY + dt.timedelta(days=max(GAP_DAYS) * each + 1)
