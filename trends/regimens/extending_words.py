"""A treat-and-extend reading in words, with its working."""

from trends.regimens.courses import NONE
from trends.regimens.extending_courses import ExtendingCourses
from trends.regimens.plan_words import plan_line, reference_value
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
from trends.regimens.truth import YES
from trends.ruling import Description
from trends.saying import date_words

PARTS = {"cst": "thickness", "letters": "letters", "irf": "IRF", "srf": "SRF"}


def describe(courses: ExtendingCourses, p: int, info: RegimenInfo) -> Description:
    """Put the reading at a position into words."""
    w, j = courses.visited, courses.judged
    told = courses.told
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    reference = int(j.reference[p])
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


def _why(courses: ExtendingCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told, j = courses.told, courses.judged
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    if told.said[p] == Said.LOADING:
        return f"injections in this course so far: {int(j.plan.injections[p])}"
    when = date_words(int(courses.visited.day[j.last[p]]))
    seen = changes(courses.visited, int(j.reference[p]), p)
    return f"{_reasons(courses, p)}{seen} since the last treatment visit, {when}"


def _reasons(courses: ExtendingCourses, p: int) -> str:
    """Return which parts made it worse or, where it isn't, which keep it from extending."""
    j = courses.judged
    for title, parts in (("worse", j.worse_parts), ("improving or persists", j.holding_parts)):
        named = [PARTS[name] for name, part in parts.items() if part[p] == YES]
        if named:
            return f"{title}: {', '.join(named)}; "
    return ""


def _arithmetic(courses: ExtendingCourses, p: int) -> list[str]:
    j, w = courses.judged, courses.visited
    lines = [f"injections of this course before the visit: {int(j.plan.injections[p])}"]
    if courses.told.said[p] == Said.LOADING or j.last[p] == NONE:
        return lines
    lines.append("against the last treatment visit, " + compared(w, int(j.reference[p]), p))
    lines += _answers(courses, p)
    lines.append(_plan_line(courses, p))
    return lines


def _answers(courses: ExtendingCourses, p: int) -> list[str]:
    j = courses.judged
    lines = []
    for title, parts in (("worse", j.worse_parts), ("improving or persists", j.holding_parts)):
        told = [f"{PARTS[name]} {ANSWERS.get(int(part[p]), 'no')}" for name, part in parts.items()]
        lines.append(f"{title}: " + ", ".join(told))
    return lines


def _plan_line(courses: ExtendingCourses, p: int) -> str:
    params, plan = courses.params, courses.plan
    line = plan_line(
        plan,
        p,
        step=number_at(params.step_weeks, p),
        least=number_at(params.least_weeks, p),
        most=number_at(params.most_weeks, p),
    )
    return line + _other_steps(courses, p) if plan.known[p] else line


def _other_steps(courses: ExtendingCourses, p: int) -> str:
    """Return how this set shortens and when it extends again, where it isn't by the step."""
    j, params = courses.judged, courses.params
    said = []
    if number_at(params.shorten_weeks, p):
        said.append(f"shortened by {number_at(params.shorten_weeks, p)}")
    if number_at(params.return_to_last_dry, p):
        weeks = f"{int(j.last_dry_planned[p])} weeks" if j.returns[p] else "none below the plan"
        said.append(f"back to the last dry interval, {weeks}")
    if number_at(params.inactive_visits, p) > 1:
        needed, run = number_at(params.inactive_visits, p), int(j.quiet_again[1][p])
        said.append(f"after worse, extended at quiet visit {needed} running (before this: {run})")
    return "; " + "; ".join(said) if said else ""
