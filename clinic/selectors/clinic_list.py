"""The clinic list of one day: one block a patient, both eyes inside, in a fixed number of queries.

It first shows what is due by plan and what is still open from the last visit, then what today's
saved measurements raise. No hidden score: blocks stand by rank, then booked time, then code.
"""

import datetime as dt
from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from django.db.models import Q

from clinic.clinic_days import exceptions, is_clinic_day
from clinic.models import ClinicDay, EyeNow, PatientStatus, Plan, RecordDone, Visit
from clinic.selectors.access import Here
from clinic.selectors.adopted import adopted_for
from clinic.selectors.standing import standing_items
from trends.measures.ranges import ranges
from trends.regimens import registry as regimens
from trends.rules import registry as rules

RANKS = ("raise_first", "weigh_today", "keep_in_mind", "")
RANK_WORDS = {
    "raise_first": "Raise first",
    "weigh_today": "Weigh today",
    "keep_in_mind": "Keep in mind",
    "": "",
}
# Rules that state the same fact in other ways are merged under the highest of them.
SAME_FACT = (
    ("thickening", "crossed_limit", "fluid_back", "thickening_possible", "crossed_limit_possible"),
    ("letters_lost", "off_chart_step"),
    ("pressure", "pressure_after"),
    ("did_not_come", "late", "break_off", "away", "no_plan"),
)
SIDE_WORDS = {"R": "Right eye", "L": "Left eye"}
SIDE_SLUGS = {"R": "right", "L": "left"}


@dataclass(frozen=True)
class Item:
    """Something raised of one eye, with the visit it comes from (None for the day's own facts)."""

    rule: str
    title: str
    rank: str
    rank_words: str
    sentence: str
    from_day: dt.date | None = None
    visit_kind: str = ""
    alarm: bool = False
    answer: Mapping[str, Any] = field(default_factory=dict)
    also: tuple[str, ...] = ()

    @property
    def is_open(self) -> bool:
        """Say whether it waits: unanswered, answered on other evidence, or its day has come."""
        return not self.answer.get("stands") or bool(self.answer.get("is_due"))


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
    """One patient on the list."""

    patient: Any
    booked_time: dt.time | None
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


def titles() -> dict[str, str]:
    """Return the title of every rule and regimen."""
    found = {**rules.by_id(), **regimens.by_id()}
    return {name: str(module.INFO.title) for name, module in found.items()}


def eyes_on(here: Here, day: dt.date, today: dt.date) -> list[EyeNow]:
    """Return both eyes of everybody who is booked, due unbooked, or was seen on a day."""
    gone = PatientStatus.objects.filter(patient__site=here.site).order_by("seq")
    away = {row.patient_id for row in _newest(gone) if row.status != PatientStatus.Status.ACTIVE}
    wanted = set(
        EyeNow.objects.filter(eye__patient__site=here.site)
        .filter(Q(booked_day=day) | Q(due_day=day, booked_day=None))
        .values_list("eye__patient_id", flat=True)
    )
    visits = Visit.objects.filter(patient__site=here.site, day=day).exclude(kind="contact")
    wanted |= set(visits.values_list("patient_id", flat=True))
    if day < today:
        old = Plan.objects.filter(eye__patient__site=here.site, booked_day=day)
        wanted |= set(old.values_list("eye__patient_id", flat=True))
    rows = EyeNow.objects.filter(eye__patient_id__in=wanted - away)
    return list(rows.select_related("eye__patient").order_by("eye__patient__code", "-eye__side"))


def _newest(rows: Any) -> list[PatientStatus]:
    found = {row.patient_id: row for row in rows}
    return list(found.values())


def clinic_list(here: Here, day: dt.date, today: dt.date) -> ClinicList:
    """Return the list of a day, as it stands ``today``."""
    rows = eyes_on(here, day, today)
    said = exceptions(here.site)
    standing = standing_items(rows, here.site, today)
    patients = {now.eye.patient_id for now in rows}
    came = set(
        Visit.objects.filter(patient_id__in=patients, day=day)
        .exclude(kind="contact")
        .values_list("patient_id", flat=True)
    )
    ticks = dict(
        RecordDone.objects.filter(patient_id__in=patients, day=day)
        .order_by("seq")
        .values_list("patient_id", "ticked")
    )
    by_patient: dict[int, list[EyeNow]] = defaultdict(list)
    for now in rows:
        by_patient[now.eye.patient_id].append(now)
    named = titles()
    blocks = [
        _block(eyes, day, today, standing, came, ticks, named) for eyes in by_patient.values()
    ]
    blocks.sort(key=_order)
    planned = Counter(_planned(now) for now in rows if now.booked_day == day and _planned(now))
    return ClinicList(
        day=day,
        is_clinic_day=is_clinic_day(here.site, day, said),
        closed=said.get(day) == ClinicDay.State.CLOSED,
        adopted=bool(adopted_for(here.site)),
        blocks=tuple(blocks),
        treatments=tuple(sorted(planned.items())),
        both_eyes=sum(1 for block in blocks if _treated_today(block, day) > 1),
        without_plan=sum(1 for now in rows if now.booked_day == day and not _planned(now)),
    )


def _order(block: Block) -> tuple[int, dt.time, str]:
    return (RANKS.index(block.top_rank), block.booked_time or dt.time.max, block.patient.code)


def _treated_today(block: Block, day: dt.date) -> int:
    return sum(1 for eye in block.eyes if eye.now.booked_day == day and eye.now.planned_agent)


def _planned(now: EyeNow) -> str:
    if now.planned_agent:
        dose = f" {now.planned_dose_ug / 1000:g} mg" if now.planned_dose_ug else ""
        return f"{now.planned_agent}{dose}"
    return "check only" if now.check_only else ""


def _block(
    eyes: Sequence[EyeNow],
    day: dt.date,
    today: dt.date,
    standing: Mapping[int, list[dict[str, Any]]],
    came: set[int],
    ticks: Mapping[int, bool],
    named: Mapping[str, str],
) -> Block:
    patient = eyes[0].eye.patient
    times = [now.booked_time for now in eyes if now.booked_time and now.booked_day == day]
    fellows = {now.eye.side: now for now in eyes}
    lines = tuple(
        _line(
            now,
            fellows.get("L" if now.eye.side == "R" else "R"),
            day,
            today,
            standing.get(now.eye_id, []),
            named,
        )
        for now in eyes
    )
    return Block(
        patient=patient,
        booked_time=min(times, default=None),
        came=patient.pk in came,
        ticked=bool(ticks.get(patient.pk)),
        eyes=lines,
    )


def _line(
    now: EyeNow,
    fellow: EyeNow | None,
    day: dt.date,
    today: dt.date,
    standing: Sequence[dict[str, Any]],
    named: Mapping[str, str],
) -> EyeLine:
    items = [item for item in now.open_items if "rule" in item]
    counted = [item["counts"] for item in now.open_items if "counts" in item]
    counts: Mapping[str, int] = counted[0] if counted else {}
    asked = max(day, today)
    stored = [_item(item, named, asked) for item in items]
    facts = [_item({**item, "visit_day": None}, named, asked) for item in standing]
    shown = [item for item in stored if item.rank != "keep_in_mind"]
    since = (day - now.last_treated_day).days if now.last_treated_day else None
    return EyeLine(
        now=now,
        side=now.eye.side,
        side_words=SIDE_WORDS[now.eye.side],
        side_slug=SIDE_SLUGS[now.eye.side],
        regimen_title=named.get(now.regimen, ""),
        weeks_since_treatment=since // 7 if since is not None and since >= 0 else None,
        planned=_planned(now) if now.booked_day == day or now.due_day == day else "",
        fellow_letters=fellow.letters if fellow else None,
        only_seeing_eye=_only_seeing(now, fellow),
        due=merged(facts),
        still_open=merged([item for item in shown if item.from_day != day]),
        today=merged([item for item in shown if item.from_day == day]),
        folded=tuple(item for item in stored if item.rank == "keep_in_mind"),
        limits_not_reached=int(counts.get("limit_not_reached", 0)),
        could_not_tell=int(counts.get("could_not_tell", 0)),
    )


def _item(item: Mapping[str, Any], named: Mapping[str, str], asked: dt.date) -> Item:
    day = item.get("visit_day")
    names = ("answer", "answered_by", "look_again_on", "stands")
    answer = {name: item[name] for name in names if name in item}
    # "Look again" closes an item only until the day it named.
    if again := answer.get("look_again_on"):
        answer["is_due"] = dt.date.fromisoformat(again) <= asked
    return Item(
        rule=item["rule"],
        title=named.get(item["rule"], item["rule"]),
        rank=item["rank"],
        rank_words=RANK_WORDS[item["rank"]],
        sentence=item["sentence"],
        from_day=dt.date.fromisoformat(day) if day else None,
        visit_kind=item.get("visit_kind", ""),
        alarm=bool(item.get("alarm")),
        answer=answer,
    )


def merged(items: Sequence[Item]) -> tuple[Item, ...]:
    """Return items by rank, with those that state the same fact under the highest of them."""
    ordered = sorted(items, key=lambda item: RANKS.index(item.rank))
    kept: list[Item] = []
    groups: dict[tuple[int, dt.date | None], int] = {}
    for item in ordered:
        group = next((n for n, names in enumerate(SAME_FACT) if item.rule in names), -1)
        key = (group, item.from_day)
        if group < 0 or key not in groups:
            groups[key] = len(kept)
            kept.append(item)
            continue
        first = kept[groups[key]]
        also = (*first.also, item.title.lower())
        kept[groups[key]] = Item(**{**first.__dict__, "also": also})
    return tuple(kept)


def _sees_little(now: EyeNow) -> bool:
    """Say whether an eye sees 20/200 or less, or is off the chart, at its last acuity."""
    if not now.acuity_shown:
        return False
    limit = ranges("only_seeing_eye").number("letters_at_most")
    return now.letters is None or now.letters <= limit


def _only_seeing(now: EyeNow, fellow: EyeNow | None) -> bool:
    return fellow is not None and _sees_little(fellow) and not _sees_little(now)
