"""Each eye's last visit and the plan after it, for the rules that depend on the day asked.

Columns here hold one entry an eye. Lateness counts from the first day set as due after the last
attended visit. Contacts are no visits; an eye that has only contacts has no last visit, but a due
day set by one counts.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends import saying, words
from trends.limits import Table
from trends.plans import NO_ROW, plans
from trends.ruling import Description, Judged, bit
from trends.saying import date_words
from trends.verdict import NO_RANK, RAISED, RANKS, verdict
from trends.visits import MISSING, Bools, Ints, Visits, day_date


@dataclass(frozen=True)
class Followup:
    """Facts of each eye as of the end of the day asked."""

    v: Visits
    today: int

    @cached_property
    def latest(self) -> Ints:
        """The eye's last row of any kind."""
        return np.asarray(self.v.offsets[1:] - 1)

    @cached_property
    def last(self) -> Ints:
        """The last attended visit's row; NO_ROW where the eye has only contacts."""
        return plans(self.v).visit[self.latest] if len(self.v) else self.latest

    @property
    def seen(self) -> Bools:
        """Whether the eye has an attended visit."""
        return np.asarray(self.last != NO_ROW)

    @cached_property
    def days_since(self) -> Ints:
        """Days since the last attended visit; valid where ``seen``."""
        return np.asarray(self.today - self.v.day[self.last])

    @cached_property
    def set_at(self) -> Ints:
        """The row that set the due day after the last attended visit, or NO_ROW."""
        by_visit = np.where(self.seen, plans(self.v).set_at[self.last], NO_ROW)
        setting = np.flatnonzero(self.v.is_contact & (self.v.due_day != MISSING))
        eyes, first = np.unique(self.v.eye[setting], return_index=True)
        by_contact = np.full(self.latest.size, NO_ROW, dtype=np.int64)
        by_contact[eyes] = setting[first]
        return np.where(self.seen, by_visit, by_contact)

    @property
    def due_known(self) -> Bools:
        """Whether a due day was set."""
        return np.asarray(self.set_at != NO_ROW)

    @cached_property
    def due_day(self) -> Ints:
        """The due day; valid where ``due_known``."""
        return self.v.due_day[self.set_at].astype(np.int64)

    @cached_property
    def days_past_due(self) -> Ints:
        """Days after the due day; valid where ``due_known``."""
        return np.asarray(self.today - self.due_day)

    @cached_property
    def reference(self) -> Ints:
        """The row a verdict rests on: the one that set the due day, else the last visit."""
        return np.where(self.due_known, self.set_at, self.last)

    def status_is(self, statuses: Sequence[str]) -> Bools:
        """Whether the eye's present status is one of those named."""
        codes = [words.STATUSES.index(status) for status in statuses]
        return np.isin(self.v.status[self.latest], codes)

    @cached_property
    def followed(self) -> Bools:
        """Whether the eye is followed here; a blank status is assumed to be in treatment."""
        return ~self.status_is(("stopped", "care_elsewhere", "not_followed"))


def judged(
    facts: Followup,
    limits: Table,
    *,
    applies: Bools,
    known: Bools,
    raised: Bools,
    lacks: str,
    ref: Ints,
    part: Ints | int = 0,
) -> Judged:
    """Return a standing rule's verdicts, one entry an eye; ``lacks`` names what can be missing."""
    outcome = verdict(known=known, applies=applies, raised=raised)
    return Judged(
        outcome=outcome,
        rank=np.where(outcome == RAISED, RANKS[str(limits["rank"])], NO_RANK).astype(np.int32),
        ref=np.where(applies, ref, NO_ROW),
        part=np.where(outcome == RAISED, part, -1).astype(np.int32),
        missing=np.where(applies & ~known, bit(lacks), 0),
        extra={"today": facts.today},
    )


def lateness(v: Visits, limits: Table, today: int, *, reached: bool) -> Judged:
    """Judge days past due: at the limit already (``reached``), or only beyond it."""
    facts = Followup(v, today)
    days = limits.number("days")
    beyond = facts.days_past_due >= days if reached else facts.days_past_due > days
    return judged(
        facts,
        limits,
        applies=facts.followed,
        known=facts.due_known,
        raised=beyond,
        lacks="due_date",
        ref=facts.reference,
    )


# In words ----------------------------------------------------------------------------------------


def days_words(days: int) -> str:
    """Return a number of days in words."""
    return f"{days} day" if days == 1 else f"{days} days"


def value(what: str, day: int) -> dict[str, Any]:
    """Return a date as the working shows it."""
    date = day_date(day).isoformat()
    return {
        "what": what,
        "value": date,
        "unit": "",
        "date": date,
        "method": "",
        "as_entered": date,
        "assumed": False,
    }


def booking_words(v: Visits, row: int) -> str:
    """Return what is known of the booking after a visit; empty where nothing is."""
    booked, came = int(v.booked_day[row]), int(v.attendance[row])
    said = words.ATTENDANCES[came].replace("_", " ") if came >= 0 else ""
    when = f"booked for {date_words(booked)}" if booked != MISSING else ""
    return ", ".join(part for part in (when, said) if part)


def describe_lateness(v: Visits, found: Judged, eye: int, limits: Table, name: str) -> Description:
    """Put one eye's lateness into words."""
    facts = Followup(v, int(found.extra["today"]))
    who = saying.eye(v, int(facts.latest[eye]))
    unit = limits.entries["days"].unit
    limit = f"{limits.number('days')} {unit}"
    if not facts.due_known[eye]:
        return described(f"{who}: no due date is set, {name} can't be told", [], [], limit)
    due, past = int(facts.due_day[eye]), int(facts.days_past_due[eye])
    booking = booking_words(v, int(facts.last[eye])) if facts.seen[eye] else ""
    fact = f"due {date_words(due)}, not seen since; {days_words(past)} past due"
    if past < 0:
        fact = f"due {date_words(due)}, in {days_words(-past)}"
    sentence = f"{who}: {fact}" + (f" ({booking})" if booking else "")
    gap = f"{date_words(facts.today)} − {date_words(due)} = {days_words(past)}"
    arithmetic = [f"{gap}; limit: {limit}"]
    return described(sentence, [value("due date", due)], arithmetic, limit)


def described(
    sentence: str, values: list[dict[str, Any]], arithmetic: list[str], limit: str
) -> Description:
    """Return a description with what all follow-up rules share."""
    return Description(
        sentence=sentence,
        values=values,
        arithmetic=arithmetic,
        limit=limit,
        noise="dates only: no measurement error enters",
        options=[
            "contact the patient",
            "book or rebook",
            "change the eye's status if care has stopped or moved",
            "leave as it is and look again",
        ],
        not_for=["Visits elsewhere that weren't entered here look like none."],
    )
