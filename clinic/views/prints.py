"""Prints from the pages: the trend report of one person."""

from django.http import HttpRequest, HttpResponse
from django.urls import path
from django.utils import timezone
from django.views.decorators.http import require_safe

from clinic.selectors.access import patient_for, site_for
from clinic.selectors.report_content import report_content
from clinic.services.prints import report_printed


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


def pdf_response(made: bytes, name: str) -> HttpResponse:
    """Return a PDF shown in the browser under a file name that holds the code only."""
    response = HttpResponse(made, content_type="application/pdf")
    response.headers["Content-Disposition"] = f'inline; filename="{name}"'
    return response


routes = [path("p/<code>/report.pdf", report, name="report")]
