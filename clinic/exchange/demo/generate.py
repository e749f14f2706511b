"""The invented clinic as rows: same seed and same day, same rows."""

import dataclasses
import datetime as dt
import zlib

import numpy as np

from clinic.exchange.demo import endings, stories
from clinic.exchange.demo.cast import HARBOUR, MOORLAND, EyeSpec, PersonSpec, cast
from clinic.exchange.demo.course import HELD_MID_COURSE, draw_course
from clinic.exchange.demo.rows import DemoRows, EyeRow, PastCare, PersonRow, SiteRow, VisitRow

SEED = 20240607
SITES = (
    SiteRow(
        HARBOUR,
        "Harbour Eye Clinic (invented)",
        "Invented text: send to the eye emergency room at once and call the on-call eye doctor.",
        "A4",
        (("Room 1", "SD-BM"), ("Room 2", "SS")),
    ),
    SiteRow(
        MOORLAND,
        "Moorland Retina Service (invented)",
        "Invented text: same day, eye casualty at the city hospital; tell the doctor on call.",
        "Letter",
        (("Scan room", "SD-RPE"),),
    ),
)
FIRST_SLOT = dt.time(8, 30)
SLOT_MINUTES = 15
STOPPED = {"dry": "dry", "no_benefit": "no_benefit", "patients_choice": "patients_choice"}
MOST_RECORDED_AGE = 89
SHARE_LAST_ROOM = 0.1


def own_rng(seed: int, key: str) -> np.random.Generator:
    """Return one person's own random numbers, so that nobody shifts when somebody is added."""
    return np.random.default_rng([seed, zlib.crc32(key.encode())])


def slot(number: int) -> dt.time:
    """Return the booked time of the n-th patient of a morning."""
    minutes = FIRST_SLOT.hour * 60 + FIRST_SLOT.minute + SLOT_MINUTES * (number % 28)
    return dt.time(minutes // 60, minutes % 60)


def past_care(rng: np.random.Generator, spec: EyeSpec, first: VisitRow) -> PastCare:
    """Draw what an eye that arrived mid-course brought along."""
    eye = first.eye(spec.side)
    scan = eye.measured.cst_um if eye and eye.measured else None
    weeks = HELD_MID_COURSE["weeks"]
    return PastCare(
        treatments_so_far=HELD_MID_COURSE["treatments"] + int(rng.integers(0, 6)),
        agent=spec.agent,
        last_treatment_on=first.day - dt.timedelta(weeks=weeks),
        interval_weeks=weeks,
        loading_done=True,
        steroid_ever=spec.agent == "dexamethasone",
        baseline_letters=int(rng.integers(45, 70)),
        baseline_cst_um=(scan or 280) + int(rng.integers(60, 180)),
        baseline_iop_tenths=10 * int(rng.integers(12, 19)),
        diagnosed_on=first.day - dt.timedelta(days=int(rng.integers(300, 900))),
        lens="",
    )


def eye_row(
    rng: np.random.Generator, spec: EyeSpec, person: PersonSpec, visits: list[VisitRow]
) -> EyeRow:
    """Return one eye as it is enrolled and as it stands today."""
    first, last = visits[0].day, visits[-1].day
    status, reason, since = "in_treatment", "", None
    if person.ending in STOPPED:
        status, reason, since = "stopped", STOPPED[person.ending], last
    elif person.ending == "elsewhere":
        status, since = "care_elsewhere", last + dt.timedelta(days=14)
    return EyeRow(
        side=spec.side,
        cause=spec.cause,
        arrival=spec.arrival,
        history=past_care(rng, spec, visits[0]) if spec.arrival == "history" else None,
        regimen=spec.regimen,
        agent=spec.agent,
        course_from=first,
        status=status,
        stop_reason=reason,
        status_from=since,
    )


def person_row(spec: PersonSpec, seed: int, today: dt.date, time: dt.time) -> PersonRow:
    """Draw one person so that the course ends where it should on the day of loading.

    The course is drawn twice with the same random numbers: the first run finds its length, the
    second starts so that the last visit falls on the wanted day.
    """
    rooms = next(site for site in SITES if site.slug == spec.site).scanners
    always_other = not spec.stories and own_rng(seed, spec.key + " room").random() < SHARE_LAST_ROOM
    scanner = rooms[-1] if always_other else rooms[0]
    trial = draw_course(own_rng(seed, spec.key), spec, scanner, today)
    length = trial.visits[-1].day - trial.visits[0].day
    rest = own_rng(seed, spec.key + " rest")
    first_day = endings.last_day(spec, trial, today, rest) - length
    drawn = draw_course(own_rng(seed, spec.key), spec, scanner, first_day)
    visits = endings.ended(spec, drawn.visits)
    last = visits[-1].day
    person = PersonRow(
        key=spec.key,
        site=spec.site,
        sex=spec.sex,
        birth_year=today.year - spec.age if spec.age <= MOST_RECORDED_AGE else None,
        eyes=tuple(eye_row(rest, eye, spec, visits) for eye in spec.eyes),
        visits=tuple(visits),
        plans=tuple(endings.plans(spec, visits, today, time)),
        standing={"moved": "moved", "died": "died"}.get(spec.ending, "active"),
        standing_from=last + dt.timedelta(days=20) if spec.ending in {"moved", "died"} else None,
        stories=frozenset(spec.stories),
    )
    for story in spec.stories:
        person = stories.STORIES[story](person, today)
    return person


def demo_rows(today: dt.date, seed: int = SEED) -> DemoRows:
    """Return the invented clinic as it stands on ``today``."""
    people = []
    for number, spec in enumerate(cast(np.random.default_rng([seed, 1]))):
        people.append(person_row(spec, seed, today, slot(number)))
    return DemoRows(SITES, tuple(in_own_slots(people)))


def in_own_slots(people: list[PersonRow]) -> list[PersonRow]:
    """Give each person of a site and day a booked time of their own."""
    taken: dict[tuple[str, dt.date], int] = {}
    spaced = []
    for person in people:
        times: dict[dt.date, dt.time] = {}
        for plan in person.plans:
            if plan.booked_day is not None and plan.booked_day not in times:
                key = (person.site, plan.booked_day)
                times[plan.booked_day] = slot(taken.get(key, 0))
                taken[key] = taken.get(key, 0) + 1
        plans = tuple(
            plan
            if plan.booked_day is None
            else dataclasses.replace(plan, booked_time=times[plan.booked_day])
            for plan in person.plans
        )
        spaced.append(dataclasses.replace(person, plans=plans))
    return spaced
