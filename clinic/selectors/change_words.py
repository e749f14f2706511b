"""What later revisions changed of a record, in words: who, when, from what to what, why."""

from collections.abc import Sequence
from typing import Any

from django.utils import timezone

from clinic.models import Revision
from clinic.selectors.visit_words import worded

FIELDS = {
    "cst_um": ("CST", "µm"),
    "scanner": ("scanner", ""),
    "scanner_label": ("scanner", ""),
    "oct_class": ("scanner class", ""),
    "scan_quality": ("scan quality", ""),
    "irf": ("IRF", ""),
    "srf": ("SRF", ""),
    "grader": ("grader", ""),
    "acuity": ("acuity", ""),
    "acuity_notation": ("acuity notation", ""),
    "acuity_chart": ("acuity chart", ""),
    "acuity_correction": ("acuity correction", ""),
    "acuity_distance": ("acuity distance", ""),
    "iop_tenths": ("IOP", "mmHg"),
    "iop_method": ("tonometer", ""),
    "lens": ("lens", ""),
    "symptoms": ("symptoms", ""),
    "symptoms_onset": ("onset of symptoms", ""),
    "choice": ("decision", ""),
    "interval_weeks": ("interval", "weeks"),
    "agent": ("agent", ""),
    "departs_because": ("reason to depart", ""),
    "outcome": ("what was given", ""),
    "dose_ug": ("dose", "mg"),
    "route": ("route", ""),
    "lot": ("lot", ""),
    "laser": ("laser", ""),
    "implant": ("implant", ""),
    "not_given_because": ("reason not given", ""),
    "perception_after": ("perception after", ""),
    "iop_after_tenths": ("IOP after", "mmHg"),
    "iop_after_method": ("tonometer after", ""),
    "complications": ("complications", ""),
    "due_weeks": ("due", "weeks"),
    "due_day": ("due", ""),
    "planned_agent": ("planned", ""),
    "planned_dose_ug": ("planned dose", "mg"),
    "check_only": ("check only", ""),
}
SCALES = {"iop_tenths": 10, "iop_after_tenths": 10, "dose_ug": 1000, "planned_dose_ug": 1000}


def changes(part: str, revisions: Sequence[Revision]) -> list[str]:
    """Return one sentence for each revision after the first, in order."""
    return [
        _sentence(part, before, after)
        for before, after in zip(revisions, revisions[1:], strict=False)
    ]


def _sentence(part: str, before: Revision, after: Revision) -> str:
    """Return what one revision did to the one before."""
    at = timezone.localtime(after.at)
    who = f"by {after.by} on {at.day} {at:%b %Y %H:%M}"
    why = f": {after.reason}" if after.reason else ""
    did = {
        Revision.Change.WITHDRAWN: "withdrawn",
        Revision.Change.ADDITION: "added to",
        Revision.Change.CORRECTION: "corrected",
    }.get(Revision.Change(after.change), "entered again")
    listed = "; ".join(differences(before, after))
    return f"{part} {did} {who}{why}" + (f" ({listed})" if listed else "")


def differences(before: Revision, after: Revision) -> list[str]:
    """Return each changed field as ``CST 450 µm to 420 µm``."""
    found = []
    for field, (name, unit) in FIELDS.items():
        old, new = getattr(before, field, None), getattr(after, field, None)
        if old != new:
            found.append(f"{name} {_shown(field, old, unit)} to {_shown(field, new, unit)}")
    return found


def _shown(field: str, amount: Any, unit: str) -> str:
    if amount is None or amount == "":
        return "blank"
    if isinstance(amount, bool):
        return "yes" if amount else "no"
    if field in SCALES:
        amount = f"{amount / SCALES[field]:g}"
    return f"{worded(str(amount))} {unit}".strip()
