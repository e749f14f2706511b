"""The one look-up: what this person may see, found and permitted in one call.

Somebody else's site, patient or eye doesn't exist (404); a thing of one's own site that one's role
doesn't allow is refused (403).
"""

import datetime as dt
from dataclasses import dataclass, field

from django.contrib.auth.models import AnonymousUser
from django.core.exceptions import PermissionDenied
from django.db.models import QuerySet
from django.http import Http404

from clinic import codes
from clinic.models import Eye, Membership, Patient, Site, User, Visit

RECORDER, CLINICIAN, STEWARD, READER = "recorder", "clinician", "steward", "reader"
WRITERS = (RECORDER, CLINICIAN)
SIDES = {"right": Eye.Side.RIGHT, "left": Eye.Side.LEFT}


@dataclass(frozen=True)
class Here:
    """One person at one site, with every role held there."""

    site: Site
    user: User
    roles: frozenset[str] = field(default_factory=frozenset)

    def may(self, *roles: str) -> bool:
        """Say whether the person holds any of these roles here."""
        return bool(self.roles.intersection(roles))

    def patients(self) -> QuerySet[Patient]:
        """Return the patients of this site and of no other."""
        return Patient.objects.filter(site=self.site)


def sites_for(user: User | AnonymousUser) -> list[Site]:
    """Return the sites a person belongs to, by label; none for nobody."""
    if not user.is_authenticated:
        return []
    mine = Membership.objects.filter(user=user, active=True).values("site")
    return list(Site.objects.filter(pk__in=mine).order_by("label"))


def site_for(user: User | AnonymousUser, slug: str, *roles: str) -> Here:
    """Return the site for this person, or raise 404 (not a member) or 403 (none of the roles)."""
    if not isinstance(user, User):
        raise Http404
    held = list(
        Membership.objects.filter(user=user, active=True, site__slug=slug).select_related("site")
    )
    if not held:
        raise Http404
    here = Here(held[0].site, user, frozenset(membership.role for membership in held))
    if roles and not here.may(*roles):
        raise PermissionDenied
    return here


def patient_for(here: Here, code: str) -> Patient:
    """Return the patient of this site by code.

    Raises ``codes.CodeMistyped`` when the check characters don't fit, before any look-up, and 404
    when no such patient is at this site (another site's patient doesn't exist here).
    """
    wanted = codes.normalise(code)
    patient = here.patients().filter(code=wanted).select_related("site").first()
    if patient is None:
        raise Http404
    return patient


def eye_for(here: Here, code: str, side: str) -> Eye:
    """Return one eye by code and side in words (``right`` or ``left``); 404 if there is none."""
    patient = patient_for(here, code)
    eye = patient.eyes.filter(side=SIDES.get(side, "?")).first()
    if eye is None:
        raise Http404
    eye.patient = patient
    return eye


def visit_for(here: Here, code: str, day: dt.date, kind: str) -> Visit:
    """Return one visit of a patient of this site; 404 if there is none."""
    visit = patient_for(here, code).visits.filter(day=day, kind=kind).first()
    if visit is None:
        raise Http404
    return visit
