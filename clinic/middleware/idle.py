"""Idle time-out by a signed cookie: written at most once a minute, never to the database."""

import time
from collections.abc import Callable

from django.conf import settings
from django.contrib.auth import logout
from django.core import signing
from django.http import HttpRequest, HttpResponse

Respond = Callable[[HttpRequest], HttpResponse]
COOKIE = "ebbline_seen"
SALT = "clinic.idle"


def mark(request: HttpRequest, response: HttpResponse, now: float) -> None:
    """Write the time of this activity, bound to the session."""
    response.set_cookie(
        COOKIE,
        signing.dumps([request.session.session_key, int(now)], salt=SALT),
        secure=settings.SESSION_COOKIE_SECURE,
        httponly=True,
        samesite="Strict",
    )


def last_seen(request: HttpRequest) -> int | None:
    """Return the second of the last activity of this session, or None if there is none."""
    try:
        key, at = signing.loads(request.COOKIES.get(COOKIE, ""), salt=SALT)
    except (signing.BadSignature, ValueError, TypeError):
        return None
    return int(at) if key == request.session.session_key else None


class IdleMiddleware:
    """Sign a person out after ``IDLE_SECONDS`` without a request; drafts on the server remain."""

    def __init__(self, get_response: Respond) -> None:
        self.get_response = get_response

    def __call__(self, request: HttpRequest) -> HttpResponse:
        """End an idle session before the view; note activity after it."""
        now = time.time()
        seen = last_seen(request) if request.user.is_authenticated else None
        if seen is not None and now - seen > settings.IDLE_SECONDS:
            logout(request)
        response = self.get_response(request)
        signed_in = request.user.is_authenticated and request.session.session_key
        # Background calls (drafts, live comparison) count: they only happen while somebody types.
        if signed_in and (seen is None or now - seen >= 60):
            mark(request, response, now)
        return response
