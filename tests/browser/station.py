"""A browser at a station, signed in as one person; it can reach this machine only."""

import uuid
from collections.abc import Iterator
from contextlib import contextmanager
from urllib.parse import urlsplit

from django.conf import settings
from django.contrib.sessions.backends.db import SessionStore
from playwright.sync_api import Page, Route, sync_playwright

from clinic.models import User
from tests.conftest import CHROMIUM, LOCAL

ARGS = [
    "--no-sandbox",
    "--headless",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
PASSWORD = "pass-word-1234"


class Station:
    """One page of a signed-in person, and what the browser complained of."""

    def __init__(self, page: Page, url: str, key: str) -> None:
        self.page, self.url, self.key = page, url, key
        self.told: list[str] = []
        page.on("pageerror", lambda error: self.told.append(str(error)))
        page.on("console", self._said)

    def _said(self, message: object) -> None:
        kind, text = message.type, message.text  # type: ignore[attr-defined]
        # A refused part is a 4xx answer the page handles; the browser logs each as an error.
        if kind == "error" and "Failed to load resource" not in text:
            self.told.append(text)

    def open(self, path: str) -> Page:
        """Open an address of the app."""
        self.page.goto(self.url + path)
        return self.page

    def end_session(self) -> None:
        """End the session on the server, as the idle time does."""
        SessionStore(self.key).delete()


def session_of(user: User) -> str:
    """Return the key of a new session of a person."""
    session = SessionStore()
    session["_auth_user_id"] = str(user.pk)
    session["_auth_user_backend"] = "django.contrib.auth.backends.ModelBackend"
    session["_auth_user_hash"] = user.get_session_auth_hash()
    session["station"] = uuid.uuid4().hex
    session.save()
    return session.session_key or ""


def local_only(route: Route) -> None:
    """Let through what stays on this machine."""
    address = urlsplit(route.request.url)
    if address.scheme in {"blob", "data"} or (address.hostname or "") in LOCAL:
        route.continue_()
    else:
        route.abort()


@contextmanager
def stations(live_server: object, *users: User, width: int = 1280) -> Iterator[list[Station]]:
    """Yield one station a person, each with a session of its own."""
    url = str(live_server.url)  # type: ignore[attr-defined]
    with sync_playwright() as tool:
        browser = tool.chromium.launch(executable_path=CHROMIUM, args=ARGS)
        found = []
        for user in users:
            key = session_of(user)
            context = browser.new_context(viewport={"width": width, "height": 900})
            context.add_cookies([{"name": settings.SESSION_COOKIE_NAME, "value": key, "url": url}])
            context.route("**/*", local_only)
            found.append(Station(context.new_page(), url, key))
        yield found
        browser.close()
