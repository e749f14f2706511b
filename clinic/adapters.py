"""The only place where rows become a ``Visits`` and verdicts become rows. Imports no pandas.

A ``Loaded`` is many patients' current records as columns, with the visit and eye behind each row.
Withdrawn records are blank. Status, cause and course are those in force on the visit's day.
"""

import datetime as dt
import hashlib
from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np

from clinic.models import (
    ContactEntry,
    Course,
    Decided,
    Eye,
    EyeEvent,
    EyeState,
    History,
    IntakeFile,
    Measured,
    MoreTreatment,
    NextStep,
    Patient,
    Plan,
    Treated,
    Visit,
)
from trends import words
from trends.frames import SCALES
from trends.measures import symptoms as symptom_words
from trends.measures.acuity import parse as parse_acuity
from trends.visits import MISSING, Visits, coded, day_number, sorted_visits

BREAKING = (EyeEvent.Kind.LENS, EyeEvent.Kind.VITRECTOMY, EyeEvent.Kind.OIL)
UNMEASURED = (Visit.Kind.CONTACT, Visit.Kind.TREATMENT_ONLY)
BATCH = 400


@dataclass(frozen=True)
class Place:
    """The visit and eye behind one row; ``assumed`` is what intake took for granted of it."""

    visit_id: int
    eye_id: int
    patient_id: int
    day: dt.date
    kind: str
    assumed: tuple[str, ...] = ()


def with_assumed(
    working: Mapping[str, Any] | None, assumed: Sequence[str]
) -> Mapping[str, Any] | None:
    """Return a working that also says what intake took for granted of its row."""
    if not working or not assumed:
        return working
    said = list(working.get("assumed") or ())
    said += [one for one in assumed if not any(one in other for other in said)]
    return {**working, "assumed": said}


@dataclass
class Loaded:
    """Visits with the places behind their rows, in the order of ``visits`` rows."""

    visits: Visits
    places: list[Place]
    digests: list[str] = field(default_factory=list)

    def is_newest(self, place: Place) -> bool:
        """Say whether a place is of its eye's last visit that could measure, or came after it.

        A call or a treatment on another day takes nothing off the list that was raised before it.
        """
        return place.day >= self._newest_days[place.eye_id]

    @cached_property
    def _newest_days(self) -> dict[int, dt.date]:
        able: dict[int, dt.date] = {}
        every: dict[int, dt.date] = {}
        for place in self.places:
            every[place.eye_id] = max(place.day, every.get(place.eye_id, place.day))
            if place.kind not in UNMEASURED:
                able[place.eye_id] = max(place.day, able.get(place.eye_id, place.day))
        return {**every, **able}

    def rows_of(self, eye_ids: Iterable[int]) -> list[int]:
        """Return the rows of some eyes."""
        wanted = set(eye_ids)
        return [row for row, place in enumerate(self.places) if place.eye_id in wanted]


def _current(model: Any, patients: Sequence[int], *names: str) -> dict[Any, Any]:
    """Return the current, not withdrawn record of each (visit, eye) as a mapping of columns."""
    found: dict[tuple[int, int], dict[str, Any]] = {}
    for start in range(0, len(patients), BATCH):
        rows = (
            model._default_manager.filter(visit__patient_id__in=patients[start : start + BATCH])
            .order_by("rev")
            .values("visit_id", "eye_id", "change", "pk", *names)
        )
        for row in rows.iterator(chunk_size=5000):
            found[row["visit_id"], row["eye_id"]] = row
    return {key: row for key, row in found.items() if row["change"] != "withdrawn"}


MEASURED = (
    "cst_um",
    "scanner_label",
    "oct_class",
    "one_scanner_assumed",
    "scan_quality",
    "irf",
    "srf",
    "grader",
    "acuity",
    "acuity_notation",
    "acuity_chart",
    "acuity_correction",
    "acuity_distance",
    "iop_tenths",
    "iop_method",
    "symptoms",
)
TREATED = ("outcome", "agent", "implant", "laser", "perception_after", "iop_after_tenths")


@dataclass
class Records:
    """Everything read of some patients, by (visit, eye) or by eye."""

    visits: list[dict[str, Any]]
    eyes: dict[int, dict[str, Any]]
    measured: dict[Any, Any]
    treated: dict[Any, Any]
    decided: dict[Any, Any]
    ahead: dict[Any, Any]
    contacts: dict[Any, Any]
    more: dict[int, list[str]]
    states: dict[int, list[EyeState]]
    courses: dict[int, list[Course]]
    events: dict[int, list[tuple[dt.date, int]]]
    histories: dict[int, History]
    assumed: dict[int, tuple[str, ...]] = field(default_factory=dict)


def _by_eye(rows: Iterable[Any]) -> dict[int, list[Any]]:
    found: dict[int, list[Any]] = defaultdict(list)
    for row in rows:
        found[row.eye_id].append(row)
    return found


def read(patients: Sequence[Patient]) -> Records:
    """Read the records of some patients in a fixed number of queries a batch."""
    ids = [patient.pk for patient in patients]
    visits: list[dict[str, Any]] = []
    eyes: dict[int, dict[str, Any]] = {}
    states: list[EyeState] = []
    courses: list[Course] = []
    histories: list[History] = []
    events: list[EyeEvent] = []
    more: dict[int, list[str]] = defaultdict(list)
    for start in range(0, len(ids), BATCH):
        some = ids[start : start + BATCH]
        found = Visit.objects.filter(patient_id__in=some).values(
            "pk", "patient_id", "day", "kind", "entry", "from_intake_id"
        )
        visits += [dict(visit) for visit in found]
        for eye in Eye.objects.filter(patient_id__in=some).values("pk", "patient_id", "side"):
            eyes[eye["pk"]] = dict(eye)
        mine = {"eye__patient_id__in": some}
        states += EyeState.objects.filter(**mine).order_by("seq")
        courses += Course.objects.filter(**mine).order_by("from_day", "seq")
        histories += History.objects.filter(**mine).order_by("rev")
        events += EyeEvent.objects.filter(**mine).order_by("day")
        given = MoreTreatment.objects.filter(treated__visit__patient_id__in=some)
        for treated_id, agent in given.values_list("treated_id", "agent"):
            more[treated_id].append(agent)
    gone = {event.withdraws_id for event in events if event.withdraws_id}
    breaking: dict[int, list[tuple[dt.date, int]]] = defaultdict(list)
    for event in events:
        standing = event.pk not in gone and event.withdraws_id is None
        if standing and event.kind in BREAKING:
            breaking[event.eye_id].append((event.day, event.pk))
    return Records(
        visits=visits,
        eyes=eyes,
        measured=_current(Measured, ids, *MEASURED),
        treated=_current(Treated, ids, *TREATED),
        decided=_current(Decided, ids),
        ahead=_current(NextStep, ids, "due_day"),
        contacts=_current(ContactEntry, ids, "symptoms"),
        more=more,
        states=_by_eye(states),
        courses=_by_eye(courses),
        events=breaking,
        histories={
            history.eye_id: history for history in histories if history.change != "withdrawn"
        },
        assumed=_assumed({visit["from_intake_id"] for visit in visits} - {None}),
    )


def _assumed(files: Collection[int]) -> dict[int, tuple[str, ...]]:
    """Return what each intake file took for granted, by the file's key."""
    rows = IntakeFile.objects.filter(pk__in=files).values_list("pk", "assumed") if files else ()
    return {pk: tuple(sentences) for pk, sentences in rows}


def load(patients: Sequence[Patient]) -> Loaded:
    """Return the visits of some patients as columns."""
    return from_records(read(patients), {patient.pk: patient for patient in patients})


def from_records(records: Records, patients: Mapping[int, Patient]) -> Loaded:
    """Lay records out as columns; one row for each eye that has anything at a visit."""
    by_patient: dict[int, list[dict[str, Any]]] = defaultdict(list)
    for eye in records.eyes.values():
        by_patient[eye["patient_id"]].append(eye)
    rows: list[tuple[dict[str, Any], dict[str, Any]]] = []
    parts = (records.measured, records.treated, records.decided, records.ahead, records.contacts)
    for visit in records.visits:
        for eye in by_patient[visit["patient_id"]]:
            key = (visit["pk"], eye["pk"])
            if any(key in part for part in parts):
                rows.append((visit, eye))
    cells = [_cells(records, patients, visit, eye) for visit, eye in rows]
    return _columns(records, patients, rows, cells)


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
    named = [treated["agent"], *more.get(treated["pk"], [])]
    # Given, but by laser alone or without a name: something was given, so never "none".
    return "+".join(sorted(name for name in named if name)) or "other"


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


def _acuity(measured: dict[str, Any]) -> dict[str, int]:
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


def _cells(
    records: Records,
    patients: Mapping[int, Patient],
    visit: dict[str, Any],
    eye: dict[str, Any],
) -> dict[str, Any]:
    """Return one row's cells: coded numbers, and texts for open lists."""
    key = (visit["pk"], eye["pk"])
    measured, treated = records.measured.get(key), records.treated.get(key)
    contact, ahead = records.contacts.get(key), records.ahead.get(key)
    patient = patients[visit["patient_id"]]
    state = _at(visit["day"], records.states.get(eye["pk"], []))
    known_causes = [s.cause for s in records.states.get(eye["pk"], []) if s.cause]
    course = _at(visit["day"], records.courses.get(eye["pk"], []))
    events = records.events.get(eye["pk"], [])
    told = (measured or {}).get("symptoms") or (contact or {}).get("symptoms") or ""
    present, gone, recorded = _symptom_bits(told, (treated or {}).get("perception_after", ""))
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
        "agents": _agents(treated, records.more),
        "symptoms_present": present,
        "symptoms_gone": gone,
        "symptoms_recorded": recorded,
        "decided": int(key in records.decided),
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


def _columns(
    records: Records,
    patients: Mapping[int, Patient],
    rows: Sequence[tuple[dict[str, Any], dict[str, Any]]],
    cells: Sequence[dict[str, Any]],
) -> Loaded:
    from trends.visits import COLUMNS

    columns: dict[str, Any] = {
        name: np.array([one.get(name, absent) for one in cells], dtype=np.int32)
        for name, absent in COLUMNS.items()
        if name not in {"agents", "scanner", "grader"}
    }
    lists: dict[str, tuple[str, ...]] = {"regimen": words.REGIMENS}
    for name, known in (("agents", ("none",)), ("scanner", ()), ("grader", ())):
        columns[name], lists[name] = coded((one[name] for one in cells), known)
    visits = sorted_visits(
        [patients[visit["patient_id"]].code for visit, _eye in rows],
        np.array([words.SIDES.index(eye["side"]) for _visit, eye in rows], dtype=np.int64),
        np.array([day_number(visit["day"]) for visit, _eye in rows], dtype=np.int64),
        columns,
        lists,
        courses=_courses(records),
    )
    places = [_place(records, *rows[row]) for row in visits.source_row.tolist()]
    visits = replace(
        visits,
        as_entered=_entered(records, [(v["pk"], e["pk"]) for v, e in rows]),
        histories=_histories(records, visits, places),
    )
    return Loaded(visits, places, digests(visits))


def _place(records: Records, visit: dict[str, Any], eye: dict[str, Any]) -> Place:
    return Place(
        visit["pk"],
        eye["pk"],
        visit["patient_id"],
        visit["day"],
        visit["kind"],
        records.assumed.get(visit["from_intake_id"], ()),
    )


def _entered(records: Records, keys: Sequence[tuple[int, int]]) -> dict[str, list[str]]:
    return {
        "acuity": [
            " ".join(
                part
                for part in (
                    (records.measured.get(key) or {}).get("acuity", ""),
                    (records.measured.get(key) or {}).get("acuity_notation", ""),
                )
                if part
            )
            for key in keys
        ]
    }


def _courses(records: Records) -> dict[int, dict[str, Any]]:
    return {
        course.pk: {
            "regimen": course.regimen,
            "params": course.params or {},
            "from_day": course.from_day,
        }
        for courses in records.courses.values()
        for course in courses
    }


def history_cells(history: History) -> dict[str, Any]:
    """Return a history under the engine's names; a new eye has none before the log."""
    return {
        "new_eye": history.new_eye,
        "hist_treatments": 0 if history.new_eye else history.treatments_so_far,
        "hist_agent": history.agent,
        "hist_last_treatment_date": history.last_treatment_on,
        "hist_interval_weeks": history.interval_weeks,
        "hist_loading_done": history.loading_done,
        "hist_steroid_ever": history.steroid_ever,
        "hist_baseline_letters": history.baseline_letters,
        "hist_baseline_cst_um": history.baseline_cst_um,
        "hist_baseline_iop": history.baseline_iop_tenths,
    }


def _histories(
    records: Records, visits: Visits, places: Sequence[Place]
) -> dict[int, dict[str, Any]]:
    found: dict[int, dict[str, Any]] = {}
    for eye in range(visits.offsets.size - 1):
        if visits.offsets[eye] >= len(places):
            continue
        eye_id = places[int(visits.offsets[eye])].eye_id
        history = records.histories.get(eye_id)
        # Nothing entered: the engine must not take the first visit for the first treatment.
        found[eye] = history_cells(history) if history else {"hist_treatments": None}
    return found


def digests(visits: Visits) -> list[str]:
    """Return for each row a digest of all this person's inputs up to that day."""
    names = sorted(visits.columns)
    table = np.stack(
        [visits.columns[name] for name in names] or [np.zeros(0, dtype=np.int32)], axis=1
    )
    course_texts = {key: str(sorted(says.items())) for key, says in visits.courses.items()}
    out = [""] * len(visits)
    order = np.lexsort((visits.side, visits.day, visits.person))
    running: Any = None
    last_person, last_day = -1, None
    pending: list[int] = []
    for row in order.tolist():
        person, day = int(visits.person[row]), int(visits.day[row])
        if person != last_person or day != last_day:
            for one in pending:
                out[one] = running.hexdigest()
            pending = []
        if person != last_person:
            running = hashlib.sha256()
        texts = [visits.text(name, row) for name in ("agents", "scanner", "grader")]
        texts.append(course_texts.get(int(visits.course[row]), ""))
        line = [int(visits.side[row]), day, table[row].tolist(), texts]
        # Codes of open lists depend on who else was loaded, those of courses on the order in which
        # they were stored; their texts stand for them.
        for name in ("agents", "scanner", "grader", "course"):
            line[2][names.index(name)] = 0
        running.update(repr(line).encode())
        pending.append(row)
        last_person, last_day = person, day
    for one in pending:
        out[one] = running.hexdigest()
    return out


def plans_of(eyes: Iterable[int]) -> dict[int, Plan]:
    """Return the newest plan of each eye."""
    found: dict[int, Plan] = {}
    for plan in Plan.objects.filter(eye_id__in=list(eyes)).order_by("seq"):
        found[plan.eye_id] = plan
    return found
