"""Limit sets: read with sources; proposed by a steward, confirmed by a clinician."""

from django.contrib import messages
from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_POST, require_safe

from clinic.forms.fields import sentence
from clinic.models import Adoption, LimitSetText
from clinic.selectors.access import CLINICIAN, STEWARD, site_for
from clinic.selectors.limit_page import limit_page, set_page
from clinic.services.limit_sets import AdoptionRefused, adoption_confirm, adoption_propose


@require_safe
def show(request: HttpRequest, slug: str) -> HttpResponse:
    """Show every set with its sources, what is in force and what is proposed."""
    here = site_for(request.user, slug)
    context = {
        "here": here,
        "page": limit_page(here),
        "may_propose": here.may(STEWARD),
        "may_confirm": here.may(CLINICIAN),
    }
    return render(request, "limit_sets/limits.html", context)


@require_POST
def propose(request: HttpRequest, slug: str) -> HttpResponse:
    """Propose a set; it is in force only when a clinician confirms it."""
    here = site_for(request.user, slug, STEWARD)
    row = LimitSetText.objects.filter(digest=request.POST.get("digest", "")).first()
    if row is None:
        raise Http404
    adoption_propose(site=here.site, limit_set=row, by=here.user, at=timezone.now())
    messages.success(request, "Proposed. A clinician confirms it from their own account.")
    return redirect("limit_set", slug=slug)


def confirm(request: HttpRequest, slug: str) -> HttpResponse:
    """Confirm a proposal, every value from memory ticked as checked against the original."""
    here = site_for(request.user, slug, CLINICIAN)
    proposals = Adoption.objects.filter(site=here.site, confirmation=None)
    adoption = proposals.select_related("limit_set", "by").order_by("-seq").first()
    if adoption is None:
        raise Http404
    refused = ""
    if request.method == "POST":
        try:
            adoption_confirm(
                adoption=adoption,
                ticked=request.POST.getlist("ticked"),
                by=here.user,
                at=timezone.now(),
                today=timezone.localdate(),
            )
        except AdoptionRefused as error:
            refused = sentence(error)
        else:
            messages.success(request, "Adopted. Latest visits were reviewed anew.")
            return redirect("limit_set", slug=slug)
    context = {
        "here": here,
        "adoption": adoption,
        "set": set_page(adoption.limit_set),
        "refused": refused,
        "ticked": request.POST.getlist("ticked"),
    }
    return render(request, "limit_sets/confirm.html", context, status=422 if refused else 200)


routes = [
    path("limits/", show, name="limit_set"),
    path("limits/propose/", propose, name="propose"),
    path("limits/adopt/", confirm, name="adopt"),
]
