"""The eye course in a browser: the chart is drawn, nothing leaves this machine."""

from collections.abc import Iterator
from urllib.parse import urlsplit

import pytest
from django.conf import settings
from django.contrib.sessions.backends.db import SessionStore
from django.urls import reverse
from playwright.sync_api import Page, Route, sync_playwright

from tests.clinic.a_person import Person, a_history, a_site, a_user, adopted
from tests.conftest import CHROMIUM, LOCAL

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def person() -> Person:
    site = a_site()
    user = a_user(site, "clinician")
    adopted(site, user)
    return a_history(site, user)


@pytest.fixture
def asked() -> list[str]:
    """Return every address the page asked for."""
    return []


@pytest.fixture
def page(person: Person, live_server: object, asked: list[str]) -> Iterator[Page]:
    """Yield a signed-in page that can reach this machine only."""
    session = SessionStore()
    session["_auth_user_id"] = str(person.by.pk)
    session["_auth_user_backend"] = "django.contrib.auth.backends.ModelBackend"
    session["_auth_user_hash"] = person.by.get_session_auth_hash()
    session.save()

    def local_only(route: Route) -> None:
        asked.append(route.request.url)
        address = urlsplit(route.request.url)
        if address.scheme in {"blob", "data"} or (address.hostname or "") in LOCAL:
            route.continue_()
        else:
            route.abort()

    with sync_playwright() as tool:
        browser = tool.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox"])
        context = browser.new_context(viewport={"width": 1280, "height": 900})
        url = str(live_server.url)  # type: ignore[attr-defined]
        context.add_cookies(
            [{"name": settings.SESSION_COOKIE_NAME, "value": session.session_key or "", "url": url}]
        )
        context.route("**/*", local_only)
        yield context.new_page()
        browser.close()


def opened(page: Page, live_server: object, person: Person, query: str = "") -> list[str]:
    """Open the right eye and return every error the browser told."""
    told: list[str] = []
    page.on("pageerror", lambda error: told.append(str(error)))
    page.on("console", lambda said: told.append(said.text) if said.type == "error" else None)
    path = reverse("eye", args=["harbour", person.patient.code, "right"])
    page.goto(f"{live_server.url}{path}{query}")  # type: ignore[attr-defined]
    page.wait_for_selector("#eye-chart[data-drawn=yes]")
    return told


def test_the_chart_is_drawn_under_the_strict_policy_and_nothing_leaves_this_machine(
    page: Page, live_server: object, person: Person, asked: list[str]
) -> None:
    assert opened(page, live_server, person) == []
    page.locator("#eye-chart .nsewdrag").first.hover()
    page.locator(".modebar-btn[data-title='Reset axes']").click()
    page.wait_for_timeout(300)
    assert asked
    outside = [url for url in asked if (urlsplit(url).hostname or "") not in LOCAL]
    assert outside == []


def test_the_chart_offers_no_share_button_no_logo_and_no_link_out(
    page: Page, live_server: object, person: Person
) -> None:
    opened(page, live_server, person)
    titles = page.locator(".modebar-btn").evaluate_all(
        "buttons => buttons.map(one => one.getAttribute('data-title'))"
    )
    assert titles
    assert not [
        title for title in titles if "cloud" in title.lower() or "produced" in title.lower()
    ]
    links = page.locator("#eye-chart a[href]").evaluate_all("all => all.map(one => one.href)")
    assert [link for link in links if link] == []


def test_readings_of_two_classes_are_drawn_as_two_lines(
    page: Page, live_server: object, person: Person
) -> None:
    visit = person.visit(15)
    person.measured(visit, person.patient.eyes.get(side="R"), 360, oct_class="SS")
    opened(page, live_server, person)
    drawn = page.evaluate(
        """() => [...document.querySelectorAll('#eye-chart .subplot.xy .trace.scatter')]
            .filter(trace => trace.querySelectorAll('.point').length === 4)
            .map(trace => [...trace.querySelectorAll('path.js-line')].map(
                path => (path.getAttribute('d').match(/[ML]/g) || []).join('')))"""
    )
    # Three readings of one class are joined (one start, two strokes); the fourth stands alone.
    assert [[line for line in lines if "L" in line] for lines in drawn] == [["MLL"]]


@pytest.mark.parametrize("width", [1280, 390])
def test_the_page_fits_wide_and_narrow_screens_with_both_eyes(
    page: Page, live_server: object, person: Person, width: int
) -> None:
    page.set_viewport_size({"width": width, "height": 844})
    assert opened(page, live_server, person, "?eyes=both") == []
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    notice = page.locator(".notice").bounding_box()
    assert notice is not None
    assert notice["y"] + notice["height"] < 844


def test_after_zooming_the_ticks_still_name_the_year(
    page: Page, live_server: object, person: Person
) -> None:
    opened(page, live_server, person)
    zoomed = "{'xaxis.range[0]': '2025-10-01', 'xaxis.range[1]': '2025-10-12'}"
    page.evaluate(f"Plotly.relayout('eye-chart', {zoomed})")
    page.wait_for_timeout(400)
    labels = page.locator("#eye-chart .xtick text").all_text_contents()
    assert labels
    assert all("2025" in label for label in labels)
