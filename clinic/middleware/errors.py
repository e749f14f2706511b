"""Errors get an id that may be told to somebody; logs and pages carry no values."""

import logging
import secrets
import traceback
from collections.abc import Callable

from django.core.exceptions import PermissionDenied
from django.http import Http404, HttpRequest, HttpResponse
from django.template.loader import render_to_string

from clinic.codes import CodeMistyped

Respond = Callable[[HttpRequest], HttpResponse]
log = logging.getLogger("clinic.errors")


class NoValues(logging.Filter):
    """Keep request bodies, query strings and exception texts out of the log."""

    def filter(self, record: logging.LogRecord) -> bool:
        """Drop the exception text and the request object; keep our own message."""
        record.exc_info = None
        record.exc_text = None
        if hasattr(record, "request"):
            del record.request
        return True


def where(error: BaseException) -> str:
    """Return type, file and line of an error, without its text: the text may hold a value."""
    frames = traceback.extract_tb(error.__traceback__)
    place = f"{frames[-1].filename.rsplit('/', 1)[-1]}:{frames[-1].lineno}" if frames else "?"
    return f"{type(error).__name__} at {place}"


class ErrorIdMiddleware:
    """Answer an unexpected error with a page that names an error id, the log has the same id."""

    def __init__(self, get_response: Respond) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        """Pass on."""
        return self.get_response(request)

    def process_exception(self, request: HttpRequest, error: Exception) -> HttpResponse | None:
        """Log the id, type and place; show the id. Rights and missing pages are not errors."""
        if isinstance(error, Http404 | PermissionDenied):
            return None
        if isinstance(error, CodeMistyped):
            page = render_to_string("errors/mistyped.html", {"error": error}, request)
            return HttpResponse(page, status=404)
        error_id = secrets.token_hex(4)
        log.error("error %s: %s", error_id, where(error))
        page = render_to_string("errors/500.html", {"error_id": error_id}, request)
        return HttpResponse(page, status=500)
