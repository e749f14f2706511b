"""A person: enrolment, the person's page, and the dated facts of person and eyes."""

import uuid
from collections.abc import Callable
from typing import Any

from django import forms
from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_safe

from clinic.forms import initial
from clinic.forms.fields import sentence
from clinic.forms.person import (
    CourseForm,
    EventForm,
    EyeEnrolForm,
    HistoryPageForm,
    PersonForm,
    PersonStatusForm,
    PlanForm,
    StateForm,
)
from clinic.models import Eye, PatientStatus, PersonFact
from clinic.selectors.access import CLINICIAN, WRITERS, Here, eye_for, patient_for, site_for
from clinic.selectors.person import person_page
from clinic.selectors.person_facts import fact_lines
from clinic.services import patients as people
from clinic.services.following import plan_record
from trends.errors import EbblineError

SIDES = (("R", "Right eye"), ("L", "Left eye"))


def stored(form: forms.Form, service: Callable[..., Any], **values: Any) -> Any:
    """Call a service; a refusal becomes the form's error and nothing is returned."""
    try:
        return service(**values)
    except EbblineError as error:
        form.add_error(None, sentence(error))
        return None


def enrol(request: HttpRequest, slug: str) -> HttpResponse:
    """Enrol a person under a fresh code, with each followed eye and its history."""
    here = site_for(request.user, slug, *WRITERS)
    today = timezone.localdate()
    data = request.POST if request.method == "POST" else None
    person = PersonForm(data, today=today)
    eyes = {side: EyeEnrolForm(data, prefix=side) for side, _words in SIDES}
    valid = data is not None and all([person.is_valid(), *(f.is_valid() for f in eyes.values())])
    if valid:
        chosen = {side: form.eye() for side, form in eyes.items()}
        patient = stored(
            person,
            people.patient_enrol,
            site=here.site,
            sex=person.cleaned_data["sex"],
            birth_year=person.cleaned_data["birth_year"],
            age_90_or_over=person.cleaned_data["age_90_or_over"],
            eyes={side: eye for side, eye in chosen.items() if eye is not None},
            by=here.user,
            at=timezone.now(),
            today=today,
            request_id=_request_id(request),
        )
        if patient is not None:
            messages.success(
                request,
                f"Enrolled as {patient.code}. Write the code on the card now: "
                "who it is stands nowhere in Ebbline.",
            )
            return redirect("person", slug=slug, code=patient.code)
    pairs = [(words, eyes[side]) for side, words in SIDES]
    context = {"here": here, "form": person, "eyes": pairs, "request_id": _request_id(request)}
    status = 422 if data is not None else 200
    return render(request, "people/enrol.html", context, status=status)


def _request_id(request: HttpRequest) -> uuid.UUID:
    """Return the hidden id of the posted sheet, or a new one."""
    try:
        return uuid.UUID(request.POST.get("request_id", ""))
    except ValueError:
        return uuid.uuid4()


@require_safe
def person(request: HttpRequest, slug: str, code: str) -> HttpResponse:
    """Show a person: year of birth, sex, both eyes' causes and last-seen day, and what to do."""
    here = site_for(request.user, slug)
    patient = patient_for(here, code)
    context = {
        "here": here,
        "patient": patient,
        "today": timezone.localdate(),
        "may_write": here.may(*WRITERS),
        "may_decide": here.may(CLINICIAN),
        "page": person_page(patient),
        "facts": fact_lines(patient, timezone.localdate()),
        "fact_kinds": PersonFact.Kind.choices,
    }
    return render(request, "people/person.html", context)


def person_status(request: HttpRequest, slug: str, code: str) -> HttpResponse:
    """Record that a person moved away, died, or is active again."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    form = PersonStatusForm(request.POST or None, initial={"from_day": timezone.localdate()})
    if request.method == "POST" and form.is_valid():
        data = form.cleaned_data
        names = ("status", "from_day", "reason")
        values = {name: data[name] for name in names}
        who = {"patient": patient, "by": here.user, "at": timezone.now()}
        if stored(form, people.patient_status_record, **values, **who):
            messages.success(request, f"Recorded: {PatientStatus.Status(data['status']).label}.")
            return redirect("person", slug=slug, code=patient.code)
    return _page(request, here, patient, None, "Standing of the person", form)


def _who(here: Here) -> dict[str, Any]:
    return {"by": here.user, "at": timezone.now(), "today": timezone.localdate()}


def _page(
    request: HttpRequest, here: Here, patient: Any, eye: Eye | None, title: str, form: forms.Form
) -> HttpResponse:
    context = {"here": here, "patient": patient, "eye": eye, "title": title, "form": form}
    return render(request, "people/form.html", context, status=422 if form.is_bound else 200)


def history(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Enter or correct what is known of an eye before the log."""
    here = site_for(request.user, slug, *WRITERS)
    eye = eye_for(here, code, side)
    last = eye.histories.order_by("-rev").first()
    form = HistoryPageForm(request.POST or None, initial=initial.history(last))
    if request.method == "POST" and form.is_valid():
        values = form.values()
        if values is None:
            form.add_error("mode", "Choose what is known.")
            return _page(request, here, eye.patient, eye, "History before the log", form)
        why = form.cleaned_data["reason"]
        if stored(form, people.history_record, eye=eye, values=values, reason=why, **_who(here)):
            messages.success(request, "History stored; readings were worked out anew.")
            return redirect("person", slug=slug, code=eye.patient.code)
    return _page(request, here, eye.patient, eye, "History before the log", form)


def status(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Choose an eye's status and cause from a day on (a clinician)."""
    here = site_for(request.user, slug, CLINICIAN)
    eye = eye_for(here, code, side)
    last = eye.states.order_by("-seq").first()
    first = {"cause": last.cause, "status": last.status} if last else {}
    form = StateForm(request.POST or None, initial={**first, "from_day": timezone.localdate()})
    if request.method == "POST" and form.is_valid():
        names = ("cause", "status", "stop_reason", "from_day", "reason")
        values = {name: form.cleaned_data[name] for name in names}
        if stored(form, people.eye_state_record, eye=eye, values=values, **_who(here)):
            messages.success(request, "Status stored.")
            return redirect("person", slug=slug, code=eye.patient.code)
    return _page(request, here, eye.patient, eye, "Status and cause", form)


def event(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Enter a dated event of an eye."""
    here = site_for(request.user, slug, *WRITERS)
    eye = eye_for(here, code, side)
    form = EventForm(request.POST or None)
    if request.method == "POST" and form.is_valid():
        values = {name: form.cleaned_data[name] for name in ("kind", "day", "reason")}
        if stored(form, people.eye_event_record, eye=eye, **values, **_who(here)):
            messages.success(request, "Event stored; comparisons across it end there.")
            return redirect("person", slug=slug, code=eye.patient.code)
    return _page(request, here, eye.patient, eye, "Eye event", form)


def course(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Open a treatment course (a clinician), with a reason."""
    here = site_for(request.user, slug, CLINICIAN)
    eye = eye_for(here, code, side)
    form = CourseForm(request.POST or None, initial={"from_day": timezone.localdate()})
    if request.method == "POST" and form.is_valid():
        if stored(form, people.course_open, eye=eye, values=form.values(), **_who(here)):
            messages.success(request, "Course opened.")
            return redirect("person", slug=slug, code=eye.patient.code)
    return _page(request, here, eye.patient, eye, "Treatment course", form)


def plan(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Record a due day, a booking, or what became of one."""
    here = site_for(request.user, slug, *WRITERS)
    eye = eye_for(here, code, side)
    last = eye.plans.order_by("-seq").first()
    form = PlanForm(request.POST or None, initial=initial.plan(last, timezone.localdate()))
    if request.method == "POST" and form.is_valid():
        who = {"by": here.user, "at": timezone.now(), "reason": form.cleaned_data["reason"]}
        if stored(form, plan_record, eye=eye, values=form.values(), **who):
            messages.success(request, "Plan stored. Lateness still counts from the first due day.")
            return redirect("person", slug=slug, code=eye.patient.code)
    return _page(request, here, eye.patient, eye, "Plan and booking", form)


@require_safe
def find(request: HttpRequest, slug: str) -> HttpResponse:
    """Go to the person of a typed code; a mistyped one is told before any look-up."""
    here = site_for(request.user, slug)
    code = request.GET.get("code", "")
    if not code:
        raise Http404
    return redirect("person", slug=slug, code=patient_for(here, code).code)


routes = [
    path("enrol/", enrol, name="enrol"),
    path("find/", find, name="find"),
    path("p/<code>/", person, name="person"),
    path("p/<code>/standing/", person_status, name="person_status"),
    path("p/<code>/<side>/history/", history, name="history"),
    path("p/<code>/<side>/status/", status, name="status"),
    path("p/<code>/<side>/event/", event, name="event"),
    path("p/<code>/<side>/course/", course, name="course"),
    path("p/<code>/<side>/plan/", plan, name="plan"),
]
