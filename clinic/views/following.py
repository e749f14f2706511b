"""Between visits: contacts, awaiting decision, gone quiet, and clinicians' answers."""

import datetime as dt
import uuid

from django.contrib import messages
from django.http import HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST, require_safe

from clinic.forms.fields import sentence
from clinic.forms.person import ContactForm
from clinic.models import Answer, ContactEntry, EyeNow, Patient
from clinic.selectors.access import CLINICIAN, WRITERS, Here, eye_for, patient_for, site_for
from clinic.selectors.following import awaiting, contacts, gone_quiet, unanswered
from clinic.services.following import answer_record
from clinic.services.parts import EyePart, part_save
from trends.errors import EbblineError


@require_safe
def show_awaiting(request: HttpRequest, slug: str) -> HttpResponse:
    """Show what was measured and not decided, and what was raised first and not answered."""
    here, today = site_for(request.user, slug), timezone.localdate()
    context = {"here": here, "rows": awaiting(here, today), "waiting": unanswered(here, today)}
    return render(request, "following/awaiting.html", context)


@require_safe
def show_quiet(request: HttpRequest, slug: str) -> HttpResponse:
    """Show who is past a due day, not rebooked or without a plan."""
    here = site_for(request.user, slug)
    rows = gone_quiet(here, timezone.localdate())
    context = {"here": here, "rows": rows, "may_write": here.may(*WRITERS)}
    return render(request, "following/gone_quiet.html", context)


@require_safe
def show_contacts(request: HttpRequest, slug: str) -> HttpResponse:
    """Show contacts, alarms nobody answered on top."""
    here = site_for(request.user, slug)
    context = {"here": here, "rows": contacts(here), "may_write": here.may(*WRITERS)}
    return render(request, "following/contacts.html", context)


def contact(request: HttpRequest, slug: str, code: str) -> HttpResponse:
    """Enter a contact; alarm symptoms show the site's emergency text at once."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    initial = {"day": timezone.localdate(), "request_id": uuid.uuid4()}
    form = ContactForm(request.POST or None, initial=initial)
    if request.method == "POST" and form.is_valid():
        try:
            _store(here, patient, form)
        except EbblineError as error:
            form.add_error("day", sentence(error))
        else:
            if form.cleaned_data["symptoms_now"]:
                messages.warning(
                    request,
                    f"Contact stored. {here.site.emergency_text} "
                    "It stays Raise first until a clinician answers.",
                )
            else:
                messages.success(request, "Contact stored.")
            return redirect("contacts", slug=slug)
    eyes = EyeNow.objects.filter(eye__patient=patient).select_related("eye").order_by("-eye__side")
    context = {"here": here, "patient": patient, "form": form, "eyes": eyes}
    return render(request, "following/contact.html", context, status=422 if form.is_bound else 200)


def _store(here: Here, patient: Patient, form: ContactForm) -> None:
    data = form.cleaned_data
    sides = {eye.side for eye in patient.eyes.all()}
    before = _told_before(patient, data["day"])
    eyes = {side: _part(form, before.get(side)) for side in data["eyes"] if side in sides}
    if not eyes:
        raise EbblineError(
            "eye",
            "+".join(data["eyes"]),
            " or ".join(sorted(sides)),
            "That eye isn't followed here.",
            "Tick the followed eye, or enrol the other one.",
        )
    part_save(
        part="contact",
        patient=patient,
        day=data["day"],
        kind="contact",
        eyes=eyes,
        request_id=data["request_id"],
        # A second call on one day adds to the day's contact; what stood before stays visible.
        reason="another contact on the same day",
        by=here.user,
        at=timezone.now(),
        today=timezone.localdate(),
    )


def _part(form: ContactForm, before: ContactEntry | None) -> EyePart:
    """Return a call as it is stored: what an earlier call of the day told as present stays so.

    Only a clinician's answer closes an alarm, not a second call that nobody took.
    """
    values, rev = form.values(), 0
    if before is not None:
        rev = before.rev
        if before.change != ContactEntry.Change.WITHDRAWN:
            values["symptoms"] = told_by_both(before.symptoms, values["symptoms"])
            values["symptoms_onset"] = values["symptoms_onset"] or before.symptoms_onset
    return EyePart(values, base_rev=rev, note=form.cleaned_data["note"])


def told_by_both(first: str, second: str) -> str:
    """Return the symptoms of two calls of a day as one text: present in either is present."""
    tokens = [one for text in (first, second) for one in text.split("+") if one]
    named = dict.fromkeys(one.removesuffix(":gone") for one in tokens if one != "none")
    if not named:
        return "none" if "none" in tokens else ""
    return "+".join(name if name in tokens else f"{name}:gone" for name in named)


def _told_before(patient: Patient, day: dt.date) -> dict[str, ContactEntry]:
    rows = ContactEntry.objects.filter(visit__patient=patient, visit__day=day)
    return {row.eye.side: row for row in rows.select_related("eye").order_by("rev")}


@require_POST
def answer(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Answer something raised (a clinician): seen acting, seen not acting, look again on a day."""
    here = site_for(request.user, slug, CLINICIAN)
    eye = eye_for(here, code, side)
    back = request.POST.get("back", "")
    try:
        day = dt.date.fromisoformat(request.POST.get("day", ""))
        visit = eye.patient.visits.filter(day=day, kind=request.POST.get("kind", "")).first()
        if visit is None or request.POST.get("answer") not in Answer.Kind.values:
            raise ValueError
        again = request.POST.get("look_again_on", "").strip()
        answer_record(
            visit=visit,
            eye=eye,
            rule=request.POST.get("rule", ""),
            answer=request.POST["answer"],
            look_again_on=dt.date.fromisoformat(again) if again else None,
            reason=request.POST.get("reason", "")[:280],
            by=here.user,
            at=timezone.now(),
            today=timezone.localdate(),
        )
        messages.success(request, "Answer stored.")
    except EbblineError as error:
        messages.error(request, f"Not stored. {sentence(error)}")
    except ValueError:
        messages.error(
            request, "Not stored: an answer and dates such as 2026-03-04 are needed. Try again."
        )
    if back:
        return redirect(f"/s/{slug}/list/{back[:10]}/#p-{eye.patient.code}")
    return redirect("eye", slug=slug, code=eye.patient.code, side=side)


routes = [
    path("awaiting/", show_awaiting, name="awaiting"),
    path("gone-quiet/", show_quiet, name="gone_quiet"),
    path("contacts/", show_contacts, name="contacts"),
    path("p/<code>/contact/", contact, name="contact"),
    path("p/<code>/<side>/answer/", answer, name="answer"),
]
