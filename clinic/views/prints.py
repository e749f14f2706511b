"""Prints from the pages: the trend report of one person, the clinic list of one day."""

import datetime as dt

from django.http import HttpRequest, HttpResponse
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_safe

from clinic.selectors.access import patient_for, site_for
from clinic.selectors.evening_content import evening_content
from clinic.selectors.report_content import report_content
from clinic.services.prints import list_printed, report_printed
from clinic.views import addresses  # noqa: F401 - registers the day in addresses


@require_safe
def report(request: HttpRequest, slug: str, code: str) -> HttpResponse:
    """Return the trend report as a PDF; the print is noted in the ledger first."""
    from clinic.reports import trend

    here = site_for(request.user, slug)
    patient = patient_for(here, code)
    at = timezone.now()
    report_printed(patients=[patient], by=here.user, at=at)
    content = report_content(patient, printed_by=str(here.user), at=at)
    return pdf_response(trend.render([content], here.site.paper), f"trend-{patient.code}.pdf")


@require_safe
def evening_list(request: HttpRequest, slug: str, day: dt.date) -> HttpResponse:
    """Return the list of a day as a PDF, for a day without power; the print is noted."""
    from clinic.reports import evening

    here = site_for(request.user, slug)
    at = timezone.now()
    list_printed(site=here.site, day=day, by=here.user, at=at)
    made = evening.render(evening_content(here, day, at), here.site.paper)
    return pdf_response(made, f"list-{day.isoformat()}.pdf")


def pdf_response(made: bytes, name: str) -> HttpResponse:
    """Return a PDF shown in the browser under a file name that holds the code only."""
    response = HttpResponse(made, content_type="application/pdf")
    response.headers["Content-Disposition"] = f'inline; filename="{name}"'
    return response


routes = [
    path("p/<code>/report.pdf", report, name="report"),
    path("list/<day:day>/evening.pdf", evening_list, name="evening_list"),
]
