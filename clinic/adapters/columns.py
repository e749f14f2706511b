"""Records laid out as columns: one row for each eye that has anything at a visit."""

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from clinic.adapters.cells import cells_of
from clinic.adapters.digests import digests
from clinic.adapters.loaded import Loaded, Place
from clinic.adapters.records import Records, read
from clinic.adapters.several import one_of_each
from clinic.models import History, Patient
from trends import words
from trends.visits import COLUMNS, Visits, coded, day_number, sorted_visits


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
    measured = one_of_each(records)
    cells = [
        cells_of(records, patients, measured.get((visit["pk"], eye["pk"])), visit, eye)
        for visit, eye in rows
    ]
    entered = [_entered(measured.get((visit["pk"], eye["pk"]))) for visit, eye in rows]
    return _columns(records, patients, rows, cells, entered)


def _columns(
    records: Records,
    patients: Mapping[int, Patient],
    rows: Sequence[tuple[dict[str, Any], dict[str, Any]]],
    cells: Sequence[dict[str, Any]],
    entered: Sequence[str],
) -> Loaded:
    columns: dict[str, Any] = {
        name: np.array([one.get(name, absent) for one in cells], dtype=np.int32)
        for name, absent in COLUMNS.items()
        if name not in {"agents", "scanner", "grader", "lots"}
    }
    lists: dict[str, tuple[str, ...]] = {"regimen": words.REGIMENS}
    for name, known in (("agents", ("none",)), ("scanner", ()), ("grader", ()), ("lots", ())):
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
        as_entered={"acuity": list(entered)},
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
        records.assumed.get(visit.get("from_intake_id") or 0, ()),
    )


def _entered(measured: Mapping[str, Any] | None) -> str:
    """Return an acuity as it was typed, with its notation."""
    if measured is None:
        return ""
    return f"{measured['acuity']} {measured['acuity_notation']}".strip()


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
