"""The visit sheet: both eyes side by side, four parts that save by themselves."""

import datetime as dt
from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST, require_safe

from clinic.forms.fields import sentence
from clinic.forms.sheet import FORMS, PostForm
from clinic.models import Patient
from clinic.selectors.access import Here, patient_for, site_for
from clinic.selectors.sheet import PART_WORDS, SIDES, Sheet, visit_sheet
from clinic.services.parts import Conflict, PartRefused, PartSaved, ReasonNeeded, part_save
from clinic.views import (
    addresses,  # noqa: F401 - registers the day in addresses
    sheet_conflict,
    sheet_live,
)
from clinic.views.sheet_page import KINDS, Forms, forms_for, page_of, roles_for


@require_safe
def show(request: HttpRequest, slug: str, code: str, day: dt.date, kind: str) -> HttpResponse:
    """Show the sheet of a patient, day and kind of visit."""
    here = site_for(request.user, slug)
    patient = patient_for(here, code)
    if kind not in KINDS:
        raise Http404
    chosen = request.GET.get("kind", "")
    if chosen in KINDS and chosen != kind:
        return redirect("sheet", slug=slug, code=patient.code, day=day, kind=chosen)
    return render(request, "visit_sheet/sheet.html", page_of(here, patient, day, kind))


@require_POST
def save(
    request: HttpRequest, slug: str, code: str, day: dt.date, kind: str, part: str
) -> HttpResponse:
    """Save one part, or show it again with what was typed and what is wrong."""
    if part not in FORMS or kind not in KINDS:
        site_for(request.user, slug)
        raise Http404
    here = site_for(request.user, slug, *roles_for(part))
    patient = patient_for(here, code)
    sheet = visit_sheet(here, patient, day, kind)
    forms = forms_for(here, sheet, part, day, request.POST)
    post = PostForm(request.POST)
    again = {"refused": part, "reason": request.POST.get("reason", "")}
    valid = all([form.is_valid() for form in forms.values()]) and post.is_valid()
    if post.errors.get("reason"):
        again["reason_error"] = " ".join(str(error) for error in post.errors["reason"])
    if not valid or any(form.asked for form in forms.values()):
        return _again(request, here, patient, day, kind, {part: forms}, again)
    try:
        saved = _store(here, patient, day, kind, part, sheet, forms, post)
    except ReasonNeeded as error:
        again["reason_error"] = sentence(error)
    except PartRefused as error:
        again["part_error"] = sentence(error)
    except Conflict:
        return sheet_conflict.show(request, here, patient, day, kind, part, forms)
    else:
        messages.success(request, said(part, saved), extra_tags=f"part-{part}")
        return redirect(f"/s/{slug}/p/{patient.code}/visit/{day.isoformat()}/{kind}/#part-{part}")
    return _again(request, here, patient, day, kind, {part: forms}, again)


def _again(
    request: HttpRequest,
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    bound: dict[str, Forms],
    more: dict[str, Any],
) -> HttpResponse:
    context = page_of(here, patient, day, kind, bound, **more)
    return render(request, "visit_sheet/sheet.html", context, status=422)


def _store(
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    part: str,
    sheet: Sheet,
    forms: Forms,
    post: PostForm,
) -> PartSaved:
    stored = {eye.side: eye.records.get(part) for eye in sheet.eyes}
    eyes = {
        side: form.part()
        for side, form in forms.items()
        if not form.is_blank or stored[side] is not None
    }
    if not eyes:
        raise PartRefused(
            part, "(blank)", "at least one field", "Nothing was typed.", "Fill in what was done."
        )
    return part_save(
        part=part,
        patient=patient,
        day=day,
        kind=kind,
        eyes=eyes,
        request_id=post.cleaned_data["request_id"],
        reason=post.cleaned_data["reason"],
        by=here.user,
        at=timezone.now(),
        today=timezone.localdate(),
    )


def said(part: str, saved: PartSaved) -> str:
    """Return what became of a post, in words."""
    if saved.repeated:
        return f"{PART_WORDS[part]}: already stored by the first click; nothing was stored twice."
    if not saved.changes:
        return f"{PART_WORDS[part]}: nothing differed, nothing was stored."
    named = dict(SIDES)
    done = ", ".join(f"{named[side].lower()} ({change})" for side, change in saved.changes.items())
    return f"{PART_WORDS[part]} saved: {done}."


routes = [
    path("p/<code>/visit/<day:day>/<kind>/", show, name="sheet"),
    *sheet_live.routes,
    path("p/<code>/visit/<day:day>/<kind>/<part>/", save, name="sheet_part"),
]
