"""One eye at one visit as cells: coded numbers, and texts for open lists."""

import datetime as dt
from collections.abc import Mapping, Sequence
from typing import Any

from clinic.adapters.facts import fact_cells
from clinic.adapters.records import Records
from clinic.models import OWN_CALENDAR, Patient, Treated
from trends import words
from trends.frames import SCALES
from trends.measures import symptoms as symptom_words
from trends.measures.acuity import parse as parse_acuity
from trends.visits import MISSING, day_number


def _at(day: dt.date, rows: Sequence[Any]) -> Any:
    """Return the row in force on a day: the last of those that begin on or before it."""
    found = None
    for row in rows:
        if row.from_day <= day:
            found = row
    return found


def _agents(treated: dict[str, Any] | None, more: Mapping[int, list[str]]) -> str:
    if treated is None:
        return ""
    if treated["outcome"] != Treated.Outcome.GIVEN:
        return "none"
    named = sorted(name for name in (treated["agent"], *more.get(treated["pk"], [])) if name)
    if named:
        return "+".join(named)
    # Laser alone is no injection, as in a tidy file; given without a name is never "none".
    return "none" if treated["laser"] else "other"


def _lots(treated: dict[str, Any] | None, more: Mapping[int, list[str]]) -> str:
    if treated is None or treated["outcome"] != Treated.Outcome.GIVEN:
        return ""
    return "+".join(lot for lot in (treated["lot"], *more.get(treated["pk"], [])) if lot)


def _planned(records: Records, eye: int, day: dt.date, *, given: bool) -> int:
    """Return 1 where something was given, else what the last visit on an earlier day planned.

    1 is a treatment, 0 a check only, -1 not said. Laser alone is no treatment the context is for.
    """
    if given:
        return 1
    earlier = [said for on, _entry, said in records.planned.get(eye, []) if on < day]
    return earlier[-1] if earlier else words.NOT_RECORDED


def _symptom_bits(text: str, perception: str) -> tuple[int, int, int]:
    found = symptom_words.parse(text)
    present = found.present_bits if found else 0
    if perception == "no_perception":
        present |= 1 << words.SYMPTOMS.index("no_perception")
    recorded = found is not None or bool(perception)
    return present, found.gone_bits if found else 0, int(recorded)


def _code(known: tuple[str, ...], word: str) -> int:
    return known.index(word) if word in known else words.NOT_RECORDED


def _number(value: int | None) -> int:
    return MISSING if value is None else value


def _acuity(measured: Mapping[str, Any]) -> dict[str, int]:
    if not measured["acuity"]:
        return {}
    found = parse_acuity(measured["acuity_notation"], measured["acuity"], measured["acuity_chart"])
    on_chart = found.logmar_e4 is not None
    return {
        "acuity_level": found.level,
        "logmar_e4": _number(found.logmar_e4),
        "letters": _number(found.letters),
        "acuity_scale": SCALES.index(found.scale) if on_chart else words.NOT_RECORDED,
        "five_letter_chart": int(found.five_letters),
    }


def cells_of(
    records: Records,
    patients: Mapping[int, Patient],
    measured: Mapping[str, Any] | None,
    visit: Mapping[str, Any],
    eye: Mapping[str, Any],
) -> dict[str, Any]:
    """Return one row's cells; ``measured`` holds the one value of each kind that counts."""
    key = (visit["pk"], eye["pk"])
    treated = records.treated.get(key)
    contact, ahead = records.contacts.get(key), records.ahead.get(key)
    patient = patients[visit["patient_id"]]
    state = _at(visit["day"], records.states.get(eye["pk"], []))
    known_causes = [s.cause for s in records.states.get(eye["pk"], []) if s.cause]
    course = _at(visit["day"], records.courses.get(eye["pk"], []))
    events = records.events.get(eye["pk"], [])
    told = (measured or {}).get("symptoms") or (contact or {}).get("symptoms") or ""
    present, gone, recorded = _symptom_bits(told, (treated or {}).get("perception_after", ""))
    agents = _agents(treated, records.more)
    cells: dict[str, Any] = {
        "entry": visit["entry"],
        "kind": _code(words.KINDS, visit["kind"]),
        "sex": _code(words.SEXES, patient.sex),
        "birth_year": _number(patient.birth_year),
        "cause": _code(words.CAUSES, known_causes[-1] if known_causes else ""),
        "status": _code(words.STATUSES, state.status if state else ""),
        "course": course.pk if course and course.regimen else words.NOT_RECORDED,
        "regimen": _code(words.REGIMENS, course.regimen if course else ""),
        "breaks": sum(1 for day, _pk in events if day <= visit["day"]),
        "agents": agents,
        "lots": _lots(treated, records.more_lots),
        "treatment_planned": _planned(
            records, eye["pk"], visit["day"], given=agents not in ("", "none")
        ),
        **fact_cells(records.facts.get(visit["patient_id"], []), eye["pk"], visit["day"]),
        "symptoms_present": present,
        "symptoms_gone": gone,
        "symptoms_recorded": recorded,
        "decided": int(key in records.decided),
        "own_calendar": int(
            OWN_CALENDAR in records.assumed.get(visit.get("from_intake_id") or 0, ())
        ),
        "due_day": _due(ahead, visit["day"]),
        "scanner": "",
        "grader": "",
    }
    if treated is not None:
        cells["iop_after_tenths"] = _number(treated["iop_after_tenths"])
        cells["laser"] = 1 if treated["laser"] not in ("", "none") else 0
    if measured is not None:
        cells |= {
            "cst_um": _number(measured["cst_um"]),
            "oct_class": _code(words.OCT_CLASSES, measured["oct_class"]),
            "scanner": measured["scanner_label"],
            "grader": measured["grader"],
            "scan_quality": _code(words.QUALITIES, measured["scan_quality"]),
            "irf": _code(words.GRADES, measured["irf"]),
            "srf": _code(words.GRADES, measured["srf"]),
            "acuity_correction": _code(words.CORRECTIONS, measured["acuity_correction"]),
            "iop_tenths": _number(measured["iop_tenths"]),
            "iop_method": _code(words.IOP_METHODS, measured["iop_method"]),
            "scanner_assumed": int(measured["one_scanner_assumed"]),
            **_acuity(measured),
        }
    return cells


def _due(ahead: dict[str, Any] | None, day: dt.date) -> int:
    due = ahead["due_day"] if ahead else None
    return day_number(due) if due is not None and due > day else MISSING
