"""Sign-in, in place too; sign-out; the next person at a shared station; the first page."""

from typing import TYPE_CHECKING, Any

from django.contrib.auth import login, logout
from django.contrib.auth.decorators import login_not_required
from django.contrib.auth.forms import AuthenticationForm
from django.http import HttpRequest, HttpResponse, JsonResponse
from django.middleware.csrf import get_token
from django.shortcuts import redirect, render
from django.urls import path
from django.utils import timezone
from django.utils.decorators import method_decorator
from django.utils.http import url_has_allowed_host_and_scheme
from django.views.decorators.cache import never_cache
from django.views.decorators.csrf import csrf_protect
from django.views.decorators.debug import sensitive_post_parameters
from django.views.decorators.http import require_POST
from django.views.generic import FormView

from clinic.middleware.sign_in import is_background
from clinic.models import User
from clinic.selectors.access import sites_for
from clinic.services.accounts import signed_in, signed_out

# Generic only for the type checker: the class isn't subscriptable when it runs.
if TYPE_CHECKING:
    FormPage = FormView[AuthenticationForm]
else:
    FormPage = FormView


@method_decorator(
    [login_not_required, sensitive_post_parameters(), csrf_protect, never_cache], name="dispatch"
)
class SignIn(FormPage):
    """Sign in; from a page's script it answers JSON so that a typed sheet stays on screen."""

    template_name = "accounts/sign_in.html"
    form_class = AuthenticationForm

    def get_form_kwargs(self) -> dict[str, Any]:
        """Give the form the request: the lock-out counts by name and address."""
        return {**super().get_form_kwargs(), "request": self.request}

    def get_context_data(self, **kwargs: Any) -> dict[str, Any]:
        """Keep where the person was going."""
        return {**super().get_context_data(**kwargs), "next": self.wanted()}

    def wanted(self) -> str:
        """Return the page asked for if it is one of ours, else nothing."""
        url = self.request.POST.get("next") or self.request.GET.get("next") or ""
        ours = url_has_allowed_host_and_scheme(url, allowed_hosts={self.request.get_host()})
        return url if ours else ""

    def form_valid(self, form: AuthenticationForm) -> HttpResponse:
        """Start the session and note it in the ledger."""
        user = form.get_user()
        if isinstance(user, User):
            login(self.request, user)
            signed_in(by=user, at=timezone.now())
        if is_background(self.request):
            return JsonResponse(
                {"signed_in": True, "name": str(user), "token": get_token(self.request)}
            )
        return redirect(self.wanted() or "home")

    def form_invalid(self, form: AuthenticationForm) -> HttpResponse:
        """Say that name and password don't fit, never which of the two."""
        if is_background(self.request):
            return JsonResponse({"signed_in": False}, status=400)
        return super().form_invalid(form)


def held(request: HttpRequest, *_: Any) -> HttpResponse:
    """Say that too many tries hold the name for a while; a script of a page gets it as JSON."""
    if is_background(request):
        return JsonResponse({"signed_in": False, "held": True}, status=429)
    return render(request, "accounts/locked.html", status=429)


@require_POST
def sign_out(request: HttpRequest) -> HttpResponse:
    """Sign out; ``next`` lets the next person at this station come to the same page."""
    if isinstance(request.user, User):
        signed_out(by=request.user, at=timezone.now())
    logout(request)
    target = request.POST.get("next", "")
    ours = url_has_allowed_host_and_scheme(target, allowed_hosts={request.get_host()})
    return redirect(f"/sign-in/?next={target}" if ours and target.startswith("/") else "sign_in")


def home(request: HttpRequest) -> HttpResponse:
    """Go to the one site's clinic list, or let the person choose among several."""
    sites = sites_for(request.user)
    if len(sites) == 1:
        return redirect("list", slug=sites[0].slug)
    return render(request, "accounts/sites.html", {"sites": sites})


@login_not_required
def health(request: HttpRequest) -> HttpResponse:
    """Say that the server answers and reads its database; no values."""
    User.objects.exists()
    return JsonResponse({"answers": True})


routes = [
    path("", home, name="home"),
    path("sign-in/", SignIn.as_view(), name="sign_in"),
    path("sign-out/", sign_out, name="sign_out"),
    path("health/", health, name="health"),
]
