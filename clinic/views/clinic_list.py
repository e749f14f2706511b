"""The clinic list: the flagged-patient list of one clinic day, with ticks, answers and closing."""

import datetime as dt

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST, require_safe

from clinic.clinic_days import default_day
from clinic.models import Plan
from clinic.selectors.access import CLINICIAN, WRITERS, patient_for, site_for
from clinic.selectors.clinic_list import clinic_list
from clinic.services.following import day_close, tick_set
from clinic.views import addresses  # noqa: F401 - registers the day in addresses


@require_safe
def show(request: HttpRequest, slug: str, day: dt.date | None = None) -> HttpResponse:
    """Show the list of a day; without one, today's while it isn't closed, else the next."""
    here = site_for(request.user, slug)
    today = timezone.localdate()
    asked = request.GET.get("day", "")
    if asked:
        return _go_to(slug, asked)
    shown = day or default_day(here.site, today)
    context = {
        "here": here,
        "list": clinic_list(here, shown, today),
        "today": today,
        "before": shown - dt.timedelta(days=1),
        "after": shown + dt.timedelta(days=1),
        "may_write": here.may(*WRITERS),
        "may_answer": here.may(CLINICIAN),
        "only": request.GET.get("only", ""),
    }
    return render(request, "clinic_list/list.html", context)


def _go_to(slug: str, asked: str) -> HttpResponse:
    try:
        return redirect("list_day", slug=slug, day=dt.date.fromisoformat(asked))
    except ValueError as error:
        raise Http404 from error


@require_POST
def tick(request: HttpRequest, slug: str, day: dt.date) -> HttpResponse:
    """Tick a person as dealt with on the day, or take it back."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, request.POST.get("code", ""))
    tick_set(
        patient=patient,
        day=day,
        ticked=request.POST.get("ticked") == "yes",
        by=here.user,
        at=timezone.now(),
    )
    return redirect(f"/s/{slug}/list/{day.isoformat()}/#p-{patient.code}")


def close(request: HttpRequest, slug: str, day: dt.date) -> HttpResponse:
    """Close the day: who was booked, did not come and isn't rebooked is noted, due days stay."""
    here = site_for(request.user, slug, *WRITERS)
    today = timezone.localdate()
    shown = clinic_list(here, day, today)
    absent = [
        block
        for block in shown.blocks
        if not block.came and any(eye.now.booked_day == day for eye in block.eyes)
    ]
    if request.method == "POST" and day <= today:
        eyes = [eye.now.eye for block in absent for eye in block.eyes if _is_booked(eye, day)]
        day_close(site=here.site, day=day, absent=eyes, by=here.user, at=timezone.now())
        messages.success(request, f"Closed. {len(absent)} did not come; due days are unchanged.")
        return redirect("gone_quiet", slug=slug)
    context = {"here": here, "list": shown, "absent": absent, "may_close": day <= today}
    return render(request, "clinic_list/close.html", context, status=405 if day > today else 200)


def _is_booked(eye: object, day: dt.date) -> bool:
    now = eye.now  # type: ignore[attr-defined]
    return bool(now.booked_day == day) and Plan.objects.filter(eye=now.eye).exists()


routes = [
    path("", show, name="list"),
    path("list/<day:day>/", show, name="list_day"),
    path("list/<day:day>/tick/", tick, name="tick"),
    path("list/<day:day>/close/", close, name="close_day"),
]
