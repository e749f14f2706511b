"""Symptoms that can't wait: pain, redness, vision loss, blur, floaters, light sensitivity.

A symptom present now is raised first whatever the time since treatment, the status or the kind of
entry; passed ones are kept in mind. If both eyes were last treated on one day, the fellow eye is
raised too. Source: symptoms to report without delay (product labels). It would rather raise
falsely. Runs always and can't be switched off; shows the site's own emergency text.

Raised: a call on day 4, "pain, red, blurred". Not: asked, none.
"""

from typing import Any

import numpy as np

from trends import saying
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures import symptoms
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import Bools, Ints, Visits

INFO = RuleInfo(
    id="alarm_symptoms",
    version=1,
    title="Symptoms that can't wait",
    needs=("symptoms",),
    cites=("faricimab-smpc",),
    leans="would rather raise falsely than miss",
    floor=True,
    parts=("present now", "fellow eye", "passed"),
)


def last_treated_day(v: Visits) -> Ints:
    """Return the day of the eye's last treatment on an earlier day (n,), -1 without one."""
    last = last_before(v, v.eye.astype(np.int64), v.given == 1)
    return np.where(last >= 0, v.day[last], -1)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; every status and kind."""
    asked = v.symptoms_recorded == 1
    present, gone = v.symptoms_present > 0, v.symptoms_gone > 0
    fellow, lone = _fellows(v, asked & present)
    applies = asked | c.measured_kind | fellow
    lacking = bit("symptoms")
    parts = [
        Part(applies, asked, present, RANKS["raise_first"], None, lacking),
        Part(applies, asked | fellow, fellow, RANKS["raise_first"], None, lacking),
    ]
    if not limits.floor_only:
        passed = RANKS[str(limits["rank_passed"])]
        parts.append(Part(applies, asked, gone, passed, None, lacking))
    judged = any_of(parts, applies)
    return Judged(
        judged.outcome,
        judged.rank,
        judged.ref,
        judged.part,
        judged.missing,
        extra={"fellow_of": lone},
    )


def _fellow_eyes(v: Visits) -> Ints:
    """Return for each eye the same person's other eye, -1 without one."""
    person = v.person[v.offsets[:-1]]
    same = person[1:] == person[:-1]
    with_next = np.append(same, False)[: person.size]
    with_last = np.insert(same, 0, False)[: person.size]
    eyes = np.arange(person.size)
    return np.where(with_next, eyes + 1, np.where(with_last, eyes - 1, -1))


def _fellows(v: Visits, alarmed: Bools) -> tuple[Bools, list[tuple[int, int]]]:
    """Return the fellow's own rows to raise, and (row, fellow eye) where it has none that day.

    Both eyes' last treatment must fall on one day.
    """
    days = last_treated_day(v)
    rows = np.flatnonzero(alarmed & (days >= 0))
    others = _fellow_eyes(v)[v.eye[rows]]
    rows, others = rows[others >= 0], others[others >= 0]
    low, span = int(v.day.min(initial=0)), int(v.day.max(initial=0)) - int(v.day.min(initial=0)) + 1
    keys = v.eye.astype(np.int64) * span + (v.day - low)
    asked = others.astype(np.int64) * span + (v.day[rows] - low)
    treated = np.flatnonzero(v.given == 1)
    at = np.searchsorted(keys[treated], asked, side="left") - 1
    hit = treated[np.maximum(at, 0)] if treated.size else at
    same = (at >= 0) & (v.eye[hit] == others) & (v.day[hit] == days[rows])
    rows, others, asked = rows[same], others[same], asked[same]
    first, end = np.searchsorted(keys, asked, "left"), np.searchsorted(keys, asked, "right")
    edges = np.zeros(len(v) + 1, dtype=np.int64)
    np.add.at(edges, first, 1)
    np.add.at(edges, end, -1)
    lone = first == end
    raised = np.cumsum(edges[:-1]) > 0
    return raised, list(zip(rows[lone].tolist(), others[lone].tolist(), strict=True))


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, which = saying.eye(v, row), int(judged.part[row])
    days = int(v.day[row]) - int(last_treated_day_of(v, row))
    after = f", {days} days after the last treatment" if last_treated_day_of(v, row) >= 0 else ""
    shown = _named(int(v.symptoms_present[row])) or _named(int(v.symptoms_gone[row])) or "none"
    present = which == INFO.parts.index("present now")
    sentence = f"{eye}: {shown} {'now' if present else 'passed'}{after}"
    if which == INFO.parts.index("fellow eye"):
        sentence = (
            f"{eye}: treated on the same day as the fellow eye, which has symptoms now{after}"
        )
    if which < 0:
        sentence = (
            f"{eye}: symptoms asked, none"
            if int(v.symptoms_recorded[row])
            else (f"{eye}: symptoms not asked on {saying.day(v, row)}")
        )
    first = which in (0, 1)
    return Description(
        sentence=sentence,
        values=saying.treatment_value(v, saying.last_treatment(v, row)) + _asked(v, row),
        limit="any of the list, present now",
        noise="none: a symptom is what the patient says",
        options=[] if first else ["ask again", "look again at the next visit"],
        not_for=["a promise that nothing is wrong when none is named"],
        emergency=first,
    )


def _named(bits: int) -> str:
    return ", ".join(name.replace("_", " ") for name in symptoms.names(bits))


def _asked(v: Visits, row: int) -> list[dict[str, Any]]:
    """Return what was told, present and passed apart; nothing where nobody asked."""
    if not int(v.symptoms_recorded[row]):
        return []
    now, gone = _named(int(v.symptoms_present[row])), _named(int(v.symptoms_gone[row]))
    told = "; ".join(part for part in (now, f"{gone} (passed)" if gone else "") if part)
    return [saying.own_value(v, row, "symptoms", told or "none", "", "asked")]


def last_treated_day_of(v: Visits, row: int) -> int:
    """Return the day of the last treatment before one row, -1 without one."""
    last = saying.last_treatment(v, row)
    return int(v.day[last]) if last >= 0 else -1
