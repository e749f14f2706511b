"""A long-interval reading in words, with its working."""

from trends.regimens.courses import NONE
from trends.regimens.long_courses import LongCourses
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
from trends.regimens.truth import Truth
from trends.ruling import Description
from trends.saying import date_words


def describe(courses: LongCourses, p: int, info: RegimenInfo) -> Description:
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


def _why(courses: LongCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told = courses.told
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    if told.said[p] == Said.LOADING:
        return f"injections in this course so far: {int(courses.plan.injections[p])}"
    if courses.settled[p]:
        return f"not judged before {date_words(int(courses.judged_day[p]))}"
    reference = int(told.ref[p])
    week = number_at(courses.number("reference_week"), p)
    when = date_words(int(courses.visited.day[reference]))
    return f"{changes(courses.visited, reference, p)} since week {week}, {when}"


def _arithmetic(courses: LongCourses, p: int) -> list[str]:
    plan, w = courses.plan, courses.visited
    lines = [f"injections of this course before the visit: {int(plan.injections[p])}"]
    if plan.last[p] == NONE:
        return lines
    first, week = int(plan.first_day[p]), number_at(courses.number("reference_week"), p)
    lines.append(
        f"first injection {date_words(first)}, {int(w.day[p]) - first} days before; week {week} is "
        f"{date_words(int(courses.reference_day[p]))}"
    )
    if courses.told.said[p] == Said.LOADING or courses.settled[p]:
        return lines
    seen = compared(w, int(courses.reference[p]), p)
    lines.append(f"against the visit nearest to week {week}, {seen}")
    return [*lines, _shorten_line(courses, p), _extend_line(courses, p), _plan(courses, p)]


def _answered(part: Truth, p: int) -> str:
    return ANSWERS.get(int(part[p]), "no")


def _shorten_line(courses: LongCourses, p: int) -> str:
    parts, number = courses.shorten_parts, courses.number
    return (
        f"shorten: more than {number_at(number('letters_lost'), p)} letters lost "
        f"{_answered(parts['letters'], p)} and more than {number_at(number('rise_um'), p)} µm "
        f"thicker {_answered(parts['cst'], p)}"
    )


def _extend_line(courses: LongCourses, p: int) -> str:
    parts, number, limit = courses.extend_parts, courses.number, int(courses.limit_um[p])
    below = (
        f"CST below {limit} µm" if limit else "CST below the limit of its class (none in the set)"
    )
    when = "reached" if courses.second_year[p] else "not reached"
    return (
        f"extend: week {number_at(number('extend_from_week'), p)} {when}; fewer than "
        f"{number_at(number('extend_letters'), p)} letters lost "
        f"{_answered(parts['letters'], p)} and {below} {_answered(parts['cst'], p)}"
    )


def _plan(courses: LongCourses, p: int) -> str:
    return plan_line(
        courses.plan,
        p,
        step=number_at(courses.number("step_weeks"), p),
        least=number_at(courses.number("least_weeks"), p),
        most=number_at(courses.number("most_weeks"), p),
    )
