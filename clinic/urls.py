"""All addresses: one list of routes a view module, the site's slug in front."""

from django.urls import URLPattern, URLResolver, include, path

from clinic.views import accounts

# Each module of a site's screens is named here once, in the order of the navigation.
SITE_ROUTES: list[URLPattern | URLResolver] = []

urlpatterns = [
    *accounts.routes,
    path("s/<slug:slug>/", include(SITE_ROUTES)),
]

handler400 = "clinic.views.errors.bad_request"
handler403 = "clinic.views.errors.forbidden"
handler404 = "clinic.views.errors.not_found"
handler500 = "clinic.views.errors.broken"
