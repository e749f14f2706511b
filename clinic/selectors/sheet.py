"""What a visit sheet shows: current records, the last comparable values, station facts."""

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from clinic import adapters
from clinic.models import EyeNow, EyeRecord, Measured, Patient, User, Visit
from clinic.records import PARTS, newest
from clinic.selectors.access import Here
from clinic.selectors.judged import Found, judge
from trends import words
from trends.measures.pressure import shown
from trends.review import comparisons
from trends.visits import MISSING, day_date

SIDES = (("R", "Right eye"), ("L", "Left eye"))
SHEET_PARTS = ("measured", "decided", "treated", "next")
PART_WORDS = {
    "measured": "Measured",
    "decided": "Decided",
    "treated": "Treated",
    "next": "Next",
}


@dataclass(frozen=True)
class EyeSheet:
    """One eye on a sheet: its records by part, and the last value of each input with its date."""

    side: str
    words: str
    records: Mapping[str, EyeRecord | None] = field(default_factory=dict)
    last: Mapping[str, str] = field(default_factory=dict)
    now: EyeNow | None = None


@dataclass(frozen=True)
class Sheet:
    """A visit sheet of one patient, day and kind; ``visit`` is None until a part is saved."""

    visit: Visit | None
    eyes: tuple[EyeSheet, ...]
    station: Mapping[str, Any]


def visit_sheet(here: Here, patient: Patient, day: dt.date, kind: str) -> Sheet:
    """Return the sheet; reads only."""
    visit = Visit.objects.filter(patient=patient, day=day, kind=kind).first()
    loaded = adapters.load([patient])
    eyes = {eye.side: eye for eye in patient.eyes.all()}
    nows = {
        now.eye.side: now
        for now in EyeNow.objects.filter(eye__patient=patient).select_related("eye")
    }
    last = last_values(loaded, {eye.pk: side for side, eye in eyes.items()}, day)
    sheets = []
    for side, name in SIDES:
        if side not in eyes:
            continue
        records = {
            part: newest(PARTS[part], visit, eyes[side]) if visit else None for part in SHEET_PARTS
        }
        sheets.append(EyeSheet(side, name, records, last.get(side, {}), nows.get(side)))
    return Sheet(visit, tuple(sheets), station_facts(here.user))


def station_facts(user: User) -> dict[str, Any]:
    """Return what carries over at a station: scanner, tonometer, chart. Never a value or grade."""
    mine = Measured.objects.filter(by=user).order_by("-pk")
    scan = mine.exclude(scanner=None).values_list("scanner_id", flat=True).first()
    tonometer = mine.exclude(iop_method="").values_list("iop_method", flat=True).first()
    chart = mine.exclude(acuity_chart="").values_list("acuity_chart", "acuity_notation").first()
    return {
        "scanner": scan,
        "iop_method": tonometer or "",
        "acuity_chart": chart[0] if chart else "",
        "acuity_notation": chart[1] if chart and chart[1] != "off_chart" else "",
    }


def last_values(
    loaded: adapters.Loaded, sides: Mapping[int, str], day: dt.date
) -> dict[str, dict[str, str]]:
    """Return for each eye the last value of each input before a day, with its date in words."""
    v = loaded.visits
    out: dict[str, dict[str, str]] = {side: {} for side in sides.values()}
    for row, place in enumerate(loaded.places):
        if place.day >= day or place.eye_id not in sides:
            continue
        seen = out[sides[place.eye_id]]
        when = f"{place.day.day} {place.day:%b %Y}"
        if int(v.cst_um[row]) != MISSING:
            scanner = v.text("scanner", row)
            poor = ", poor scan" if int(v.scan_quality[row]) == 0 else ""
            seen["cst"] = f"{int(v.cst_um[row])} µm{poor}, {when}"
            seen["scanner"] = f"{scanner or 'not recorded'}, {when}"
        if int(v.acuity_level[row]) >= 0:
            seen["acuity"] = f"{v.as_entered['acuity'][int(v.source_row[row])]}, {when}".replace(
                "_", " "
            )
        if int(v.iop_tenths[row]) != MISSING:
            code = int(v.iop_method[row])
            method = f" {words.IOP_METHODS[code]}".replace("_", "-") if code >= 0 else ""
            seen["iop"] = f"{shown(int(v.iop_tenths[row]))} mmHg{method}, {when}"
        for name in ("irf", "srf"):
            code = int(v.columns[name][row])
            if code >= 0:
                seen[name] = f"{words.GRADES[code].replace('_', ' ')}, {when}"
        if int(v.given[row]) >= 0:
            seen["outcome"] = f"{v.text('agents', row)}, {when}"
        if int(v.due_day[row]) != MISSING:
            due = day_date(int(v.due_day[row]))
            seen["due_weeks"] = f"due {due.day} {due:%b %Y}, set {when}"
    return out


def live_comparison(
    patient: Patient, day: dt.date, kind: str, typed: Mapping[str, Mapping[str, Any]]
) -> dict[str, dict[str, Any]]:
    """Return what typed values would read as, by side; writes nothing.

    ``typed`` holds columns of ``Measured`` by side. The rules judge them as if they were saved.
    """
    records = adapters.read([patient])
    visit = _visit_in(records, patient, day, kind)
    eyes = {eye["side"]: key for key, eye in records.eyes.items()}
    for side, values in typed.items():
        cells = {name: values.get(name) or "" for name in adapters.MEASURED}
        numbers = {name: values.get(name) for name in ("cst_um", "iop_tenths")}
        row = {**cells, **numbers, "one_scanner_assumed": False, "pk": 0}
        records.measured[visit, eyes[side]] = row
    loaded = adapters.from_records(records, {patient.pk: patient})
    found = judge([patient], day, lambda place: place.visit_id == visit, loaded)
    sides = {key: side for side, key in eyes.items()}
    return {
        sides[one.place.eye_id]: _shown(one, loaded)
        for one in found
        if sides[one.place.eye_id] in typed
    }


def _visit_in(records: adapters.Records, patient: Patient, day: dt.date, kind: str) -> int:
    """Return the key of the visit among the records, adding one that isn't stored yet."""
    for visit in records.visits:
        if visit["day"] == day and visit["kind"] == kind:
            return int(visit["pk"])
    entry = sum(1 for visit in records.visits if visit["day"] == day)
    records.visits.append(
        {"pk": -1, "patient_id": patient.pk, "day": day, "kind": kind, "entry": entry}
    )
    return -1


def _shown(one: Found, loaded: adapters.Loaded) -> dict[str, Any]:
    raised = [row for row in one.raised if row["outcome"] == "raised"]
    return {
        "changes": _changes(loaded, one),
        "raised": [
            {
                "rank": row["rank"],
                "sentence": row["sentence"],
                "alarm": bool((row["working"] or {}).get("emergency")),
            }
            for row in raised
        ],
        "counts": {
            "limit_not_reached": list(one.outcomes.values()).count("limit_not_reached"),
            "could_not_tell": list(one.outcomes.values()).count("could_not_tell"),
        },
    }


def _changes(loaded: adapters.Loaded, one: Found) -> list[str]:
    """Return the plain change of each value since its comparable one."""
    v = loaded.visits
    row = loaded.places.index(one.place)
    c = comparisons(v, None)
    out = []
    if int(v.cst_um[row]) != MISSING:
        ref = int(c.cst.ref[row])
        if ref >= 0:
            change = int(v.cst_um[row]) - int(v.cst_um[ref])
            out.append(f"CST {signed(change)} µm since {loaded.places[ref].day.isoformat()}")
        else:
            out.append("CST: nothing comparable before it")
    if int(v.logmar_e4[row]) != MISSING:
        ref = int(c.acuity.ref[row])
        if ref >= 0:
            letters = (int(v.logmar_e4[ref]) - int(v.logmar_e4[row])) / 200
            since = loaded.places[ref].day.isoformat()
            out.append(f"acuity {signed(letters)} letters since {since}")
        else:
            out.append("acuity: nothing comparable before it")
    return out


def signed(change: float) -> str:
    """Return a change with its sign, a true minus."""
    return f"{change:+g}".replace("-", "\u2212")
