"""What a visit sheet shows: current records, the last comparable values, station facts."""

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from clinic.models import EyeNow, EyeRecord, Measured, Patient, Scanner, Visit
from clinic.records import PARTS, newest
from clinic.selectors.access import Here
from clinic.selectors.last_values import last_values
from clinic.selectors.list_items import RANK_WORDS, RANKS

SIDES = (("R", "Right eye"), ("L", "Left eye"))
SHEET_PARTS = ("measured", "decided", "treated", "next")
PART_WORDS = {
    "measured": "Measured",
    "decided": "Decided",
    "treated": "Treated",
    "next": "Next",
}


@dataclass(frozen=True)
class Raised:
    """Something that stands raised by the stored values of this very visit."""

    rank: str
    rank_words: str
    sentence: str
    alarm: bool
    answered: str


@dataclass(frozen=True)
class EyeSheet:
    """One eye on a sheet: its records by part, and the last value of each input with its date."""

    side: str
    words: str
    records: Mapping[str, EyeRecord | None] = field(default_factory=dict)
    last: Mapping[str, str] = field(default_factory=dict)
    now: EyeNow | None = None
    raised: Sequence[Raised] = ()


@dataclass(frozen=True)
class Sheet:
    """A visit sheet of one patient, day and kind; ``visit`` is None until a part is saved."""

    visit: Visit | None
    eyes: tuple[EyeSheet, ...]
    station: Mapping[str, Any]


def visit_sheet(here: Here, patient: Patient, day: dt.date, kind: str) -> Sheet:
    """Return the sheet; reads only."""
    visit = Visit.objects.filter(patient=patient, day=day, kind=kind).first()
    eyes = {eye.side: eye for eye in patient.eyes.all()}
    nows = {
        now.eye.side: now
        for now in EyeNow.objects.filter(eye__patient=patient).select_related("eye")
    }
    station = station_facts(here)
    last = last_values(patient, day, Scanner.objects.filter(pk=station["scanner"]).first())
    sheets = []
    for side, name in SIDES:
        if side not in eyes:
            continue
        records = {
            part: newest(PARTS[part], visit, eyes[side]) if visit else None for part in SHEET_PARTS
        }
        raised = raised_at(nows.get(side), day, kind)
        sheets.append(EyeSheet(side, name, records, last[side], nows.get(side), raised))
    return Sheet(visit, tuple(sheets), station)


def sheet_opened_on(sheet: Sheet, part: str, revs: Mapping[str, int]) -> Sheet:
    """Return the sheet with one part as it stood at the revisions it was opened on."""
    eyes = []
    for eye in sheet.eyes:
        now = eye.records.get(part)
        older = None
        if now is not None and revs.get(eye.side):
            rows = type(now)._default_manager.filter(visit=now.visit, eye=now.eye)
            older = rows.filter(rev=revs[eye.side]).first()
        eyes.append(replace(eye, records={**eye.records, part: older}))
    return replace(sheet, eyes=tuple(eyes))


def raised_at(now: EyeNow | None, day: dt.date, kind: str) -> tuple[Raised, ...]:
    """Return what the stored values of a visit raise; empty when a later visit took its place."""
    items = now.open_items if now else []
    mine = [one for one in items if one.get("visit_day") == day.isoformat() and "rule" in one]
    return tuple(
        Raised(
            one["rank"],
            RANK_WORDS[one["rank"]],
            one["sentence"],
            bool(one.get("alarm")) and not one.get("stands"),
            str(one.get("answer", "")).replace("_", " ") if one.get("stands") else "",
        )
        for one in sorted(mine, key=lambda one: RANKS.index(one["rank"]))
        if one.get("visit_kind", kind) == kind
    )


def station_facts(here: Here) -> dict[str, Any]:
    """Return what carries over at a station: scanner, tonometer, chart. Never a value or grade."""
    mine = Measured.objects.filter(by=here.user, visit__patient__site=here.site).order_by("-pk")
    scans = mine.filter(scanner__retired_on=None).exclude(scanner=None)
    tonometers = mine.exclude(iop_method="")
    charts = mine.exclude(acuity_chart="").exclude(acuity_notation="off_chart")
    chart = charts.values_list("acuity_chart", "acuity_notation").first()
    return {
        "scanner": scans.values_list("scanner_id", flat=True).first(),
        "iop_method": tonometers.values_list("iop_method", flat=True).first() or "",
        "acuity_chart": chart[0] if chart else "",
        "acuity_notation": chart[1] if chart else "",
    }
