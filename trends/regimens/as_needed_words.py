"""An as-needed reading in words, with its working."""

from trends.regimens.courses import NO_DAY, NONE
from trends.regimens.needing import AsNeededCourses
from trends.regimens.readings import Said, reading_text
from trends.regimens.spoken import RegimenInfo
from trends.regimens.telling import (
    ANSWERS,
    NOISE,
    OPTIONS,
    changes,
    compared,
    headline,
    measured_values,
    missing_words,
    number_at,
    open_choices,
)
from trends.ruling import Description
from trends.saying import date_words


def describe(courses: AsNeededCourses, p: int, info: RegimenInfo) -> Description:
    """Put the reading at a position into words."""
    w, told = courses.visited, courses.told
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    seen = sorted({ref for ref, _now in _pairs(courses, p)} - {NONE})
    reference = int(told.ref[p])
    return Description(
        sentence=headline(w, p, info, f"{reading} ({_why(courses, p)})"),
        values=measured_values(w, seen, p),
        arithmetic=_arithmetic(courses, p),
        limit=info.form,
        noise=NOISE,
        unknowns=open_choices(courses.limits, info),
        options=list(OPTIONS),
        not_for=list(info.not_for),
        reference_value=int(w.readings.cst_um[reference])
        if w.readings.has_cst[reference]
        else None,
    )


def _why(courses: AsNeededCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told, s = courses.told, courses.state
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    reference = int(told.ref[p])
    if reference == NONE:
        return f"injections in this course so far: {int(s['injections'][p])}"
    when = date_words(int(courses.visited.day[reference]))
    since = "withholding began" if s["held"][p] else "the last injection visit"
    return f"{changes(courses.visited, reference, p)} since {since}, {when}"


def _pairs(courses: AsNeededCourses, p: int) -> list[tuple[int, int]]:
    """Return the pairs of visits compared at a position."""
    pairs = (*courses.pairs, *courses.held_pairs)
    return list(dict.fromkeys((int(a[p]), int(b[p])) for a, b, counts in pairs if counts[p]))


def _arithmetic(courses: AsNeededCourses, p: int) -> list[str]:
    s, w = courses.state, courses.visited
    lines = [f"injections of this course before the visit: {int(s['injections'][p])}"]
    if s["first_day"][p] != NO_DAY:
        first = int(s["first_day"][p])
        lines.append(
            f"first injection {date_words(first)}, {int(w.day[p]) - first} days before; success is "
            f"asked before day {number_at(courses.params.success_until_day, p)}"
        )
    if not _pairs(courses, p):
        lines.append("fewer than two injection visits since the last withholding to compare with")
    lines += [compared(w, reference, now) for reference, now in _pairs(courses, p)]
    if courses.early[p]:
        lines.append(_success_line(courses, p))
    lines.append(f"criteria to withhold: {ANSWERS.get(int(courses.walk.met[p]), 'not met')}")
    return lines


def _success_line(courses: AsNeededCourses, p: int) -> str:
    low, high = (int(limit[p]) for limit in courses.success.limit_um)
    limit = f"{low} µm" if low == high else f"{low} µm (women) or {high} µm (men), sex not recorded"
    enough = number_at(courses.number("success_letters"), p)
    said = ANSWERS.get(int(courses.success.told[p]), "no")
    return f"success (at least {enough} letters; CST below {limit if high else 'no limit'}): {said}"
