"""The last visit, treatment and values of an eye, each change against the comparable one."""

from collections.abc import Sequence
from typing import Any

from clinic.adapters import Loaded
from trends import words
from trends.comparisons import Comparisons
from trends.measures import agents
from trends.rules.pressure_check_due import LASTING
from trends.visits import MISSING, Visits

Fields = dict[str, Any]


def visit_fields(loaded: Loaded, c: Comparisons, rows: Sequence[int]) -> Fields:
    """Return last visit, treatment and values of one eye's rows, oldest first; contacts apart."""
    v, places = loaded.visits, loaded.places
    attended = [row for row in rows if places[row].kind != "contact"]
    measured = [row for row in attended if _is_measured(v, row)]
    treated = [row for row in attended if int(v.given[row]) == 1]
    fields: Fields = {}
    if attended:
        fields["last_visit_day"] = places[attended[-1]].day
        undecided = (
            _is_measured(v, attended[-1])
            and not int(v.decided[attended[-1]])
            and int(v.given[attended[-1]]) < 0
        )
        fields["undecided_since"] = places[attended[-1]].day if undecided else None
    if measured:
        fields["last_measured_day"] = places[measured[-1]].day
        fields["last_measured_visit_id"] = places[measured[-1]].visit_id
    if treated:
        fields["last_treated_day"] = places[treated[-1]].day
        fields["last_agent"] = v.text("agents", treated[-1])
    return fields | _steroid(loaded, treated) | _last_values(loaded, c, attended)


def _steroid(loaded: Loaded, treated: Sequence[int]) -> Fields:
    """Return the day of the last steroid, and whether one that lasts for years was ever given."""
    texts = {row: loaded.visits.text("agents", row) for row in treated}
    given = [row for row in treated if agents.is_steroid(texts[row])]
    if not given:
        return {}
    return {
        "steroid_day": loaded.places[given[-1]].day,
        "lasting_steroid": any(LASTING in texts[row].split("+") for row in given),
    }


def _is_measured(v: Visits, row: int) -> bool:
    numbers = (v.cst_um[row], v.iop_tenths[row])
    graded = {words.GRADES.index(one) for one in ("no", "yes", "unsure")}
    return (
        any(int(number) != MISSING for number in numbers)
        or int(v.acuity_level[row]) >= 0
        or int(v.irf[row]) in graded
        or int(v.srf[row]) in graded
    )


def _last_values(loaded: Loaded, c: Comparisons, rows: Sequence[int]) -> Fields:
    v, places = loaded.visits, loaded.places
    fields: Fields = {}
    scans = [row for row in rows if int(v.cst_um[row]) != MISSING]
    if scans:
        row, ref = scans[-1], int(c.cst.ref[scans[-1]])
        fields["cst_um"] = int(v.cst_um[row])
        if ref >= 0:
            fields["cst_change_um"] = int(v.cst_um[row]) - int(v.cst_um[ref])
            fields["cst_since"] = places[ref].day
    seen = [row for row in rows if int(v.acuity_level[row]) >= 0]
    if seen:
        fields |= _acuity(loaded, c, seen[-1])
    pressures = [row for row in rows if int(v.iop_tenths[row]) != MISSING]
    if pressures:
        fields["last_iop_day"] = places[pressures[-1]].day
        fields |= _pressure(loaded, pressures)
    return fields


def _acuity(loaded: Loaded, c: Comparisons, row: int) -> Fields:
    v, places = loaded.visits, loaded.places
    entered = v.as_entered["acuity"][int(v.source_row[row])]
    fields: Fields = {"acuity_shown": entered[:40]}
    if int(v.letters[row]) != MISSING:
        fields["letters"] = int(v.letters[row])
    ref = int(c.acuity.ref[row])
    if ref >= 0 and int(v.five_letter_chart[row]) == 1 and int(v.letters[ref]) != MISSING:
        fields["letters_change"] = int(v.letters[row]) - int(v.letters[ref])
        fields["letters_since"] = places[ref].day
    return fields


def _pressure(loaded: Loaded, rows: Sequence[int]) -> Fields:
    v, places = loaded.visits, loaded.places
    row = rows[-1]
    fields: Fields = {"iop_tenths": int(v.iop_tenths[row])}
    same = [
        one
        for one in rows
        if int(v.iop_method[one]) == int(v.iop_method[row]) and places[one].day < places[row].day
    ]
    if same:
        fields["iop_change_tenths"] = int(v.iop_tenths[row]) - int(v.iop_tenths[same[-1]])
        fields["iop_since"] = places[same[-1]].day
    return fields
