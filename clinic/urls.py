"""All addresses: one list of routes a view module, the site's slug in front."""

from django.urls import URLPattern, URLResolver, include, path

from clinic.views import (
    accounts,
    clinic_list,
    eye_course,
    facts,
    following,
    limit_sets,
    people,
    prints,
    sources,
    visit_sheet,
)

# Each module of a site's screens is named here once. An eye's address is the most general of those
# below a code, so it comes last.
SITE_ROUTES: list[URLPattern | URLResolver] = [
    *clinic_list.routes,
    *following.routes,
    *limit_sets.routes,
    *prints.routes,
    *sources.routes,
    *visit_sheet.routes,
    *people.routes,
    *facts.routes,
    *eye_course.routes,
]

urlpatterns = [
    *accounts.routes,
    path("s/<slug:slug>/", include(SITE_ROUTES)),
]

handler400 = "clinic.views.errors.bad_request"
handler403 = "clinic.views.errors.forbidden"
handler404 = "clinic.views.errors.not_found"
handler500 = "clinic.views.errors.broken"
