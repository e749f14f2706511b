"""A small invented person with both eyes, stored row by row, for tests of pages and prints."""

import datetime as dt
from typing import Any

from clinic import codes
from clinic.models import (
    Adoption,
    AdoptionConfirmed,
    Course,
    Decided,
    Eye,
    EyeEvent,
    EyeState,
    LimitSetText,
    Measured,
    Membership,
    NextStep,
    Patient,
    Scanner,
    Site,
    Treated,
    User,
    Visit,
)

AT = dt.datetime(2026, 3, 4, 9, 30, tzinfo=dt.UTC)
FIRST = dt.date(2025, 9, 1)


def a_site(slug: str = "harbour", **more: Any) -> Site:
    return Site.objects.create(
        slug=slug, label=slug.title(), emergency_text="Ring extension 5", **more
    )


def a_user(site: Site, *roles: str, name: str = "") -> User:
    user = User.objects.create_user(name or roles[0], password="pass-word-1234")
    for role in roles:
        Membership.objects.create(user=user, site=site, role=role)
    return user


def adopted(site: Site, by: User) -> None:
    from trends.limits import shipped

    limits = shipped("general")
    text, _ = LimitSetText.objects.get_or_create(
        digest=limits.digest,
        defaults={
            "name": limits.name,
            "version": limits.version,
            "text": limits.text,
            "at": AT,
        },
    )
    proposed = Adoption.objects.create(site=site, limit_set=text, seq=1, at=AT, by=by)
    AdoptionConfirmed.objects.create(adoption=proposed, at=AT, by=by)


class Person:
    """Builds rows the way the screens would; every helper returns what it stored."""

    def __init__(self, site: Site, by: User, sex: str = "f") -> None:
        self.site, self.by = site, by
        self.patient = Patient.objects.create(
            code=codes.fresh(), site=site, birth_year=1957, sex=sex, enrolled_at=AT, enrolled_by=by
        )
        self.scanner = Scanner.objects.create(
            site=site, label=f"Room {Scanner.objects.count() + 1}", oct_class="SD-BM"
        )

    def stamp(self, **more: Any) -> dict[str, Any]:
        return {"at": AT, "by": self.by, **more}

    def eye(self, side: str, cause: str = "diabetic", regimen: str = "") -> Eye:
        eye = Eye.objects.create(patient=self.patient, side=side)
        EyeState.objects.create(
            eye=eye,
            seq=1,
            cause=cause,
            status="in_treatment",
            from_day=FIRST,
            **self.stamp(),
        )
        if regimen:
            Course.objects.create(
                eye=eye,
                seq=1,
                regimen=regimen,
                agent="ranibizumab",
                from_day=FIRST,
                reason="usual here",
                **self.stamp(),
            )
        return eye

    def visit(self, weeks: int, kind: str = "planned") -> Visit:
        return Visit.objects.create(
            patient=self.patient, day=FIRST + dt.timedelta(weeks=weeks), kind=kind, **self.stamp()
        )

    def measured(self, visit: Visit, eye: Eye, cst_um: int | None = None, **more: Any) -> Measured:
        fields = {
            "rev": 1,
            "scanner": self.scanner,
            "scanner_label": self.scanner.label,
            "oct_class": "SD-BM",
            "acuity": "70",
            "acuity_notation": "etdrs_letters",
            "acuity_chart": "etdrs",
            "acuity_correction": "glasses",
            "letters": 70,
            "logmar_e4": 3000,
            "iop_tenths": 150,
            "iop_method": "applanation",
            "symptoms": "none",
            "irf": "no",
            "srf": "no",
        }
        return Measured.objects.create(
            visit=visit, eye=eye, cst_um=cst_um, **{**fields, **self.stamp(), **more}
        )

    def treated(self, visit: Visit, eye: Eye, agent: str = "ranibizumab", **more: Any) -> Treated:
        fields = {"rev": 1, "outcome": "given", "agent": agent, "dose_ug": 500}
        return Treated.objects.create(visit=visit, eye=eye, **{**fields, **self.stamp(), **more})

    def decided(self, visit: Visit, eye: Eye, choice: str = "treat", **more: Any) -> Decided:
        return Decided.objects.create(
            visit=visit, eye=eye, **{"rev": 1, "choice": choice, **self.stamp(), **more}
        )

    def due(self, visit: Visit, eye: Eye, weeks: int) -> NextStep:
        return NextStep.objects.create(
            visit=visit,
            eye=eye,
            rev=1,
            due_weeks=weeks,
            due_day=visit.day + dt.timedelta(weeks=weeks),
            planned_agent="ranibizumab",
            planned_dose_ug=500,
            **self.stamp(),
        )

    def event(self, eye: Eye, weeks: int, kind: str = "lens_surgery", **more: Any) -> EyeEvent:
        day = FIRST + dt.timedelta(weeks=weeks)
        return EyeEvent.objects.create(eye=eye, kind=kind, day=day, **self.stamp(), **more)


def a_history(site: Site, by: User) -> Person:
    """Right eye: 400, 380, 430 µm on one scanner class; left eye: two visits, watched."""
    person = Person(site, by)
    right, left = person.eye("R", regimen="treat_and_extend"), person.eye("L", "branch_vein")
    for weeks, um in ((0, 400), (5, 380), (10, 430)):
        visit = person.visit(weeks)
        person.measured(visit, right, um)
        person.treated(visit, right)
        person.decided(visit, right, interval_weeks=5)
        person.due(visit, right, 5)
        if weeks:
            person.measured(visit, left, 300)
    return person
