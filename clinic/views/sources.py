"""Sources: what each number rests on; the same for every site and role."""

from django.http import Http404, HttpRequest, HttpResponse
from django.shortcuts import render
from django.urls import path
from django.views.decorators.http import require_safe

from clinic.selectors.access import site_for
from clinic.selectors.source_page import contents, quiet_examples, quiet_words, source_page


@require_safe
def index(request: HttpRequest, slug: str) -> HttpResponse:
    """Show the contents: every rule, regimen, formula and range by group."""
    context = {
        "here": site_for(request.user, slug),
        "groups": contents(),
        "quiet_words": quiet_words(),
        "quiet": quiet_examples(),
    }
    return render(request, "sources/contents.html", context)


@require_safe
def show(request: HttpRequest, slug: str, rule: str) -> HttpResponse:
    """Show one entry: its words, its numbers with citation, its sources, a worked example."""
    here = site_for(request.user, slug)
    page = source_page(rule)
    if page is None:
        raise Http404
    return render(request, "sources/entry.html", {"here": here, "page": page})


routes = [
    path("sources/", index, name="sources"),
    path("sources/<str:rule>/", show, name="source"),
]
