"""Every page in a browser: accessible, inside the screen, the notice in view, asking only here."""

import datetime as dt
from collections.abc import Iterator
from dataclasses import dataclass, field
from urllib.parse import urlsplit

import pytest
from axe_playwright_python.sync_playwright import Axe
from django.conf import settings
from django.contrib.sessions.backends.db import SessionStore
from django.utils import timezone
from playwright.sync_api import Browser, Page, Route, sync_playwright

from clinic.models import Patient
from clinic.services.facts import fact_record
from clinic.services.limit_sets import adoption_propose, limit_set_seed
from tests.clinic.at_the_desk import GIVEN, NOW, SEEN, Desk
from tests.conftest import CHROMIUM, LOCAL

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]
TALL = {1280: 800, 390: 844}


@dataclass
class Found:
    """What was wrong, by page; and every address that was asked for."""

    violations: dict[str, list[str]] = field(default_factory=dict)
    too_wide: dict[str, int] = field(default_factory=dict)
    notice_below: dict[str, float] = field(default_factory=dict)
    errors: dict[str, list[str]] = field(default_factory=dict)
    asked: list[str] = field(default_factory=list)


@pytest.fixture
def desk() -> Desk:
    """Return a clinic with something on every page: raised, alarms, late, undecided, proposed."""
    desk = Desk()
    row = next(one for one in limit_set_seed(at=NOW) if one.name == "general")
    adoption_propose(site=desk.site, limit_set=row, by=desk.steward, at=NOW)
    return desk


@pytest.fixture
def patient(desk: Desk) -> Patient:
    day = dt.date(2026, 1, 5)
    late = desk.enrol("R", day=day)
    desk.save(late, "measured", day, R=desk.scan(380))
    desk.save(late, "next", day, R={"due_day": day + dt.timedelta(weeks=4)})
    patient = desk.enrol(day=day)
    seen = {**SEEN, "iop_tenths": 150, "irf": "no", "srf": "no", "symptoms": "none"}
    desk.save(patient, "measured", day, R=desk.scan(400, **seen), L=desk.scan(300, **seen))
    desk.save(patient, "treated", day, R=GIVEN, L=GIVEN)
    later = day + dt.timedelta(weeks=6)
    worse = {**seen, "acuity": "58", "iop_tenths": 310}
    desk.save(patient, "measured", later, R=desk.scan(470, **worse), L=desk.scan(300, **seen))
    desk.call(patient, later + dt.timedelta(days=4), "pain+blurred")
    facts = {"stroke": {"happened_on": day}, "kidney": {}}
    for kind, values in facts.items():
        told = {"day": later, "ask_again_by": later + dt.timedelta(weeks=2), **values}
        who = {"by": desk.recorder, "at": NOW, "today": later}
        fact_record(patient=patient, kind=kind, values=told, **who)
    today = timezone.localdate()
    for side in ("R", "L"):
        desk.plan(patient, side, due_day=today, booked_day=today, booked_time=dt.time(9, 30))
    return patient


def addresses(patient: Patient) -> dict[str, str]:
    """Return every page that a person who may all would open."""
    today = timezone.localdate().isoformat()
    here, person = "/s/harbour", f"/s/harbour/p/{patient.code}"
    return {
        "list": f"{here}/list/{today}/",
        "close of day": f"{here}/list/{today}/close/",
        "sheet": f"{person}/visit/{today}/planned/",
        "sheet of a past visit": f"{person}/visit/2026-02-16/planned/",
        "person": f"{person}/",
        "eye": f"{person}/right/",
        "enrol": f"{here}/enrol/",
        "limits": f"{here}/limits/",
        "adopt": f"{here}/limits/adopt/",
        "sources": f"{here}/sources/",
        "sources of a rule": f"{here}/sources/thickening/",
        "sources of a regimen": f"{here}/sources/treat_and_extend/",
        "sources of a formula": f"{here}/sources/check_characters/",
        "sources of a range": f"{here}/sources/ranges.lines/",
        "contacts": f"{here}/contacts/",
        "contact": f"{person}/contact/",
        "gone quiet": f"{here}/gone-quiet/",
        "awaiting": f"{here}/awaiting/",
        "history": f"{person}/right/history/",
        "status": f"{person}/right/status/",
        "course": f"{person}/right/course/",
        "plan": f"{person}/right/plan/",
        "fact": f"{person}/fact/inflammation/",
        "fact followed": f"{person}/facts/1/",
        "mistyped": f"{here}/find/?code=AAAAAAAAAA",
        "not found": f"{here}/nothing/",
    }


@pytest.fixture
def browser() -> Iterator[Browser]:
    with sync_playwright() as tool:
        browser = tool.chromium.launch(executable_path=CHROMIUM, args=["--no-sandbox"])
        yield browser
        browser.close()


def new_page(browser: Browser, url: str, width: int, found: Found, desk: Desk | None) -> Page:
    context = browser.new_context(viewport={"width": width, "height": TALL[width]})
    if desk is not None:
        session = SessionStore()
        session["_auth_user_id"] = str(desk.clinician.pk)
        session["_auth_user_backend"] = "django.contrib.auth.backends.ModelBackend"
        session["_auth_user_hash"] = desk.clinician.get_session_auth_hash()
        session.save()
        key = session.session_key or ""
        context.add_cookies([{"name": settings.SESSION_COOKIE_NAME, "value": key, "url": url}])

    def local_only(route: Route) -> None:
        found.asked.append(route.request.url)
        address = urlsplit(route.request.url)
        is_here = address.scheme in {"blob", "data"} or (address.hostname or "") in LOCAL
        route.continue_() if is_here else route.abort()

    context.route("**/*", local_only)
    return context.new_page()


def look(page: Page, name: str, width: int, found: Found) -> None:
    """Note what is wrong with the page that is open."""
    results = Axe().run(page).response["violations"]
    if results:
        found.violations[name] = [
            f"{one['id']}: {one['help']}: {node['html'][:160]}"
            for one in results
            for node in one["nodes"][:3]
        ]
    wide = page.evaluate("document.documentElement.scrollWidth")
    if wide > width:
        found.too_wide[name] = wide
    box = page.locator(".notice").bounding_box()
    bottom = box["y"] + box["height"] if box else float("inf")
    if bottom > TALL[width]:
        found.notice_below[name] = bottom


def visit(page: Page, url: str, paths: dict[str, str], width: int, found: Found) -> None:
    for name, path in paths.items():
        told: list[str] = []

        def said(message: object, told: list[str] = told) -> None:
            text = message.text  # type: ignore[attr-defined]
            # The browser itself logs a page that answers 404.
            if message.type == "error" and "Failed to load resource" not in text:  # type: ignore[attr-defined]
                told.append(text)

        page.on("console", said)
        page.on("pageerror", lambda error, told=told: told.append(str(error)))
        page.goto(url + path)
        if name == "eye":
            page.wait_for_selector("#eye-chart[data-drawn=yes]")
        page.evaluate("document.querySelectorAll('details').forEach(one => { one.open = true; })")
        look(page, name, width, found)
        page.remove_listener("console", said)
        if told:
            found.errors[name] = told


@pytest.mark.parametrize("width", [1280, 390])
def test_every_page_is_accessible_fits_the_screen_shows_the_notice_and_asks_only_here(
    width: int, desk: Desk, patient: Patient, browser: Browser, live_server: object
) -> None:
    found, url = Found(), str(live_server.url)  # type: ignore[attr-defined]
    nobody = new_page(browser, url, width, found, None)
    visit(nobody, url, {"sign-in": "/sign-in/"}, width, found)
    page = new_page(browser, url, width, found, desk)
    visit(page, url, addresses(patient), width, found)
    assert found.violations == {}
    assert found.too_wide == {}
    assert found.notice_below == {}
    assert found.errors == {}
    outside = [one for one in found.asked if (urlsplit(one).hostname or "") not in LOCAL]
    assert found.asked
    assert [one for one in outside if not one.startswith(("blob:", "data:"))] == []


@pytest.mark.parametrize("width", [1280, 390])
def test_refused_pages_are_accessible_too(
    width: int, desk: Desk, patient: Patient, browser: Browser, live_server: object
) -> None:
    found, url = Found(), str(live_server.url)  # type: ignore[attr-defined]
    page = new_page(browser, url, width, found, desk)
    paths = addresses(patient)
    page.goto(url + paths["enrol"])
    page.locator("main form button[type=submit]").last.click()
    page.wait_for_selector(".error")
    look(page, "enrolment refused", width, found)
    page.goto(url + paths["sheet"])
    page.fill("[name=R-cst]", "0.412")
    page.fill("[name=L-iop]", "34")
    page.locator("#part-measured .part-foot button").first.click()
    page.wait_for_selector("#part-measured .wrong")
    look(page, "sheet refused", width, found)
    page.goto(url + paths["contact"])
    page.locator("main form button[type=submit]").last.click()
    page.wait_for_selector(".wrong")
    look(page, "contact refused", width, found)
    page.goto(url + paths["adopt"])
    page.locator("main form button[type=submit]").first.click()
    page.wait_for_selector("main .error")
    look(page, "adoption refused", width, found)
    assert found == Found(asked=found.asked)
