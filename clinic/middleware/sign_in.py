"""Every page needs a sign-in; background calls get a plain 401 instead of a page."""

from typing import Any

from django.contrib.auth.middleware import LoginRequiredMiddleware
from django.http import HttpRequest, HttpResponseBase, JsonResponse


def is_background(request: HttpRequest) -> bool:
    """Say whether our own script sent this request."""
    return request.headers.get("X-Requested-With") == "ebbline"


class SignInMiddleware(LoginRequiredMiddleware):
    """Django's own, but a script of a page gets JSON so that the typed sheet stays on screen."""

    def handle_no_permission(self, request: HttpRequest, view_func: Any) -> HttpResponseBase:
        """Answer 401 to a script, redirect a page to the sign-in."""
        if is_background(request):
            return JsonResponse({"signed_out": True}, status=401)
        return super().handle_no_permission(request, view_func)
