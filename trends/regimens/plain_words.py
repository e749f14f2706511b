"""Readings of the simpler regimens in words, with their working."""

from collections.abc import Sequence

import numpy as np

from trends.regimens.courses import NONE
from trends.regimens.plain import Plain
from trends.regimens.readings import Said, reading_text
from trends.regimens.spoken import AtPositions, RegimenInfo
from trends.regimens.telling import (
    NOISE,
    OPTIONS,
    headline,
    measured_values,
    missing_words,
    open_choices,
)
from trends.ruling import Description


def describe(
    courses: Plain,
    told: AtPositions,
    p: int,
    info: RegimenInfo,
    lines: Sequence[str],
    earlier: Sequence[int] = (),
) -> Description:
    """Put the reading at a position into words; ``lines`` is its arithmetic."""
    w = courses.visited
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    why = "; ".join(lines) or "nothing measured"
    if told.said[p] == Said.CANT_TELL:
        why = missing_words(int(told.missing[p])) if told.missing[p] else "no earlier value"
    if told.said[p] == Said.LOADING:
        why = f"injections in this course so far: {int(courses.injections[p])}"
    reference = int(told.ref[p])
    has_scan = reference != NONE and bool(w.readings.has_cst[reference])
    return Description(
        sentence=headline(w, p, info, f"{reading} ({why})"),
        values=measured_values(w, [one for one in earlier if one != NONE], p),
        arithmetic=[
            f"injections of this course before the visit: {int(courses.injections[p])}",
            *lines,
        ],
        limit=info.form,
        noise=NOISE,
        unknowns=open_choices(courses.limits, info),
        options=list(OPTIONS),
        not_for=list(info.not_for),
        reference_value=int(w.readings.cst_um[reference]) if has_scan else None,
    )


def place(courses: Plain, p: int) -> str:
    """Return where the course stands after the visit at a position."""
    w = courses.visited
    if w.not_recorded[p] or (courses.agent_unknown[p] and not w.injected[p]):
        return "treatment not recorded"
    if courses.history_unknown[p]:
        return "history not entered"
    loading = int(np.broadcast_to(courses.number("loading"), w.day.size)[p])
    count = int(courses.injections[p] + w.injected[p])
    return f"loading {count} of {loading}" if count <= loading else "after loading"
