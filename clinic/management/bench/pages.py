"""The app's bench: the list page of a large site, saving a two-eye part, one patient's PDF."""

import datetime as dt
import random
import uuid
from collections.abc import Iterator

from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse
from django.utils import timezone

from clinic.exchange.acuity_columns import acuity_columns
from clinic.management.bench.figures import Figure, median_ms, seconds
from clinic.models import Membership, Patient, Scanner, Site, User
from clinic.reports import trend
from clinic.selectors.access import Here
from clinic.selectors.adopted import parsed
from clinic.selectors.clinic_list import clinic_list
from clinic.selectors.report_content import report_content
from clinic.services.bulk import visits_take_in
from clinic.services.limit_sets import (
    adoption_confirm,
    adoption_propose,
    from_memory,
    limit_set_seed,
)
from clinic.services.parts import EyePart, part_save
from clinic.services.past import PastEye, PastEyeVisit, PastPerson, PastVisit

PATIENTS, BOOKED, VISITS = 5_000, 60, 8
GAP_DAYS = 35


def figures() -> Iterator[Figure]:
    """Measure and yield one figure after the other, in a database of its own."""
    today, at = timezone.localdate(), timezone.now()
    site, by = clinic_with_staff(at, today)
    draw = random.Random(5)  # noqa: S311 - invented values
    scanner = site.scanners.get()
    people = [person(draw, number, today, scanner) for number in range(PATIENTS)]
    took = seconds(
        lambda: visits_take_in(site=site, people=people, by=by, at=at, today=today, action="bench")
    )
    yield Figure(f"storing {PATIENTS:,} patients of {VISITS} visits", took, "s")
    yield from list_figures(site, by, today)
    yield from save_figures(site, by, today)
    yield from pdf_figures(site)


def clinic_with_staff(at: dt.datetime, today: dt.date) -> tuple[Site, User]:
    """Make the site, one colleague with every role, and adopt the shipped set."""
    site = Site.objects.create(slug="bench", label="Bench", emergency_text="Bench")
    Scanner.objects.create(site=site, label="A", oct_class="SD-BM")
    by = User.objects.create_user("bench")
    for role in Membership.Role.values:
        Membership.objects.create(user=by, site=site, role=role)
    general = next(row for row in limit_set_seed(at=at) if row.name == "general")
    proposal = adoption_propose(site=site, limit_set=general, by=by, at=at)
    ticked = from_memory(parsed(general.text))
    adoption_confirm(adoption=proposal, ticked=ticked, by=by, at=at, today=today)
    return site, by


def person(draw: random.Random, number: int, today: dt.date, scanner: Scanner) -> PastPerson:
    """Draw one person; the first ``BOOKED`` are booked today, two in five with both eyes."""
    sides = ("R", "L") if draw.random() < 0.4 else (draw.choice("RL"),)
    ahead = 0 if number < BOOKED else draw.randint(1, GAP_DAYS - 1)
    booked = today + dt.timedelta(days=ahead)
    last = booked - dt.timedelta(days=GAP_DAYS)
    first = last - dt.timedelta(days=GAP_DAYS * (VISITS - 1))
    days = [first + dt.timedelta(days=GAP_DAYS * place) for place in range(VISITS)]
    plan = {"due_day": booked, "booked_day": booked, "planned_agent": "aflibercept"}
    eyes = tuple(
        PastEye(
            side,
            states=({"cause": "diabetic", "status": "in_treatment", "from_day": first},),
            history={"new_eye": True},
            courses=({"regimen": "treat_and_extend", "from_day": first, "reason": "bench"},),
            plans=(plan,),
        )
        for side in sides
    )
    visits = tuple(
        PastVisit(day, "planned", 0, tuple(eye_visit(draw, side, day, scanner) for side in sides))
        for day in days
    )
    return PastPerson(f"bench-{number}", draw.choice("fm"), 1955, eyes, visits)


def measured(draw: random.Random, scanner: Scanner) -> dict[str, object]:
    """Draw the measured part of one eye."""
    return {
        "cst_um": draw.randint(250, 420),
        "scanner": scanner,
        "scanner_label": scanner.label,
        "oct_class": scanner.oct_class,
        "scan_quality": "good",
        "irf": draw.choice(("yes", "no")),
        "srf": "no",
        "grader": "clinician",
        "iop_tenths": 10 * draw.randint(11, 20),
        "iop_method": "applanation",
        "symptoms": "none",
        **acuity_columns(str(draw.randint(45, 85)), "etdrs_letters", "etdrs", "glasses"),
    }


def eye_visit(draw: random.Random, side: str, day: dt.date, scanner: Scanner) -> PastEyeVisit:
    """Draw all four parts of one eye at one visit."""
    return PastEyeVisit(
        side,
        measured(draw, scanner),
        {"choice": "treat"},
        {"outcome": "given", "agent": "aflibercept", "dose_ug": 2000},
        {"due_weeks": 5, "due_day": day + dt.timedelta(days=GAP_DAYS)},
    )


def list_figures(site: Site, by: User, today: dt.date) -> Iterator[Figure]:
    """Measure the list: its queries, its reading, and the whole page."""
    here = Here(site, by, frozenset(Membership.Role.values))
    tomorrow = today + dt.timedelta(days=1)
    with CaptureQueriesContext(
        connection,
    ) as of_today:
        found = clinic_list(here, today, today)
    with CaptureQueriesContext(connection) as of_tomorrow:
        more = clinic_list(here, tomorrow, today)
    yield Figure(f"patients on the list, of {PATIENTS:,} at the site", len(found.blocks), "")
    yield Figure("queries of the list", len(of_today), "")
    grown = len(of_tomorrow) - len(of_today)
    yield Figure(f"  more queries for the {len(more.blocks)} of the next day", grown, "", 0)
    yield Figure("reading the list", median_ms(lambda: clinic_list(here, today, today)), "ms")
    # Without the test environment: its instrumented templates would cost as much as the page.
    client = Client(SERVER_NAME="127.0.0.1")
    client.force_login(by)
    address = reverse("list", kwargs={"slug": site.slug})
    if client.get(address).status_code != 200:
        raise RuntimeError("the list page did not answer")
    yield Figure("list page, whole", median_ms(lambda: client.get(address)), "ms", 150)


def save_figures(site: Site, by: User, today: dt.date) -> Iterator[Figure]:
    """Measure the saving of a measured part of both eyes with its review."""
    draw = random.Random(9)  # noqa: S311 - invented values
    scanner = site.scanners.get()
    both = Patient.objects.filter(site=site, eyes__side="R").filter(eyes__side="L")
    waiting = iter(both.order_by("pk").select_related("site")[:40])

    def save() -> None:
        part_save(
            part="measured",
            patient=next(waiting),
            day=today,
            kind="planned",
            eyes={side: EyePart(measured(draw, scanner)) for side in "RL"},
            request_id=uuid.uuid4(),
            by=by,
            at=timezone.now(),
            today=today,
        )

    yield Figure("saving a two-eye part with its review", median_ms(save), "ms", 100)


def pdf_figures(site: Site) -> Iterator[Figure]:
    """Measure one patient's printed report, from reading to bytes."""
    patient = Patient.objects.filter(site=site, eyes__side="L").select_related("site").first()
    if patient is None:
        raise RuntimeError("nobody to print")

    def work() -> None:
        content = report_content(patient, printed_by="bench", at=timezone.now())
        trend.render([content], site.paper)

    yield Figure(f"one patient's PDF, {VISITS} visits", median_ms(work, times=7), "ms", 300)
