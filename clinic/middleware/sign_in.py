"""Every page needs a sign-in; background calls get a plain 401 instead of a page."""

from typing import Any

from django.contrib.auth.middleware import LoginRequiredMiddleware
from django.http import HttpRequest, HttpResponseBase, JsonResponse


def is_background(request: HttpRequest) -> bool:
    """Say whether our own script sent this request."""
    return request.headers.get("X-Requested-With") == "ebbline"


class SignInMiddleware(LoginRequiredMiddleware):
    """Django's own, but a script of a page gets JSON so that the typed sheet stays on screen."""

    def process_view(
        self, request: HttpRequest, view_func: Any, view_args: Any, view_kwargs: Any
    ) -> HttpResponseBase | None:
        """Answer 401 to a script, redirect a page to the sign-in."""
        answer = super().process_view(request, view_func, view_args, view_kwargs)
        if answer is not None and is_background(request):
            return JsonResponse({"signed_out": True}, status=401)
        return answer
