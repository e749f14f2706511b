"""What a sheet asks for while somebody types: the live comparison, and keeping drafts."""

import datetime as dt

from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import redirect
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST

from clinic.forms.sheet import FORMS, MeasuredForm
from clinic.forms.sheet.typed import read_payload
from clinic.selectors.access import WRITERS, patient_for, site_for
from clinic.selectors.live import live_comparison
from clinic.selectors.sheet import visit_sheet
from clinic.services.following import draft_drop, draft_save
from clinic.views.sheet_page import KINDS, forms_for


@require_POST
def compare(request: HttpRequest, slug: str, code: str, day: dt.date, kind: str) -> HttpResponse:
    """Say what the typed values would read as; writes nothing, never blocks saving.

    ``number`` comes back, so that the page drops answers that arrive late.
    """
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    sheet = visit_sheet(here, patient, day, kind)
    typed, implied = {}, {}
    for side, form in forms_for(here, sheet, "measured", day, request.POST).items():
        valid = form.is_valid()
        implied[side] = form.implied() if isinstance(form, MeasuredForm) else {}
        if valid and not form.is_blank:
            typed[side] = form.values()
    return JsonResponse(
        {
            "number": request.POST.get("number", ""),
            "implied": implied,
            "eyes": live_comparison(patient, day, kind, typed) if typed else {},
        }
    )


@require_POST
def draft(request: HttpRequest, slug: str, code: str, day: dt.date, kind: str) -> HttpResponse:
    """Keep a part's typing on the server, or throw it away; outside rules and ledger."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    part = request.POST.get("part", "")
    if part not in FORMS or kind not in KINDS:
        return JsonResponse({"kept": False}, status=400)
    if request.POST.get("drop"):
        draft_drop(user=here.user, patient=patient, day=day, part=part)
        return redirect("sheet", slug=slug, code=patient.code, day=day, kind=kind)
    payload = read_payload(request.POST.get("payload", ""))
    if payload is None:
        return JsonResponse({"kept": False}, status=400)
    draft_save(
        user=here.user, patient=patient, day=day, part=part, payload=payload, at=timezone.now()
    )
    return JsonResponse({"kept": True})


routes = [
    path("p/<code>/visit/<day:day>/<kind>/compare/", compare, name="compare"),
    path("p/<code>/visit/<day:day>/<kind>/draft/", draft, name="draft"),
]
