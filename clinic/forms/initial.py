"""Stored records as a form's first values, so that a correction starts from what stands."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic.models import Decided, EyeRecord, History, Measured, NextStep, Plan, Treated
from trends.measures.pressure import shown

# What a station keeps belongs to a value: it is offered only where that value isn't stored yet.
STATION_OF = {
    "scanner": "cst",
    "iop_method": "iop",
    "acuity_notation": "acuity",
    "acuity_chart": "acuity",
}


def with_station(initial: dict[str, Any], station: Mapping[str, Any]) -> dict[str, Any]:
    """Return first values with the station's facts where nothing is stored that they belong to."""
    offered = {
        name: fact
        for name, fact in station.items()
        if not initial.get(STATION_OF[name]) and not initial.get(name)
    }
    return {**initial, **offered}


def initial_of(part: str, record: EyeRecord) -> dict[str, Any]:
    """Return the form's values of a stored record."""
    if isinstance(record, Measured):
        return measured(record)
    if isinstance(record, Treated):
        return treated(record)
    if isinstance(record, NextStep):
        return ahead(record)
    if isinstance(record, Decided):
        names = ("choice", "interval_weeks", "agent", "departs_because")
        return {name: getattr(record, name) for name in names}
    raise TypeError(part)


def measured(record: Measured) -> dict[str, Any]:
    """Return a measured record's first values."""
    tokens = [token for token in record.symptoms.split("+") if token]
    more = record.more_acuities.first()
    pressure = record.more_pressures.first()
    same = (
        "scan_quality",
        "irf",
        "srf",
        "grader",
        "acuity",
        "acuity_notation",
        "acuity_chart",
        "acuity_correction",
        "acuity_distance",
        "iop_method",
        "lens",
        "symptoms_onset",
    )
    return {
        **{name: getattr(record, name) for name in same},
        "cst": record.cst_um,
        "scanner": record.scanner_id,
        "iop": "" if record.iop_tenths is None else shown(record.iop_tenths),
        "symptoms_none": tokens == ["none"],
        "symptoms_now": [t for t in tokens if t != "none" and not t.endswith(":gone")],
        "symptoms_gone": [t.removesuffix(":gone") for t in tokens if t.endswith(":gone")],
        "acuity2": more.acuity if more else "",
        "acuity2_notation": more.acuity_notation if more else "",
        "acuity2_chart": more.acuity_chart if more else "",
        "acuity2_correction": more.acuity_correction if more else "",
        "iop2": shown(pressure.iop_tenths) if pressure else "",
        "iop2_method": pressure.iop_method if pressure else "",
    }


def _mg(dose_ug: int | None) -> str:
    return "" if dose_ug is None else f"{dose_ug / 1000:g}"


def treated(record: Treated) -> dict[str, Any]:
    """Return a treated record's first values."""
    second = record.more_treatments.first()
    same = (
        "outcome",
        "agent",
        "route",
        "implant",
        "lot",
        "laser",
        "not_given_because",
        "perception_after",
        "iop_after_method",
        "complications",
    )
    after = record.iop_after_tenths
    return {
        **{name: getattr(record, name) for name in same},
        "dose": _mg(record.dose_ug),
        "agent2": second.agent if second else "",
        "dose2": _mg(second.dose_ug) if second else "",
        "iop_after": "" if after is None else shown(after),
    }


def ahead(record: NextStep) -> dict[str, Any]:
    """Return a next record's first values, with the booking made with it."""
    plan = Plan.objects.filter(set_at_visit=record.visit, eye=record.eye).order_by("-seq").first()
    return {
        "due_weeks": record.due_weeks,
        "due_day": record.due_day,
        "planned_agent": record.planned_agent,
        "planned_dose": _mg(record.planned_dose_ug),
        "check_only": record.check_only,
        "booked_day": plan.booked_day if plan else None,
        "booked_time": f"{plan.booked_time:%H:%M}" if plan and plan.booked_time else "",
    }


def plan(row: Plan | None, today: dt.date) -> dict[str, Any]:
    """Return a stored plan's first values; a booking comes along only while it lies ahead."""
    if row is None:
        return {}
    booked = row.booked_day is not None and row.booked_day >= today
    return {
        "due_day": row.due_day,
        "planned_agent": row.planned_agent,
        "planned_dose": _mg(row.planned_dose_ug),
        "check_only": row.check_only,
        "booked_day": row.booked_day if booked else None,
        "booked_time": f"{row.booked_time:%H:%M}" if booked and row.booked_time else "",
    }


def history(row: History | None) -> dict[str, Any]:
    """Return a stored history's first values; nothing without one."""
    if row is None:
        return {}
    if row.new_eye:
        return {"mode": "new_eye"}
    same = ("diagnosed_on", "treatments_so_far", "agent", "last_treatment_on", "interval_weeks")
    truths = ("loading_done", "steroid_ever", "pressure_rise_after_steroid", "vitrectomy", "laser")
    iop = row.baseline_iop_tenths
    return {
        "mode": "entered",
        **{name: getattr(row, name) for name in (*same, "baseline_letters", "lens")},
        **{name: {True: "yes", False: "no", None: ""}[getattr(row, name)] for name in truths},
        "baseline_cst": row.baseline_cst_um,
        "baseline_iop": "" if iop is None else shown(iop),
    }
