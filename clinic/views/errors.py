"""Pages for what went wrong, without values."""

from typing import Any

from django.http import HttpRequest, HttpResponse, JsonResponse
from django.shortcuts import render

from clinic.middleware.sign_in import is_background


def bad_request(request: HttpRequest, exception: Exception | None = None) -> HttpResponse:
    """Answer 400."""
    return render(request, "errors/400.html", status=400)


def forbidden(request: HttpRequest, exception: Exception | None = None) -> HttpResponse:
    """Answer 403: one's role doesn't allow it."""
    return render(request, "errors/403.html", status=403)


def not_found(request: HttpRequest, exception: Exception | None = None) -> HttpResponse:
    """Answer 404: nothing is there, or it isn't this person's site."""
    return render(request, "errors/404.html", status=404)


def broken(request: HttpRequest) -> HttpResponse:
    """Answer 500 when even the middleware could not name an error id."""
    return render(request, "errors/500.html", {"error_id": "none"}, status=500)


def csrf_failure(request: HttpRequest, reason: str = "", **_: Any) -> HttpResponse:
    """Answer a form from an old page: nothing was stored, the typed sheet can be sent again."""
    if is_background(request):
        return JsonResponse({"old_page": True}, status=403)
    return render(request, "errors/old_page.html", status=403)
