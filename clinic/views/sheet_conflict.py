"""Two people saved the same part: both versions stand side by side, nothing is lost."""

import datetime as dt
import uuid

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render

from clinic.forms.sheet.versions import both, together
from clinic.models import Patient
from clinic.selectors.access import Here
from clinic.selectors.sheet import PART_WORDS, sheet_opened_on, visit_sheet
from clinic.views.sheet_page import Forms, forms_for


def show(
    request: HttpRequest,
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    part: str,
    forms: Forms,
) -> HttpResponse:
    """Show both versions; nothing of this post was stored, all of it comes along.

    Storing mine keeps what is stored wherever mine was left as it was.
    """
    sheet = visit_sheet(here, patient, day, kind)
    theirs = forms_for(here, sheet, part, day)
    revs = {side: int(form.cleaned_data.get("base_rev") or 0) for side, form in forms.items()}
    opened = forms_for(here, sheet_opened_on(sheet, part, revs), part, day)
    eyes = [
        {
            "eye": eye,
            "record": eye.records.get(part),
            "rows": both(theirs[eye.side], forms[eye.side], opened[eye.side]),
            "posted": together(theirs[eye.side], forms[eye.side], opened[eye.side]),
            "kept": request.POST.getlist(f"{eye.side}-keep"),
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
        "request_id": uuid.uuid4(),
    }
    return render(request, "visit_sheet/conflict.html", context, status=409)
