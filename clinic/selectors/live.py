"""What typed values would read as, judged as if they were saved. Writes nothing."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic import adapters
from clinic.chart.spoken import day_words
from clinic.models import Patient
from clinic.selectors.judged import Found, judge
from clinic.selectors.list_items import RANK_WORDS, RANKS
from trends.measures.logmar import LETTER_E4
from trends.review import comparisons
from trends.visits import MISSING


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
    outcomes = list(one.outcomes.values())
    reached, unknown = outcomes.count("limit_not_reached"), outcomes.count("could_not_tell")
    raised = [row for row in one.raised if row["outcome"] == "raised"]
    return {
        "changes": _changes(loaded, one),
        "raised": [
            {
                "rank": row["rank"],
                "rank_words": RANK_WORDS[row["rank"]],
                "sentence": row["sentence"],
                "alarm": bool((row["working"] or {}).get("emergency")),
            }
            for row in sorted(raised, key=lambda row: RANKS.index(row["rank"]))
        ],
        "counts": f"limits not reached by {reached} rules; {unknown} couldn't tell",
    }


def _changes(loaded: adapters.Loaded, one: Found) -> list[str]:
    """Return the plain change of each value since its comparable one."""
    v = loaded.visits
    row = loaded.places.index(one.place)
    c = comparisons(v, None)
    found = []
    if int(v.cst_um[row]) != MISSING:
        ref = int(c.cst.ref[row])
        change = f"CST {signed(int(v.cst_um[row]) - int(v.cst_um[ref]))} µm"
        found.append(_since(change, "CST", loaded, ref))
    if int(v.logmar_e4[row]) != MISSING:
        ref = int(c.acuity.ref[row])
        letters = (int(v.logmar_e4[ref]) - int(v.logmar_e4[row])) / LETTER_E4
        about = "" if int(v.five_letter_chart[row]) == 1 else "about "
        found.append(_since(f"acuity {about}{signed(letters)} letters", "acuity", loaded, ref))
    return found


def _since(change: str, what: str, loaded: adapters.Loaded, ref: int) -> str:
    if ref < 0:
        return f"{what}: nothing measured the same way before it"
    return f"{change} since {day_words(loaded.places[ref].day)}"


def signed(change: float) -> str:
    """Return a change with its sign, a true minus."""
    return f"{change:+g}".replace("-", "\u2212")
