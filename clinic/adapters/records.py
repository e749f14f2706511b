"""Everything read of some patients, in a fixed number of queries a batch."""

import datetime as dt
from collections import defaultdict
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from clinic.adapters.facts import Standing
from clinic.adapters.facts import standing as facts_standing
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
    MoreAcuity,
    MorePressure,
    MoreTreatment,
    NextStep,
    Patient,
    PersonFact,
    Treated,
    Visit,
)

BREAKING = (EyeEvent.Kind.LENS, EyeEvent.Kind.VITRECTOMY, EyeEvent.Kind.OIL)
BATCH = 400


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
ACUITY = ("acuity", "acuity_notation", "acuity_chart", "acuity_correction", "acuity_distance")
PRESSURE = ("iop_tenths", "iop_method")
TREATED = (
    "outcome",
    "agent",
    "implant",
    "lot",
    "laser",
    "perception_after",
    "iop_after_tenths",
)
AHEAD = ("due_day", "planned_agent", "check_only")


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
    more_acuities: dict[int, list[dict[str, Any]]] = field(default_factory=dict)
    more_pressures: dict[int, list[dict[str, Any]]] = field(default_factory=dict)
    more_lots: dict[int, list[str]] = field(default_factory=dict)
    facts: dict[int, list[Standing]] = field(default_factory=dict)

    @cached_property
    def planned(self) -> dict[int, list[tuple[dt.date, int, int]]]:
        """By eye: day and entry of each visit that planned ahead, and 1, 0 or -1 for treatment."""
        visits = {visit["pk"]: visit for visit in self.visits}
        found: dict[int, list[tuple[dt.date, int, int]]] = defaultdict(list)
        for (visit_id, eye_id), row in self.ahead.items():
            visit = visits[visit_id]
            said = 1 if row["planned_agent"] else 0 if row["check_only"] else -1
            found[eye_id].append((visit["day"], visit["entry"], said))
        return {eye: sorted(rows) for eye, rows in found.items()}


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
    lots: dict[int, list[str]] = defaultdict(list)
    facts: dict[int, list[PersonFact]] = defaultdict(list)
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
        for treated_id, agent, lot in given.values_list("treated_id", "agent", "lot"):
            more[treated_id].append(agent)
            lots[treated_id].append(lot)
        for fact in PersonFact.objects.filter(patient_id__in=some):
            facts[fact.patient_id].append(fact)
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
        ahead=_current(NextStep, ids, *AHEAD),
        contacts=_current(ContactEntry, ids, "symptoms"),
        more=more,
        more_acuities=_children(MoreAcuity, ids, *ACUITY),
        more_pressures=_children(MorePressure, ids, *PRESSURE),
        more_lots=lots,
        facts={patient: facts_standing(rows) for patient, rows in facts.items()},
        states=_by_eye(states),
        courses=_by_eye(courses),
        events=breaking,
        histories={
            history.eye_id: history for history in histories if history.change != "withdrawn"
        },
        assumed=_assumed({visit["from_intake_id"] for visit in visits} - {None}),
    )


def _children(model: Any, patients: Sequence[int], *names: str) -> dict[int, list[dict[str, Any]]]:
    """Return further values of measured records, by the record's key, as they were entered."""
    found: dict[int, list[dict[str, Any]]] = defaultdict(list)
    for start in range(0, len(patients), BATCH):
        some = patients[start : start + BATCH]
        rows = model._default_manager.filter(measured__visit__patient_id__in=some).order_by("pk")
        for row in rows.values("measured_id", *names):
            found[row.pop("measured_id")].append(row)
    return dict(found)


def _assumed(files: Collection[int]) -> dict[int, tuple[str, ...]]:
    """Return what each intake file took for granted, by the file's key."""
    rows = IntakeFile.objects.filter(pk__in=files).values_list("pk", "assumed") if files else ()
    return {pk: tuple(sentences) for pk, sentences in rows}
