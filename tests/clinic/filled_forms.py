"""The forms of a page, filled in and sent as a browser without scripts would."""

from dataclasses import dataclass, field
from html.parser import HTMLParser
from typing import Any

from django.http import HttpResponse
from django.test import Client


@dataclass
class PageForm:
    """One form of a page: its address, what its fields hold, and the boxes that aren't ticked."""

    action: str
    values: dict[str, list[str]] = field(default_factory=dict)
    boxes: dict[str, list[str]] = field(default_factory=dict)

    def typed(self, **changed: Any) -> dict[str, Any]:
        """Return what would be sent, with some fields typed over (``R_cst`` is R-cst)."""
        named = {
            name.replace("_", "-", 1) if name[1] == "_" else name: value
            for name, value in changed.items()
        }
        unknown = set(named) - set(self.values) - set(self.boxes)
        assert not unknown, f"the form has no {unknown}"
        return {**self.values, **named}

    def ticked(self, ending: str) -> dict[str, list[str]]:
        """Return every unticked box whose name ends so, ticked."""
        return {name: values for name, values in self.boxes.items() if name.endswith(ending)}


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.forms: list[PageForm] = []
        self.inside: PageForm | None = None
        self.select = ""
        self.first: str | None = None
        self.chosen = False

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        at = {name: value or "" for name, value in attrs}
        if tag == "form":
            self.inside = PageForm(at.get("action", ""))
            self.forms.append(self.inside)
        elif self.inside is None:
            return
        elif tag == "input" and at.get("name") and at.get("type") not in ("submit", "button"):
            self._input(at)
        elif tag == "select":
            self.select, self.first, self.chosen = at.get("name", ""), None, False
        elif tag == "option" and self.select:
            self._option(at)

    def _input(self, at: dict[str, str]) -> None:
        assert self.inside is not None
        is_box = at.get("type") in ("checkbox", "radio")
        value = at.get("value", "on" if is_box else "")
        into = self.inside.boxes if is_box and "checked" not in at else self.inside.values
        into.setdefault(at["name"], []).append(value)

    def _option(self, at: dict[str, str]) -> None:
        assert self.inside is not None
        if "selected" in at or self.first is None:
            self.first = at.get("value", "")
            self.inside.values[self.select] = [self.first]

    def handle_endtag(self, tag: str) -> None:
        if tag == "form":
            self.inside = None
        elif tag == "select":
            self.select = ""


def forms_in(answer: HttpResponse) -> list[PageForm]:
    """Return every form of a page."""
    reader = _Reader()
    reader.feed(answer.content.decode())
    return reader.forms


def form_to(answer: HttpResponse, ending: str) -> PageForm:
    """Return the form of a page that is sent to an address with this ending."""
    return next(form for form in forms_in(answer) if form.action.endswith(ending))


def own_form(answer: HttpResponse) -> PageForm:
    """Return the form of a page that is sent to the page's own address."""
    return next(form for form in forms_in(answer) if not form.action)


def words_of(answer: HttpResponse) -> str:
    """Return the text of a page without tags and with single spaces."""
    text: list[str] = []

    class Texts(HTMLParser):
        def handle_data(self, data: str) -> None:
            text.append(data)

    Texts().feed(answer.content.decode())
    return " ".join(" ".join(text).split())


def send(client: Client, form: PageForm, path: str = "", **changed: Any) -> HttpResponse:
    """Send a form with some fields typed over."""
    return client.post(path or form.action, form.typed(**changed))
