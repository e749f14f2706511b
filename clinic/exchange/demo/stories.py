"""The cases worth seeing, put into otherwise ordinary courses."""

import dataclasses
import datetime as dt
from collections.abc import Callable

from clinic.exchange.demo.rows import (
    AnswerRow,
    ContactRow,
    Decision,
    EyeRow,
    EyeVisit,
    Given,
    PersonRow,
    Readings,
    VisitRow,
)

OTHER_SCANNER = "Room 2"
OTHER_SCANNER_OFFSET_UM = -32
STEROID_PEAK_TENTHS = 280
TREATED_AFTER_DAYS = 2
EXTRA_AFTER_DAYS = 12


def with_measured(row: VisitRow, changed: dict[str, Readings]) -> VisitRow:
    """Return the visit with other measurements on some eyes."""
    eyes = tuple(
        dataclasses.replace(eye, measured=changed[eye.side]) if eye.side in changed else eye
        for eye in row.eyes
    )
    return dataclasses.replace(row, eyes=eyes)


def readings(row: VisitRow, side: str) -> Readings:
    """Return the measured part of one eye, which must be there."""
    eye = row.eye(side)
    if eye is None or eye.measured is None:
        raise ValueError(f"{side} was not measured on {row.day.isoformat()}")
    return eye.measured


def swapped_eye(person: PersonRow, today: dt.date) -> PersonRow:
    """Type the two eyes' last measurements into each other's column."""
    last = person.visits[-1]
    crossed = {"R": readings(last, "L"), "L": readings(last, "R")}
    return dataclasses.replace(person, visits=(*person.visits[:-1], with_measured(last, crossed)))


def scanner_change(person: PersonRow, today: dt.date) -> PersonRow:
    """Take the last scan on the other room's scanner, which is of another class."""
    last = person.visits[-1]
    side = person.eyes[0].side
    before = readings(last, side)
    scan = None if before.cst_um is None else before.cst_um + OTHER_SCANNER_OFFSET_UM
    changed = dataclasses.replace(before, scanner=OTHER_SCANNER, cst_um=scan)
    row = with_measured(last, {side: changed})
    return dataclasses.replace(person, visits=(*person.visits[:-1], row))


def off_chart(person: PersonRow, today: dt.date) -> PersonRow:
    """Let the eye leave the chart half-way: counting fingers, at the last visit hand movements."""
    side = person.eyes[0].side
    visits = list(person.visits)
    for number in range(len(visits) // 2, len(visits)):
        seen = "HM" if number == len(visits) - 1 else "CF"
        entry = dataclasses.replace(
            readings(visits[number], side), acuity=seen, notation="off_chart", chart=""
        )
        visits[number] = with_measured(visits[number], {side: entry})
    return dataclasses.replace(person, visits=tuple(visits))


def alarm_call(person: PersonRow, today: dt.date) -> PersonRow:
    """Let the patient call four days after an injection: sore, red, blurred; not answered yet."""
    call = ContactRow(
        day=today,
        side=person.eyes[0].side,
        direction="from_patient",
        symptoms="pain+redness+blurred",
        symptoms_onset=today - dt.timedelta(days=1),
        outcome="reached",
        told_whom="on-call clinician",
    )
    return dataclasses.replace(person, contacts=(*person.contacts, call))


def steroid_pressure(person: PersonRow, today: dt.date) -> PersonRow:
    """Have the pressure rise after the implant measured, seen by a clinician and acted on."""
    side = person.eyes[0].side
    last = person.visits[-1]
    before = readings(last, side)
    level = max(before.iop_tenths or 0, STEROID_PEAK_TENTHS)
    entry = dataclasses.replace(before, iop_tenths=level, iop_method="applanation")
    row = with_measured(last, {side: entry})
    seen = AnswerRow(side, "pressure", "acting", "pressure drops started")
    return dataclasses.replace(
        person, visits=(*person.visits[:-1], row), answers=(*person.answers, seen)
    )


def with_event(person: PersonRow, kind: str, day: dt.date) -> PersonRow:
    """Return the person with a dated event on the first eye."""
    first = person.eyes[0]
    changed: EyeRow = dataclasses.replace(first, events=(*first.events, (kind, day)))
    return dataclasses.replace(person, eyes=(changed, *person.eyes[1:]))


def cataract_before(person: PersonRow, today: dt.date) -> PersonRow:
    """Put a cataract operation seven weeks before the first visit."""
    return with_event(person, "lens_surgery", person.visits[0].day - dt.timedelta(days=49))


def new_lens(eye: EyeVisit, side: str) -> EyeVisit:
    """Return the eye's visit with an artificial lens, and sight a line better."""
    if eye.side != side or eye.measured is None:
        return eye
    letters = eye.measured.acuity
    better = str(min(95, int(letters) + 6)) if letters.isdigit() else letters
    entry = dataclasses.replace(eye.measured, lens="artificial", acuity=better)
    return dataclasses.replace(eye, measured=entry)


def cataract_between(person: PersonRow, today: dt.date) -> PersonRow:
    """Take out the first eye's cataract half-way; sight isn't comparable across that day."""
    middle = len(person.visits) // 2
    day = person.visits[middle].day - dt.timedelta(days=12)
    side = person.eyes[0].side
    visits = list(person.visits)
    for number, row in enumerate(visits):
        if row.day > day:
            eyes = tuple(new_lens(eye, side) for eye in row.eyes)
            visits[number] = dataclasses.replace(row, eyes=eyes)
    visits[middle] = dataclasses.replace(visits[middle], kind="after_surgery")
    return with_event(dataclasses.replace(person, visits=tuple(visits)), "lens_surgery", day)


def split_visit(person: PersonRow, today: dt.date) -> PersonRow:
    """Measure at a virtual visit, treat two days later at a visit for treatment only."""
    number = len(person.visits) - 2
    whole = person.visits[number]
    looked = tuple(EyeVisit(eye.side, eye.measured, eye.decided) for eye in whole.eyes)
    given = tuple(EyeVisit(eye.side, None, None, eye.treated, eye.ahead) for eye in whole.eyes)
    later = whole.day + dt.timedelta(days=TREATED_AFTER_DAYS)
    pair = (VisitRow(whole.day, "virtual", looked), VisitRow(later, "treatment_only", given))
    return dataclasses.replace(person, visits=(*person.visits[:number], *pair, person.visits[-1]))


def extra_visit(person: PersonRow, today: dt.date) -> PersonRow:
    """Let the patient come between two visits with floaters that have passed."""
    number = len(person.visits) - 1
    before = person.visits[number - 1]
    day = before.day + dt.timedelta(days=EXTRA_AFTER_DAYS)
    eyes = tuple(
        EyeVisit(
            eye.side,
            dataclasses.replace(readings(before, eye.side), symptoms="floaters:gone"),
            Decision("withhold"),
            Given("nothing"),
        )
        for eye in before.eyes
    )
    extra = VisitRow(day, "unscheduled", eyes)
    return dataclasses.replace(
        person, visits=(*person.visits[:number], extra, person.visits[number])
    )


def laser_once(person: PersonRow, today: dt.date) -> PersonRow:
    """Add a laser treatment to one visit in the middle of the course."""
    number = len(person.visits) // 2
    side = person.eyes[0].side
    row = person.visits[number]
    eyes = tuple(
        dataclasses.replace(eye, treated=dataclasses.replace(eye.treated, laser="focal"))
        if eye.side == side and eye.treated is not None
        else eye
        for eye in row.eyes
    )
    changed = dataclasses.replace(row, eyes=eyes)
    visits = (*person.visits[:number], changed, *person.visits[number + 1 :])
    return with_event(dataclasses.replace(person, visits=visits), "laser", row.day)


def as_told(person: PersonRow, today: dt.date) -> PersonRow:
    """Leave the course as it was drawn."""
    return person


STORIES: dict[str, Callable[[PersonRow, dt.date], PersonRow]] = {
    "swapped_eye": swapped_eye,
    "scanner_change": scanner_change,
    "off_chart": off_chart,
    "alarm_call": alarm_call,
    "steroid_pressure": steroid_pressure,
    "cataract_before": cataract_before,
    "cataract_between": cataract_between,
    "undecided_virtual": as_told,
    "split_visit": split_visit,
    "extra_visit": extra_visit,
    "laser_once": laser_once,
}
