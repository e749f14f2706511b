"""Lists between visits: awaiting decision, gone quiet, contacts."""

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from clinic.clinic_days import exceptions, last_ended_day
from clinic.models import ContactEntry, EyeNow, PatientStatus
from clinic.selectors.access import Here
from clinic.selectors.adopted import adopted_for, of_cause
from clinic.selectors.list_items import RANK_WORDS, RANKS, SIDE_SLUGS, SIDE_WORDS
from clinic.selectors.standing import standing_items
from clinic.selectors.visit_words import listed


@dataclass(frozen=True)
class Waiting:
    """One eye measured and not decided, with its age in days."""

    now: EyeNow
    side_words: str
    side_slug: str
    days: int


@dataclass(frozen=True)
class Quiet:
    """One eye past its due day, not rebooked, or without a plan."""

    now: EyeNow
    side_words: str
    side_slug: str
    facts: tuple[str, ...]
    sentences: tuple[str, ...]
    rank_words: str
    days_late: int
    last_contact: dt.date | None


def active_eyes(here: Here) -> list[EyeNow]:
    """Return the eyes of everybody at the site who is active."""
    rows = PatientStatus.objects.filter(patient__site=here.site).order_by("seq")
    newest = {row.patient_id: row.status for row in rows}
    away = [pk for pk, status in newest.items() if status != PatientStatus.Status.ACTIVE]
    eyes = EyeNow.objects.filter(eye__patient__site=here.site).exclude(eye__patient__in=away)
    return list(
        eyes.select_related("eye__patient", "last_measured_visit").order_by(
            "eye__patient__code", "-eye__side"
        )
    )


def awaiting(here: Here, today: dt.date) -> list[Waiting]:
    """Return what was measured and not decided, oldest first."""
    rows = [now for now in active_eyes(here) if now.undecided_since is not None]
    found = [
        Waiting(
            now,
            SIDE_WORDS[now.eye.side],
            SIDE_SLUGS[now.eye.side],
            (today - (now.undecided_since or today)).days,
        )
        for now in rows
    ]
    return sorted(found, key=lambda one: (-one.days, one.now.eye.patient.code))


def unanswered(here: Here, today: dt.date) -> list[Waiting]:
    """Return eyes with something raised first that nobody answered since yesterday, oldest first.

    What counts as unanswered is the rule's own. Where no set is adopted only the floor raises and
    no rule of the day runs: then whatever was raised before the last ended day counts.
    """
    rows = [now for now in active_eyes(here) if now.unanswered_since is not None]
    standing = standing_items(rows, here.site, today)
    adopted, ended = adopted_for(here.site), last_ended_day(today, exceptions(here.site))
    found = [
        Waiting(
            now,
            SIDE_WORDS[now.eye.side],
            SIDE_SLUGS[now.eye.side],
            (today - (now.unanswered_since or today)).days,
        )
        for now in rows
        if any(item["rule"] == "unanswered" for item in standing.get(now.eye_id, []))
        or (of_cause(adopted, now.cause) is None and (now.unanswered_since or today) < ended)
    ]
    return sorted(found, key=lambda one: (-one.days, one.now.eye.patient.code))


def gone_quiet(here: Here, today: dt.date) -> list[Quiet]:
    """Return eyes that are late, did not come, are away, or have no plan.

    Sorted by facts (loading, fluid at the last scan, only what is known), then by lateness.
    """
    rows = active_eyes(here)
    standing = standing_items(rows, here.site, today)
    contacts: dict[int, dt.date] = {}
    entries = ContactEntry.objects.filter(eye__patient__site=here.site).order_by("visit__day")
    for eye_id, day in entries.values_list("eye_id", "visit__day"):
        contacts[eye_id] = day
    wanted = ("did_not_come", "late", "break_off", "away", "no_plan", "pressure_check_due")
    found = []
    for now in rows:
        items = [item for item in standing.get(now.eye_id, []) if item["rule"] in wanted]
        booked_ahead = now.booked_day is not None and now.booked_day >= today
        if not items or (booked_ahead and not _late(items)):
            continue
        found.append(_quiet(now, items, today, contacts.get(now.eye_id)))
    return sorted(
        found, key=lambda one: (-len(one.facts), -one.days_late, one.now.eye.patient.code)
    )


def _late(items: list[dict[str, Any]]) -> bool:
    return any(item["rule"] in ("late", "break_off", "away") for item in items)


def _quiet(
    now: EyeNow, items: list[dict[str, Any]], today: dt.date, contact: dt.date | None
) -> Quiet:
    ranks = [item["rank"] for item in items]
    facts = []
    if now.place.startswith("loading"):
        facts.append(now.place)
    if any(item.get("rule") == "fluid_back" for item in now.open_items):
        facts.append("fluid at the last scan")
    if any(item.get("alarm") and not item.get("stands") for item in now.open_items):
        facts.append("an alarm is unanswered")
    return Quiet(
        now=now,
        side_words=SIDE_WORDS[now.eye.side],
        side_slug=SIDE_SLUGS[now.eye.side],
        facts=tuple(facts),
        sentences=tuple(dict.fromkeys(item["sentence"] for item in items)),
        rank_words=RANK_WORDS[next((rank for rank in RANKS if rank in ranks), "")],
        days_late=(today - now.due_day).days if now.due_day else 0,
        last_contact=contact,
    )


@dataclass(frozen=True)
class ContactLine:
    """One contact about one eye, newest first."""

    entry: ContactEntry
    side_words: str
    side_slug: str
    symptoms: str
    alarm: bool
    answered: str


def contacts(here: Here, limit: int = 200) -> list[ContactLine]:
    """Return the newest contacts of a site, alarms nobody answered on top."""
    newest: dict[tuple[int, int], ContactEntry] = {}
    rows = (
        ContactEntry.objects.filter(eye__patient__site=here.site)
        .select_related("visit", "eye__patient", "by", "note")
        .order_by("rev")
    )
    for row in rows:
        newest[row.visit_id, row.eye_id] = row
    alarms = _alarms(here)
    lines = [
        ContactLine(
            entry=row,
            side_words=SIDE_WORDS[row.eye.side],
            side_slug=SIDE_SLUGS[row.eye.side],
            symptoms=listed(row.symptoms),
            alarm=bool(alarms.get((row.eye_id, row.visit.day), {}).get("open")),
            answered=str(alarms.get((row.eye_id, row.visit.day), {}).get("answered", "")),
        )
        for row in newest.values()
        if row.change != "withdrawn"
    ]
    lines.sort(key=lambda line: (not line.alarm, -line.entry.visit.day.toordinal(), -line.entry.pk))
    return lines[:limit]


def _alarms(here: Here) -> Mapping[tuple[int, dt.date], dict[str, Any]]:
    found: dict[tuple[int, dt.date], dict[str, Any]] = {}
    for now in EyeNow.objects.filter(eye__patient__site=here.site).exclude(open_top_rank=""):
        for item in now.open_items:
            if item.get("alarm"):
                key = (now.eye_id, dt.date.fromisoformat(item["visit_day"]))
                found[key] = {
                    "open": not item.get("stands"),
                    "answered": item.get("answer", "").replace("_", " "),
                }
    return found
