"""A fixed-interval reading in words, with its working."""

from trends.regimens.courses import DAYS_IN_WEEK, NO_DAY
from trends.regimens.due_courses import FixedCourses
from trends.regimens.readings import Said, reading_text
from trends.regimens.spoken import RegimenInfo
from trends.regimens.telling import (
    OPTIONS,
    headline,
    missing_words,
    number_at,
    open_choices,
    value,
)
from trends.ruling import Description
from trends.saying import date_words
from trends.visits import day_date


def describe(courses: FixedCourses, p: int, info: RegimenInfo) -> Description:
    """Put the reading at a position into words."""
    w, j = courses.visited, courses.judged
    told = courses.told
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    last = int(j.last_day[p])
    values, arithmetic = [], [f"injections of this course before the visit: {int(j.injections[p])}"]
    if last != NO_DAY:
        date = day_date(last).isoformat()
        values.append(value("last injection", date_words(last), "", date, "day given"))
        window = number_at(j.params.window_days, p)
        weeks = (int(j.due_day[p]) - last) // DAYS_IN_WEEK
        arithmetic.append(
            f"{date_words(last)} + {weeks} weeks = {date_words(int(j.due_day[p]))}; "
            f"less {window} days = {date_words(int(j.due_day[p]) - window)}; "
            f"visit on {date_words(int(w.day[p]))}"
        )
    return Description(
        sentence=headline(w, p, info, f"{reading} ({_why(courses, p)})"),
        values=values,
        arithmetic=arithmetic,
        limit=info.form,
        noise="dates only: no measurement error enters",
        unknowns=open_choices(courses.limits, info),
        options=list(OPTIONS),
        not_for=list(info.not_for),
    )


def _why(courses: FixedCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told, j = courses.told, courses.judged
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    if told.said[p] == Said.LOADING:
        return f"injections in this course so far: {int(j.injections[p])}"
    return f"last injection {date_words(int(j.last_day[p]))}, due {date_words(int(j.due_day[p]))}"
