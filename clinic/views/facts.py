"""Facts of a person: entered one kind at a time, followed, and taken back."""

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone

from clinic.adapters.facts import told
from clinic.forms.facts import FactFollowForm, FactForm, first_values
from clinic.models import PersonFact
from clinic.selectors.access import WRITERS, Here, patient_for, site_for
from clinic.services.facts import fact_follow, fact_record
from clinic.views.people import stored


def fact(request: HttpRequest, slug: str, code: str, what: str) -> HttpResponse:
    """Enter a fact of one kind."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    if what not in PersonFact.Kind.values:
        raise Http404
    eyes = {eye.side: eye for eye in patient.eyes.all()}
    first = first_values(timezone.localdate())
    form = FactForm(request.POST or None, initial=first, kind=what, sides=list(eyes))
    if request.method == "POST" and form.is_valid():
        eye = eyes.get(form.cleaned_data.get("eye", ""))
        who = {"by": here.user, "at": timezone.now(), "today": timezone.localdate()}
        known = {"patient": patient, "kind": what, "eye": eye, "values": form.values()}
        if stored(form, fact_record, **known, **who):
            messages.success(request, "Stored; readings were worked out anew.")
            return redirect("person", slug=slug, code=patient.code)
    title = PersonFact.Kind(what).label.capitalize()
    return _page(request, here, patient, title, form)


def fact_later(request: HttpRequest, slug: str, code: str, seq: int) -> HttpResponse:
    """Say that a fact still holds, that it ended, or that it was entered by mistake."""
    here = site_for(request.user, slug, *WRITERS)
    patient = patient_for(here, code)
    rows = PersonFact.objects.filter(patient=patient).select_related("patient", "eye")
    entry = rows.filter(seq=seq, change=PersonFact.Change.ENTRY).first()
    if entry is None:
        raise Http404
    form = FactFollowForm(
        request.POST or None, initial=first_values(timezone.localdate()), kind=entry.kind
    )
    if request.method == "POST" and form.is_valid():
        who = {"by": here.user, "at": timezone.now(), "today": timezone.localdate()}
        if stored(form, fact_follow, entry=entry, **form.values(), **who):
            messages.success(request, "Stored; readings were worked out anew.")
            return redirect("person", slug=slug, code=patient.code)
    words = told(entry)
    return _page(request, here, patient, words[:1].upper() + words[1:], form)


def _page(
    request: HttpRequest,
    here: Here,
    patient: object,
    title: str,
    form: FactForm | FactFollowForm,
) -> HttpResponse:
    context = {"here": here, "patient": patient, "eye": None, "title": title, "form": form}
    return render(request, "people/form.html", context, status=422 if form.is_bound else 200)


routes = [
    path("p/<code>/fact/<what>/", fact, name="fact"),
    path("p/<code>/facts/<int:seq>/", fact_later, name="fact_later"),
]
