"""The clinic list of one day: one block a patient, both eyes inside, in a fixed number of queries.

It first shows what is due by plan and what is still open from the last visit, then what today's
saved measurements raise. No hidden score: blocks stand by rank, then booked time, then code.
"""

import datetime as dt
from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from clinic.clinic_days import exceptions, is_clinic_day
from clinic.models import ClinicDay, EyeNow, Plan, RecordDone
from clinic.selectors.access import Here
from clinic.selectors.adopted import adopted_for
from clinic.selectors.list_items import (
    RANK_WORDS,
    RANKS,
    SIDE_SLUGS,
    SIDE_WORDS,
    Item,
    item_of,
    merged,
    titles,
)
from clinic.selectors.list_people import day_plans, eyes_on, seen_on
from clinic.selectors.standing import standing_items
from trends.measures.ranges import ranges

OTHER = {"R": "L", "L": "R"}


@dataclass(frozen=True)
class EyeLine:
    """One eye on the list. Units: µm, letters, tenths of mmHg, weeks."""

    now: EyeNow
    side: str
    side_words: str
    side_slug: str
    regimen_title: str
    weeks_since_treatment: int | None
    planned: str
    fellow_letters: int | None
    only_seeing_eye: bool
    due: tuple[Item, ...] = ()
    still_open: tuple[Item, ...] = ()
    today: tuple[Item, ...] = ()
    folded: tuple[Item, ...] = ()
    limits_not_reached: int = 0
    could_not_tell: int = 0

    @property
    def raised(self) -> tuple[Item, ...]:
        """Everything raised, in the order of the page."""
        return (*self.due, *self.still_open, *self.today, *self.folded)

    @property
    def top_rank(self) -> str:
        """The highest rank of anything open on this eye."""
        open_ranks = {item.rank for item in self.raised if item.is_open}
        return next((rank for rank in RANKS if rank in open_ranks), "")


@dataclass(frozen=True)
class Block:
    """One patient on the list; who is not booked came, is due, or has an alarm unanswered."""

    patient: Any
    booked_time: dt.time | None
    is_booked: bool
    came: bool
    ticked: bool
    eyes: tuple[EyeLine, ...]

    @property
    def top_rank(self) -> str:
        """The worse eye's rank."""
        return min((eye.top_rank for eye in self.eyes), key=RANKS.index, default="")

    @property
    def rank_words(self) -> str:
        """The rank in words."""
        return RANK_WORDS[self.top_rank]


@dataclass(frozen=True)
class ClinicList:
    """A day's list with its head."""

    day: dt.date
    is_clinic_day: bool
    closed: bool
    adopted: bool
    blocks: tuple[Block, ...]
    treatments: tuple[tuple[str, int], ...]
    both_eyes: int
    without_plan: int


@dataclass(frozen=True)
class Asked:
    """What every line of a list needs to know."""

    day: dt.date
    today: dt.date
    plans: Mapping[int, Plan]
    standing: Mapping[int, list[dict[str, Any]]]
    named: Mapping[str, str]


def clinic_list(here: Here, day: dt.date, today: dt.date) -> ClinicList:
    """Return the list of a day, as it stands ``today``."""
    said = exceptions(here.site)
    plans, seen = day_plans(here.site, day), seen_on(here.site, day)
    rows = eyes_on(here.site, day, today, plans, seen, said)
    # What waits for an answer stands on the list itself, with its visit; said twice it is noise.
    standing = {
        eye: [item for item in items if item["rule"] != "unanswered"]
        for eye, items in standing_items(rows, here.site, today).items()
    }
    asked = Asked(day, today, plans, standing, titles())
    ticks = dict(
        RecordDone.objects.filter(patient__in={now.eye.patient_id for now in rows}, day=day)
        .order_by("seq")
        .values_list("patient_id", "ticked")
    )
    by_patient: dict[int, list[EyeNow]] = defaultdict(list)
    for now in rows:
        by_patient[now.eye.patient_id].append(now)
    blocks = [
        _block(asked, eyes, patient in seen, bool(ticks.get(patient)))
        for patient, eyes in by_patient.items()
    ]
    booked = [plans[now.eye_id] for now in rows if now.eye_id in plans]
    planned = Counter(_planned(plan) for plan in booked if _planned(plan))
    return ClinicList(
        day=day,
        is_clinic_day=is_clinic_day(here.site, day, said),
        closed=said.get(day) == ClinicDay.State.CLOSED,
        adopted=bool(adopted_for(here.site)),
        blocks=tuple(sorted(blocks, key=_order)),
        treatments=tuple(sorted(planned.items())),
        both_eyes=sum(1 for eyes in by_patient.values() if _treated_eyes(asked, eyes) > 1),
        without_plan=sum(1 for plan in booked if not _planned(plan)),
    )


def _order(block: Block) -> tuple[int, dt.time, str]:
    return (RANKS.index(block.top_rank), block.booked_time or dt.time.max, block.patient.code)


def _treated_eyes(asked: Asked, eyes: Sequence[EyeNow]) -> int:
    plans = [asked.plans.get(now.eye_id) for now in eyes]
    return sum(1 for plan in plans if plan is not None and plan.planned_agent)


def _planned(plan: Plan | EyeNow) -> str:
    if plan.planned_agent:
        dose = f" {plan.planned_dose_ug / 1000:g} mg" if plan.planned_dose_ug else ""
        return f"{plan.planned_agent}{dose}"
    return "check only" if plan.check_only else ""


def _block(asked: Asked, eyes: Sequence[EyeNow], came: bool, ticked: bool) -> Block:
    plans = [asked.plans[now.eye_id] for now in eyes if now.eye_id in asked.plans]
    sides = {now.eye.side: now for now in eyes}
    return Block(
        patient=eyes[0].eye.patient,
        booked_time=min((plan.booked_time for plan in plans if plan.booked_time), default=None),
        is_booked=bool(plans),
        came=came,
        ticked=ticked,
        eyes=tuple(_line(asked, now, sides.get(OTHER[now.eye.side])) for now in eyes),
    )


def _line(asked: Asked, now: EyeNow, fellow: EyeNow | None) -> EyeLine:
    day, named = asked.day, asked.named
    counted = [item["counts"] for item in now.open_items if "counts" in item]
    counts: Mapping[str, int] = counted[0] if counted else {}
    as_of = max(day, asked.today)
    stored = [item_of(item, named, as_of) for item in now.open_items if "rule" in item]
    standing = asked.standing.get(now.eye_id, [])
    facts = [item_of({**item, "visit_day": None}, named, as_of) for item in standing]
    shown = [item for item in stored if item.rank != "keep_in_mind"]
    since = (day - now.last_treated_day).days if now.last_treated_day else None
    plan = asked.plans.get(now.eye_id)
    return EyeLine(
        now=now,
        side=now.eye.side,
        side_words=SIDE_WORDS[now.eye.side],
        side_slug=SIDE_SLUGS[now.eye.side],
        regimen_title=named.get(now.regimen, ""),
        weeks_since_treatment=since // 7 if since is not None and since >= 0 else None,
        planned=_planned(plan) if plan else _planned(now) if now.due_day == day else "",
        fellow_letters=fellow.letters if fellow else None,
        only_seeing_eye=_only_seeing(now, fellow),
        due=merged(facts),
        still_open=merged([item for item in shown if item.from_day != day]),
        today=merged([item for item in shown if item.from_day == day]),
        folded=tuple(item for item in stored if item.rank == "keep_in_mind"),
        limits_not_reached=int(counts.get("limit_not_reached", 0)),
        could_not_tell=int(counts.get("could_not_tell", 0)),
    )


def _sees_little(now: EyeNow) -> bool:
    """Say whether an eye sees 20/200 or less, or is off the chart, at its last acuity."""
    if not now.acuity_shown:
        return False
    limit = ranges("only_seeing_eye").number("letters_at_most")
    return now.letters is None or now.letters <= limit


def _only_seeing(now: EyeNow, fellow: EyeNow | None) -> bool:
    return fellow is not None and _sees_little(fellow) and not _sees_little(now)
