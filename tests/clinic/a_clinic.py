"""A small clinic whose people use the services the way the screens do, for tests of services."""

import datetime as dt
import uuid
from typing import Any

from clinic.models import Eye, Patient, Scanner, Site, User
from clinic.selectors.access import Here
from clinic.services.parts import EyePart, PartSaved, part_save
from clinic.services.patients import EyeIn, course_open, patient_enrol
from tests.clinic import a_person

TODAY = dt.date(2026, 3, 10)
AT = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
ACUITY = {
    "acuity": "70",
    "acuity_notation": "etdrs_letters",
    "acuity_chart": "etdrs",
    "acuity_correction": "glasses",
    "letters": 70,
    "logmar_e4": 3000,
}


def weeks_ago(weeks: int) -> dt.date:
    return TODAY - dt.timedelta(weeks=weeks)


class Clinic:
    """One site with a scanner, a person who holds every role, and the shipped set in force."""

    def __init__(self, slug: str = "harbour", with_limits: bool = True) -> None:
        self.site: Site = a_person.a_site(slug)
        self.user: User = a_person.a_user(
            self.site, "recorder", "clinician", "steward", name=f"ida-{slug}"
        )
        self.scanner = Scanner.objects.create(site=self.site, label="Room 1", oct_class="SD-BM")
        if with_limits:
            a_person.adopted(self.site, self.user)

    @property
    def here(self) -> Here:
        return Here(self.site, self.user, frozenset({"recorder", "clinician", "steward"}))

    def who(self) -> dict[str, Any]:
        return {"by": self.user, "at": AT, "today": TODAY}

    def enrol(self, *sides: str, cause: str = "diabetic", **more: Any) -> Patient:
        eyes = {side: EyeIn(cause, "in_treatment", more.get("history")) for side in sides or "RL"}
        return patient_enrol(
            site=self.site,
            sex="f",
            birth_year=1960,
            age_90_or_over=False,
            eyes=eyes,
            by=self.user,
            at=AT,
            today=weeks_ago(60),
        )

    def scan(self, cst_um: int | None, **more: Any) -> dict[str, Any]:
        return {
            "cst_um": cst_um,
            "scanner_id": self.scanner.pk,
            "scanner_label": self.scanner.label,
            "oct_class": "SD-BM",
            "scan_quality": "good",
            **more,
        }

    def save(
        self, part: str, patient: Patient, day: dt.date, kind: str = "planned", **typed: Any
    ) -> PartSaved:
        """Save a part; R and L are columns or whole ``EyePart``s, the rest goes to the service."""
        eyes = {
            side: one if isinstance(one, EyePart) else EyePart(one)
            for side in "RL"
            if (one := typed.pop(side, None)) is not None
        }
        typed.setdefault("request_id", uuid.uuid4())
        return part_save(
            part=part, patient=patient, day=day, kind=kind, eyes=eyes, **self.who(), **typed
        )

    def course(self, eye: Eye, regimen: str, from_day: dt.date) -> None:
        course_open(
            eye=eye,
            values={"regimen": regimen, "from_day": from_day, "reason": "usual here"},
            **self.who(),
        )


def eye_of(patient: Patient, side: str = "R") -> Eye:
    eye = patient.eyes.select_related("patient").get(side=side)
    return eye


def raised_rules(eye: Eye) -> list[str]:
    """Return the rules that stand raised on the eye's list."""
    eye.now.refresh_from_db()
    return [item["rule"] for item in eye.now.open_items if "rule" in item]
