"""One invented person's years of coming and going, from the first visit to the last."""

import datetime as dt
from dataclasses import dataclass, field

import numpy as np

from clinic.exchange.demo.cast import EyeSpec, PersonSpec
from clinic.exchange.demo.model import InventedEye, invented_eye
from clinic.exchange.demo.numbers import numbers
from clinic.exchange.demo.policy import CareSoFar, Choice, Seen, choose, remember
from clinic.exchange.demo.readings import give, measure
from clinic.exchange.demo.rows import Ahead, Decision, EyeVisit, Given, Readings, VisitRow

DAYS_LATE = (0, 0, 0, 0, 0, 0, 1, 1, 2, 3, 5)
SHARE_NOT_GIVEN = 0.01
WHY_NOT_GIVEN = ("lid infection today", "patient asked for another day")
HELD_MID_COURSE = {"treatments": 6, "weeks": 6}


@dataclass
class Followed:
    """One eye while its course is drawn."""

    spec: EyeSpec
    eye: InventedEye
    care: CareSoFar
    lens: str


@dataclass
class Drawn:
    """A drawn course: visits, and the gap in weeks set at the last one."""

    visits: list[VisitRow] = field(default_factory=list)
    last_weeks: int = 4


def followed(rng: np.random.Generator, spec: EyeSpec, sex: str, age: int) -> Followed:
    """Draw one eye; an eye that arrives mid-course has been treated before its first visit."""
    eye = invented_eye(rng, spec.cause, sex)
    for name, number in spec.make_up.items():
        setattr(eye, name, number)
    eye.fluid_um = eye.leak_um
    care = CareSoFar(spec.regimen)
    if spec.arrival != "new":
        eye.fluid_um = 0.15 * eye.leak_um
        care.given = HELD_MID_COURSE["treatments"]
        care.weeks = HELD_MID_COURSE["weeks"]
        care.seen_when_treated.append(Seen(0, round(eye.dry_um + eye.fluid_um), 0, eye.is_wet()))
    operated = spec.cause == "after_surgery" or rng.random() < (age - 45) / 90
    return Followed(
        spec, eye, care, "artificial" if operated else ("cataract" if age > 66 else "clear")
    )


def decision(one: Followed, choice: Choice, weeks: int) -> Decision:
    """Return the decided part; an interval kept short for the other eye says so."""
    shortened = weeks < choice.weeks
    why = "same day as the other eye, whose interval is shorter" if shortened else ""
    kind = choice.kind or "withhold"
    return Decision(kind, weeks, one.spec.agent if choice.treat else "", why)


def eye_visit(
    rng: np.random.Generator,
    one: Followed,
    read: Readings,
    choice: Choice,
    weeks: int,
    day: dt.date,
) -> EyeVisit:
    """Return the four parts of one eye at one visit, and treat the eye if so decided."""
    agent = one.spec.agent
    if choice.treat and rng.random() < SHARE_NOT_GIVEN:
        treated = Given("not_given", not_given_because=str(rng.choice(WHY_NOT_GIVEN)))
    elif choice.treat:
        one.eye.treat(agent)
        treated = give(rng, agent, read.iop_tenths)
    else:
        treated = Given("nothing")
    steroid = one.spec.regimen == ""
    ahead = Ahead(
        due_weeks=weeks,
        due_day=day + dt.timedelta(weeks=weeks),
        planned_agent="" if steroid else agent,
        planned_dose_ug=None if steroid else int(numbers()["agent"][agent]["dose_ug"]),
        check_only=steroid,
    )
    return EyeVisit(one.spec.side, read, decision(one, choice, weeks), treated, ahead)


def visit(
    rng: np.random.Generator,
    spec: PersonSpec,
    eyes: list[Followed],
    scanner: tuple[str, str],
    elapsed: int,
    first_day: dt.date,
) -> tuple[VisitRow, int]:
    """Draw one visit of both eyes; return it with the weeks to the next."""
    day = first_day + dt.timedelta(days=elapsed)
    read: list[Readings] = []
    seen: list[Seen] = []
    for one in eyes:
        one.eye.live_until(elapsed)
        entry, letters = measure(rng, one.eye, scanner, spec.chart, one.lens)
        read.append(entry)
        seen.append(Seen(elapsed, entry.cst_um or 0, letters, one.eye.is_wet()))
    choices = [choose(one.care, now) for one, now in zip(eyes, seen, strict=True)]
    weeks = min(choice.weeks for choice in choices)
    parts = []
    for one, now, entry, choice in zip(eyes, seen, read, choices, strict=True):
        parts.append(eye_visit(rng, one, entry, choice, weeks, day))
        remember(one.care, now, choice, weeks)
    return VisitRow(day, "planned", tuple(parts)), weeks


def draw_course(
    rng: np.random.Generator, spec: PersonSpec, scanner: tuple[str, str], first_day: dt.date
) -> Drawn:
    """Draw all visits of one person, starting on ``first_day``."""
    eyes = [followed(rng, one, spec.sex, spec.age) for one in spec.eyes]
    drawn = Drawn()
    elapsed = 0
    for number in range(spec.visits):
        row, weeks = visit(rng, spec, eyes, scanner, elapsed, first_day)
        drawn.visits.append(row)
        drawn.last_weeks = weeks
        late = int(rng.choice(DAYS_LATE))
        if rng.random() < 0.02:
            late = int(rng.integers(16, 40))
        if number < spec.visits - 1:
            elapsed += 7 * weeks + late
    return drawn
