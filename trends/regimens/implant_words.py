"""A reading of the trial interval of a steroid in words, with its working."""

from trends import saying
from trends.regimens.courses import NONE
from trends.regimens.implant_courses import ImplantCourses
from trends.regimens.plan_words import reference_value
from trends.regimens.readings import Said, reading_text
from trends.regimens.spoken import RegimenInfo
from trends.regimens.telling import (
    ANSWERS,
    NOISE,
    headline,
    measured_values,
    missing_words,
    number_at,
    open_choices,
    signed,
)
from trends.regimens.truth import Truth
from trends.ruling import Description
from trends.saying import date_words

OPTIONS = [
    "treat as planned, or earlier or later than the trial interval",
    "keep the present plan and look again at the next visit",
    "look at pressure and at what was given before",
    "depart from the trial interval and note why",
]


def describe(courses: ImplantCourses, p: int, info: RegimenInfo) -> Description:
    """Put the reading at a position into words."""
    w, told = courses.visited, courses.told
    reading = reading_text(int(told.said[p]), *(int(number[p]) for number in told.numbers))
    reference = NONE if told.ref[p] == NONE else int(courses.reference[p])
    seen = {reference, int(courses.lowest[p]), int(courses.best[p])} - {NONE, p}
    return Description(
        sentence=headline(w, p, info, f"{reading} ({_why(courses, p)})"),
        values=measured_values(w, sorted(seen), p),
        arithmetic=_arithmetic(courses, p),
        limit=info.form,
        noise=NOISE,
        unknowns=open_choices(courses.limits, info),
        options=list(OPTIONS),
        not_for=list(info.not_for),
        reference_value=reference_value(w, reference),
    )


def _given(courses: ImplantCourses, p: int) -> str:
    w, last = courses.visited, int(courses.last[p])
    row = int(w.at[last])
    return f"{w.v.text('agents', row)} on {date_words(int(w.day[last]))}"


def _why(courses: ImplantCourses, p: int) -> str:
    """Return what the reading rests on, in brackets behind it."""
    told = courses.told
    if told.said[p] == Said.CANT_TELL:
        return missing_words(int(told.missing[p]))
    if told.said[p] == Said.NO_STEROID:
        return "nothing to count from"
    since = f"{_given(courses, p)}, {int(courses.days_since[p])} days ago"
    return f"{since}; {_cst(courses, p)}, {_letters(courses, p)}"


def _cst(courses: ImplantCourses, p: int) -> str:
    r, low = courses.visited.readings, int(courses.lowest[p])
    if not r.has_cst[p] or low == NONE:
        return "CST not comparable since"
    was, now = int(r.cst_um[low]), int(r.cst_um[p])
    change = f"{signed(now - was)} µm, {saying.percent(now - was, was)}"
    return f"CST {now} µm from {was} µm at the lowest since ({change})"


def _letters(courses: ImplantCourses, p: int) -> str:
    r, best = courses.visited.readings, int(courses.best[p])
    if not r.has_letters[p] or best == NONE:
        return "letters not comparable since"
    was, now = int(r.letters[best]), int(r.letters[p])
    return f"letters {now} from {was} at the best since ({signed(now - was)})"


def _arithmetic(courses: ImplantCourses, p: int) -> list[str]:
    w, last = courses.visited, int(courses.told.ref[p])
    if last == NONE:
        return ["no steroid recorded in this course to count from"]
    start, days = int(w.day[last]), int(courses.trial_days[p])
    limits = {
        "cst": f"at least {number_at(courses.number('rise_um'), p)} µm thicker than the lowest",
        "letters": f"at least {number_at(courses.number('letters'), p)} letters below the best",
    }
    asked = [f"{limits[name]} {ANSWERS.get(int(one[p]), 'no')}" for name, one in _parts(courses)]
    return [
        f"{_given(courses, p)} + {days} days = {date_words(start + days)}; visit on "
        f"{date_words(int(w.day[p]))}, {int(courses.days_since[p])} days after",
        f"{_cst(courses, p)}; {_letters(courses, p)}",
        "recurrent: " + " or ".join(asked),
    ]


def _parts(courses: ImplantCourses) -> list[tuple[str, Truth]]:
    return list(courses.parts.items())


def place(courses: ImplantCourses, p: int) -> str:
    """Return where the course stands after the visit at a position."""
    w, last = courses.visited, int(courses.last_after[p])
    if last == NONE:
        unsure = courses.agent_unknown[p] or w.not_recorded[p]
        history = "history not entered" if courses.history_unknown[p] else "no steroid yet"
        return "treatment not recorded" if unsure else history
    until = date_words(int(w.day[last] + courses.days_of[last]))
    return f"trial interval until {until}"
