"""The eye course: one eye's page with its chart, verdicts, visits and context."""

import datetime as dt
from dataclasses import dataclass
from typing import Any

from django.http import HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import path, register_converter
from django.utils import timezone
from django.views.decorators.http import require_safe

from clinic.chart import Panels
from clinic.chart.figure import figure
from clinic.chart.spoken import spoken
from clinic.content import EyeReport
from clinic.fluid_words import FLUID, TITLE
from clinic.selectors.access import CLINICIAN, WRITERS, eye_for, site_for
from clinic.selectors.report_content import both_eyes_chart, report_content

EYE_SCREENS = (
    ("course", "Courses"),
    ("plan", "Plan"),
    ("status", "Status"),
    ("event", "Events"),
    ("history", "History"),
)


@dataclass(frozen=True, slots=True)
class NumberRow:
    """One number of the chart, for the table under it."""

    eye: str
    day: dt.date
    what: str
    shown: str
    method: str


@require_safe
def eye_course(request: HttpRequest, slug: str, code: str, side: str) -> HttpResponse:
    """Show one eye; ``?eyes=both`` draws both on one time axis."""
    here = site_for(request.user, slug)
    patient = eye_for(here, code, side).patient
    report = report_content(patient, printed_by=str(here.user), at=timezone.now())
    eye = next(one for one in report.eyes if one.side_slug == side)
    both = request.GET.get("eyes") == "both" and len(report.eyes) > 1
    chart = both_eyes_chart(report) if both else eye.chart
    context = {
        "here": here,
        "patient": patient,
        "person": report.person,
        "eye": eye,
        "eyes": report.eyes,
        "side_slug": side,
        "limit_sets": report.limit_sets,
        "both": both,
        "figure": figure(chart),
        "chart_words": spoken(chart),
        "numbers": number_rows(chart),
        "visits": sorted(eye.visits, key=lambda row: row.day, reverse=True),
        "reasons": [row for row in eye.decisions if row.because],
        "dated": dated_lists(eye),
        "eye_screens": EYE_SCREENS if here.may(*WRITERS) else (),
        "may_answer": here.may(CLINICIAN),
        "fluid_title": TITLE,
        "fluid_words": FLUID,
    }
    return render(request, "eye_course/eye_course.html", context)


def number_rows(chart: Panels) -> list[NumberRow]:
    """Return every drawn number and mark by date, newest first."""
    words = {"R": "right", "L": "left"}
    rows = [
        NumberRow(words[series.side], point.day, panel.title, point.shown, point.method)
        for panel in chart.panels
        for series in panel.series
        for point in series.points
    ]
    rows += [
        NumberRow(words[lane.side], day, lane.kind, lane.name, "")
        for lane in chart.lanes
        for day in lane.days
    ]
    return sorted(rows, key=lambda row: (row.day, row.eye), reverse=True)


def dated_lists(eye: EyeReport) -> list[tuple[str, Any]]:
    """Return the dated lists of the page with their titles."""
    return [
        ("Treatment courses", eye.courses),
        ("Eye events", eye.events),
        ("Contacts", eye.contacts),
    ]


class SideInWords:
    """A side in an address: right or left, in words."""

    regex = "right|left"

    def to_python(self, text: str) -> str:
        """Return the word."""
        return text

    def to_url(self, side: str) -> str:
        """Return the word."""
        return side


register_converter(SideInWords, "side")
routes = [path("p/<code>/<side:side>/", eye_course, name="eye")]
