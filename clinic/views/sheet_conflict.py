"""Two people saved the same part: both versions stand side by side, nothing is lost."""

import datetime as dt
import uuid

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from clinic.forms.sheet.told import both
from clinic.models import Patient
from clinic.selectors.access import Here
from clinic.selectors.sheet import PART_WORDS, visit_sheet
from clinic.views.sheet_page import Forms, forms_for

NOT_TYPED = {"csrfmiddlewaretoken", "request_id", "reason"}


def show(
    request: HttpRequest,
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    part: str,
    forms: Forms,
) -> HttpResponse:
    """Show both versions; nothing of this post was stored, all of it comes along."""
    sheet = visit_sheet(here, patient, day, kind)
    theirs = forms_for(here, sheet, part, day)
    eyes = [
        {
            "eye": eye,
            "record": eye.records.get(part),
            "rows": both(theirs[eye.side], forms[eye.side]),
        }
        for eye in sheet.eyes
    ]
    context = {
        "here": here,
        "patient": patient,
        "day": day,
        "kind": kind,
        "part": part,
        "part_words": PART_WORDS[part],
        "eyes": eyes,
        "mine": _typed(request),
        "request_id": uuid.uuid4(),
    }
    return render(request, "visit_sheet/conflict.html", context, status=409)


def _typed(request: HttpRequest) -> list[tuple[str, str]]:
    """Return every typed value of the post, for the form that stores it on top."""
    return [
        (name, str(value))
        for name in request.POST
        if name not in NOT_TYPED and not name.endswith("-base_rev")
        for value in request.POST.getlist(name)
    ]
