"""Security headers that Django 5.2 doesn't send by itself."""

from collections.abc import Callable

from django.conf import settings
from django.http import HttpRequest, HttpResponse

Respond = Callable[[HttpRequest], HttpResponse]


def policy_text(policy: dict[str, list[str]]) -> str:
    """Return a Content-Security-Policy header from Django 6's own setting shape."""
    return "; ".join(f"{name} {' '.join(sources)}" for name, sources in policy.items())


class HeadersMiddleware:
    """Send the content policy everywhere, and forbid storing any page."""

    def __init__(self, get_response: Respond) -> None:
        self.get_response = get_response
        self.policy = policy_text(settings.SECURE_CSP)

    def __call__(self, request: HttpRequest) -> HttpResponse:
        """Add the headers to the response of the rest."""
        response = self.get_response(request)
        response.headers.setdefault("Content-Security-Policy", self.policy)
        response.headers.setdefault(
            "Permissions-Policy", "camera=(), geolocation=(), microphone=(), payment=(), usb=()"
        )
        # Pages hold health data: a shared station's browser must not keep them. Static files may.
        if not request.path.startswith(settings.STATIC_URL):
            response.headers["Cache-Control"] = "no-store, private"
        return response
