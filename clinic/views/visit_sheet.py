"""The visit sheet: both eyes side by side, four parts that save by themselves."""

import datetime as dt
import json
import uuid
from collections.abc import Mapping
from typing import Any

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST, require_safe

from clinic.forms.fields import sentence
from clinic.forms.initial import initial_of
from clinic.forms.sheet import FORMS, EyeForm, PostForm
from clinic.models import Patient, Revision, Visit
from clinic.selectors.access import CLINICIAN, WRITERS, Here, patient_for, site_for
from clinic.selectors.sheet import (
    PART_WORDS,
    SHEET_PARTS,
    SIDES,
    Sheet,
    live_comparison,
    visit_sheet,
)
from clinic.services.following import draft_drop, draft_save, drafts_of
from clinic.services.parts import Conflict, PartRefused, PartSaved, ReasonNeeded, part_save
from clinic.views import addresses  # noqa: F401 - registers the day in addresses
from trends.measures.acuity import implied

KINDS = {kind.value for kind in Visit.Kind} - {Visit.Kind.CONTACT.value}
Forms = dict[str, EyeForm]


def roles_for(part: str) -> tuple[str, ...]:
    """Return who may save a part: decisions are the clinician's."""
    return (CLINICIAN,) if part == "decided" else WRITERS


def forms_for(
    here: Here, sheet: Sheet, part: str, day: dt.date, data: Mapping[str, Any] | None = None
) -> Forms:
    """Return one form an eye; unbound ones show the stored record, else the station's facts."""
    found = {}
    for eye in sheet.eyes:
        record = eye.records.get(part)
        standing = record if record and record.change != Revision.Change.WITHDRAWN else None
        initial = initial_of(part, standing) if standing else dict(sheet.station)
        initial["base_rev"] = record.rev if record else 0
        found[eye.side] = FORMS[part](
            data, prefix=eye.side, initial=initial, site=here.site, day=day
        )
    return found


def context_of(
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    bound: Mapping[str, Forms] | None = None,
    **more: Any,
) -> dict[str, Any]:
    """Return what the page needs; ``bound`` holds the forms of a part that was refused."""
    sheet = visit_sheet(here, patient, day, kind)
    drafts = drafts_of(user=here.user, patient=patient, day=day, at=timezone.now())
    parts = []
    for part in SHEET_PARTS:
        forms = (bound or {}).get(part) or forms_for(here, sheet, part, day)
        draft = drafts.get(part) if part not in (bound or {}) else None
        parts.append(
            {
                "name": part,
                "words": PART_WORDS[part],
                "may": here.may(*roles_for(part)),
                "request_id": uuid.uuid4(),
                "template": f"visit_sheet/_{part}.html",
                "draft": draft,
                "draft_payload": draft.payload if draft else None,
                "eyes": [
                    {"eye": eye, "form": forms[eye.side], "record": eye.records.get(part)}
                    for eye in sheet.eyes
                ],
                "has_record": any(eye.records.get(part) for eye in sheet.eyes),
                "asks": any(form.questions for form in forms.values()),
            }
        )
    return {
        "here": here,
        "patient": patient,
        "day": day,
        "kind": kind,
        "kinds": [one for one in Visit.Kind.choices if one[0] in KINDS],
        "sheet": sheet,
        "parts": parts,
        "only_one": len(sheet.eyes) < len(SIDES),
        **more,
    }


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
    return render(request, "visit_sheet/sheet.html", context_of(here, patient, day, kind))


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
    valid = all([form.is_valid() for form in forms.values()]) and post.is_valid()
    bound = {part: forms}
    reason = request.POST.get("reason", "")
    if not valid or any(form.questions for form in forms.values()):
        context = context_of(here, patient, day, kind, bound, refused=part, reason=reason)
        return render(request, "visit_sheet/sheet.html", context, status=422)
    try:
        saved = _store(here, patient, day, kind, part, sheet, forms, post)
    except ReasonNeeded as error:
        more = {"refused": part, "reason_error": sentence(error), "reason": reason}
        context = context_of(here, patient, day, kind, bound, **more)
        return render(request, "visit_sheet/sheet.html", context, status=422)
    except PartRefused as error:
        more = {"refused": part, "part_error": sentence(error), "reason": reason}
        context = context_of(here, patient, day, kind, bound, **more)
        return render(request, "visit_sheet/sheet.html", context, status=422)
    except Conflict as conflict:
        return _conflict(request, here, patient, day, kind, part, forms, conflict)
    messages.success(request, _said(part, saved))
    return redirect(f"/s/{slug}/p/{patient.code}/visit/{day.isoformat()}/{kind}/#part-{part}")


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


def _said(part: str, saved: PartSaved) -> str:
    if saved.repeated:
        return f"{PART_WORDS[part]}: already stored by the first click; nothing was stored twice."
    if not saved.changes:
        return f"{PART_WORDS[part]}: nothing differed, nothing was stored."
    named = dict(SIDES)
    done = ", ".join(f"{named[side].lower()} ({change})" for side, change in saved.changes.items())
    return f"{PART_WORDS[part]} saved: {done}."


def _conflict(
    request: HttpRequest,
    here: Here,
    patient: Patient,
    day: dt.date,
    kind: str,
    part: str,
    forms: Forms,
    conflict: Conflict,
) -> HttpResponse:
    """Show both versions; nothing of this post was stored, nothing of it is lost."""
    sheet = visit_sheet(here, patient, day, kind)
    theirs = forms_for(here, sheet, part, day)
    eyes = [
        {
            "eye": eye,
            "form": forms[eye.side],
            "record": eye.records.get(part),
            "rows": _both(theirs[eye.side], forms[eye.side]),
        }
        for eye in sheet.eyes
    ]
    mine = [
        (name, value)
        for name in request.POST
        if name not in {"csrfmiddlewaretoken", "request_id", "reason"}
        and not name.endswith("-base_rev")
        for value in request.POST.getlist(name)
    ]
    context = {
        "here": here,
        "patient": patient,
        "day": day,
        "kind": kind,
        "part": part,
        "part_words": PART_WORDS[part],
        "eyes": eyes,
        "mine": mine,
        "request_id": uuid.uuid4(),
    }
    return render(request, "visit_sheet/conflict.html", context, status=409)


def _both(theirs: EyeForm, mine: EyeForm) -> list[dict[str, Any]]:
    """Return each field with both versions, where they differ or either is filled."""
    rows = []
    for name, field in mine.fields.items():
        if name in ("base_rev", "keep"):
            continue
        one = theirs[name].value()
        other = mine[name].value()
        if one or other:
            rows.append(
                {
                    "label": (field.label or name).replace("_", " "),
                    "theirs": in_words(field, one),
                    "mine": in_words(field, other),
                    "same": str(one) == str(other),
                }
            )
    return rows


def in_words(field: Any, value: Any) -> str:
    """Return a field's value as the page shows it: the words of a choice, not its code."""
    values = value if isinstance(value, list) else [value]
    named = {str(getattr(key, "value", key)): str(words) for key, words in _choices(field)}
    return ", ".join(named.get(str(one), str(one)) for one in values if one not in (None, ""))


def _choices(field: Any) -> list[tuple[Any, Any]]:
    return list(getattr(field, "choices", []))


@require_POST
def compare(request: HttpRequest, slug: str, code: str, day: dt.date, kind: str) -> HttpResponse:
    """Say what the typed values would read as; writes nothing, never blocks saving."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    sheet = visit_sheet(here, patient, day, kind)
    forms = forms_for(here, sheet, "measured", day, request.POST)
    typed, acuity = {}, {}
    for side, form in forms.items():
        form.is_valid()
        read = getattr(form, "read", {}).get("acuity")
        acuity[side] = implied(read) if read else {}
        if form.is_valid() and not form.is_blank:
            typed[side] = form.values()
    return JsonResponse(
        {
            "number": request.POST.get("number", ""),
            "implied": acuity,
            "eyes": live_comparison(patient, day, kind, typed) if typed else {},
            "emergency_text": here.site.emergency_text,
        }
    )


@require_POST
def draft(request: HttpRequest, slug: str, code: str, day: dt.date, kind: str) -> HttpResponse:
    """Keep a part's typing on the server, or throw it away; outside rules and ledger."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    part = request.POST.get("part", "")
    if part not in FORMS:
        return JsonResponse({"kept": False}, status=400)
    if request.POST.get("drop"):
        draft_drop(user=here.user, patient=patient, day=day, part=part)
        return redirect("sheet", slug=slug, code=patient.code, day=day, kind=kind)
    try:
        payload = json.loads(request.POST.get("payload", "{}"))
    except json.JSONDecodeError:
        return JsonResponse({"kept": False}, status=400)
    if not isinstance(payload, dict) or len(payload) > 200:
        return JsonResponse({"kept": False}, status=400)
    draft_save(
        user=here.user, patient=patient, day=day, part=part, payload=payload, at=timezone.now()
    )
    return JsonResponse({"kept": True})


routes = [
    path("p/<code>/visit/<day:day>/<kind>/", show, name="sheet"),
    path("p/<code>/visit/<day:day>/<kind>/compare/", compare, name="compare"),
    path("p/<code>/visit/<day:day>/<kind>/draft/", draft, name="draft"),
    path("p/<code>/visit/<day:day>/<kind>/<part>/", save, name="sheet_part"),
]
