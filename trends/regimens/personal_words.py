"""A personal-interval reading in words, with its working."""

from trends.regimens.courses import NONE
from trends.regimens.matrix import CELLS, EXTEND, KEEP, REDUCE, ROWS
from trends.regimens.personal_courses import PersonalCourses
from trends.regimens.plan_words import plan_line, reference_value
from trends.regimens.readings import Said, reading_text
from trends.regimens.spoken import RegimenInfo
from trends.regimens.telling import (
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


def describe(courses: PersonalCourses, p: int, info: RegimenInfo) -> Description:
    """Put the reading at a position into words."""
    w, told = courses.visited, courses.told
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    reference = int(told.ref[p])
    return Description(
        sentence=headline(w, p, info, f"{reading} ({_why(courses, p)})"),
        values=measured_values(w, (reference,), p),
        arithmetic=_arithmetic(courses, p),
        limit=info.form,
        noise=NOISE,
        unknowns=open_choices(courses.limits, info),
        options=list(OPTIONS),
        not_for=list(info.not_for),
        reference_value=reference_value(w, reference),
    )


def _why(courses: PersonalCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told, w = courses.told, courses.visited
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    if told.said[p] == Said.LOADING_LEAST:
        return f"injections in this course so far: {int(courses.plan.injections[p])}"
    um = int(w.readings.cst_um[p])
    if not courses.started[p]:
        limit = int(courses.start_limit_um[p])
        return f"CST {um} µm, below {limit} µm: the reference thickness"
    if courses.lowered[p]:
        return f"reference thickness lowered to {um} µm; {_letters(courses, p)}"
    reference = int(told.ref[p])
    when = date_words(int(w.day[reference]))
    return f"{changes(w, reference, p)} since the reference scan, {when}; {_letters(courses, p)}"


def _letters(courses: PersonalCourses, p: int) -> str:
    """Return the letters lost against the mean of the best."""
    letters, r = courses.letters, courses.visited.readings
    number, total = int(letters.number[p]), int(letters.total[p])
    if not letters.known[p]:
        return "letters lost can't be told"
    lost = total - number * int(r.letters[p])
    return (
        f"best letters before {total} / {number} = {total / number:.1f}, now {int(r.letters[p])}: "
        f"{abs(lost) / number:.1f} {'lost' if lost >= 0 else 'gained'}"
    )


def _arithmetic(courses: PersonalCourses, p: int) -> list[str]:
    plan, w = courses.plan, courses.visited
    lines = [f"injections of this course before the visit: {int(plan.injections[p])}"]
    reference = int(courses.told.ref[p])
    if not courses.started[p] or reference == NONE:
        return [*lines, *_start_lines(courses, p)]
    if courses.lowered[p]:
        lines.append(_lowered_line(courses, p))
    else:
        lines.append("against the reference scan, " + compared(w, reference, p))
    return [*lines, _letters(courses, p), _matrix_line(courses, p), _plan(courses, p)]


def _start_lines(courses: PersonalCourses, p: int) -> list[str]:
    if not courses.asks_start[p]:
        return []
    limit = int(courses.start_limit_um[p])
    return [f"start: CST below {limit} µm" if limit else "start: no limit for this OCT class"]


def _lowered_line(courses: PersonalCourses, p: int) -> str:
    r, (reference, low) = courses.visited.readings, courses.carried
    was, one, now = (int(r.cst_um[at]) for at in (reference[p], low[p], p))
    within = number_at(courses.number("reset_within_um"), p)
    band = number_at(courses.number("cst_permille"), p) / 10
    return (
        f"two dosing visits running more than {band:g} % below {was} µm: {one} and {now} µm, "
        f"{abs(one - now)} µm apart (at most {within})"
    )


def _matrix_line(courses: PersonalCourses, p: int) -> str:
    """Return the matrix's possible rows, and the letters that part its bands."""
    number, matrix = courses.number, courses.matrix
    low, high = (number_at(number(name), p) / 10 for name in ("cst_permille", "cst_permille_high"))
    worded = (
        f"fall beyond {low:g} %",
        f"within {low:g} %",
        f"rise beyond {low:g} %",
        f"rise beyond {high:g} %",
    )
    some, many = (number_at(number(name), p) for name in ("letters", "letters_many"))
    rows = [row for row in range(len(ROWS)) if matrix.rows[row, p]]
    cells = "; ".join(f"{worded[row]}: {_cells(courses, row, p)}" for row in rows)
    return f"matrix for under {some}, {some} to under {many}, {many} or more letters lost: {cells}"


def _cells(courses: PersonalCourses, row: int, p: int) -> str:
    number = courses.number
    step, more = (number_at(number(name), p) for name in ("step_weeks", "big_step_weeks"))
    words = {EXTEND: f"+{step} weeks", KEEP: "keep", REDUCE: f"−{step} weeks"}
    return ", ".join(words.get(action, f"−{more} weeks") for action in CELLS[row])


def _plan(courses: PersonalCourses, p: int) -> str:
    number = courses.number
    step, more = (number_at(number(name), p) for name in ("step_weeks", "big_step_weeks"))
    return plan_line(
        courses.plan,
        p,
        step=f"{step} or {more}",
        least=number_at(number("least_weeks"), p),
        most=number_at(number("most_weeks"), p),
    )
