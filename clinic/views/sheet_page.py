"""What a visit sheet's page needs: forms of each part, drafts put back, stored parts in words."""

import datetime as dt
import uuid
from collections.abc import Mapping
from typing import Any

from django.utils import timezone

from clinic.forms.initial import initial_of, with_station
from clinic.forms.sheet import FORMS, EyeForm
from clinic.forms.sheet.told import rows
from clinic.forms.sheet.typed import put_back
from clinic.models import Draft, Patient, Revision, Visit
from clinic.selectors.access import CLINICIAN, WRITERS, Here
from clinic.selectors.sheet import PART_WORDS, SHEET_PARTS, EyeSheet, Sheet, visit_sheet
from clinic.services.following import drafts_of

KINDS = {kind.value for kind in Visit.Kind} - {Visit.Kind.CONTACT.value}
Forms = dict[str, EyeForm]


def roles_for(part: str) -> tuple[str, ...]:
    """Return who may save a part: decisions are the clinician's."""
    return (CLINICIAN,) if part == "decided" else WRITERS


def first_values(eye: EyeSheet, part: str, station: Mapping[str, Any]) -> dict[str, Any]:
    """Return a form's first values: the stored record, and the station's facts around it."""
    record = eye.records.get(part)
    standing = record if record and record.change != Revision.Change.WITHDRAWN else None
    initial = initial_of(part, standing) if standing else {}
    if part == "measured":
        initial = with_station(initial, station)
    return {**initial, "base_rev": record.rev if record else 0}


def forms_for(
    here: Here, sheet: Sheet, part: str, day: dt.date, data: Mapping[str, Any] | None = None
) -> Forms:
    """Return one form an eye."""
    return {
        eye.side: FORMS[part](
            data,
            prefix=eye.side,
            initial=first_values(eye, part, sheet.station),
            site=here.site,
            day=day,
        )
        for eye in sheet.eyes
    }


def forms_of_draft(here: Here, sheet: Sheet, part: str, day: dt.date, draft: Draft) -> Forms:
    """Return forms that hold what was typed and not saved.

    The revision it was typed on comes back too, so that saving over somebody else's newer one shows
    both; a draft of another kind of visit has none here.
    """
    found = {}
    for eye in sheet.eyes:
        stored = first_values(eye, part, sheet.station)
        typed = put_back(FORMS[part], eye.side, draft.payload)
        if not typed.get("base_rev"):
            typed["base_rev"] = stored["base_rev"]
        found[eye.side] = FORMS[part](
            None, prefix=eye.side, initial={**stored, **typed}, site=here.site, day=day
        )
    return found


def page_of(
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    bound: Mapping[str, Forms] | None = None,
    **more: Any,
) -> dict[str, Any]:
    """Return the page's context; ``bound`` holds the forms of a part that was refused."""
    sheet = visit_sheet(here, patient, day, kind)
    drafts = drafts_of(user=here.user, patient=patient, day=day, at=timezone.now())
    parts = [
        _part(here, sheet, part, day, (bound or {}).get(part), drafts.get(part))
        for part in SHEET_PARTS
    ]
    return {
        "here": here,
        "patient": patient,
        "day": day,
        "kind": kind,
        "kinds": [one for one in Visit.Kind.choices if one[0] in KINDS],
        "sheet": sheet,
        "parts": parts,
        "may_write": here.may(*WRITERS),
        **more,
    }


def _part(
    here: Here, sheet: Sheet, part: str, day: dt.date, bound: Forms | None, draft: Draft | None
) -> dict[str, Any]:
    may = here.may(*roles_for(part))
    stored = forms_for(here, sheet, part, day)
    back = draft if may and bound is None else None
    forms = bound or (forms_of_draft(here, sheet, part, day, back) if back else stored)
    revs = [_rev(form) for form in forms.values()]
    return {
        "name": part,
        "words": PART_WORDS[part],
        "may": may,
        "request_id": uuid.uuid4(),
        "template": f"visit_sheet/_{part}.html",
        "draft": back,
        "overtaken": bool(back) and revs != [_rev(form) for form in stored.values()],
        "eyes": [
            {
                "eye": eye,
                "form": forms[eye.side],
                "record": eye.records.get(part),
                "rows": [] if may else rows(stored[eye.side]),
            }
            for eye in sheet.eyes
        ],
        "has_record": any(eye.records.get(part) for eye in sheet.eyes),
        "asks": not any(form.errors for form in forms.values()),
    }


def _rev(form: EyeForm) -> int:
    return int(form["base_rev"].value() or 0)
