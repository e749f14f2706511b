"""What the form of every part shares: one eye, the revision it was opened on, kept doubts.

``part()`` returns what is to be stored; ``asked`` holds questions about unlikely values, by field.
Each is asked once: it is settled when its own words come back ticked, so another value asks anew.
"""

import datetime as dt
from typing import Any

from django import forms

from clinic.forms.fields import FreeTextField
from clinic.models import Site
from clinic.services.parts import EyePart

NOTE_HINT = "No names, dates or numbers of persons; a bare name can't be caught."
TEXT = forms.TextInput


class EyeForm(forms.Form):
    """One eye of a part; its prefix is the side."""

    base_rev = forms.IntegerField(widget=forms.HiddenInput, required=False, min_value=0)
    note = FreeTextField(
        required=False, max_length=280, widget=TEXT(attrs={"class": "wide"}), help_text=NOTE_HINT
    )

    # Facts of the station that carry over; alone they are no measurement.
    station: tuple[str, ...] = ()
    # Fields that belong to one value: of two versions they are taken from one, never mixed.
    groups: tuple[tuple[str, ...], ...] = ()

    def __init__(self, *args: Any, site: Site, day: dt.date, **kwargs: Any) -> None:
        self.site, self.day = site, day
        self.asked: dict[str, list[str]] = {}
        self.kept: dict[str, list[str]] = {}
        kwargs.setdefault("use_required_attribute", False)
        super().__init__(*args, **kwargs)
        answers: Any = getattr(self.data, "getlist", lambda _name: [])
        self._answered = set(answers(f"{self.prefix}-keep"))
        for name in self.station:
            self.fields[name].widget.attrs["data-station"] = ""

    def ask(self, name: str, question: str) -> None:
        """Question an unlikely value once, beside its field."""
        found = self.kept if question in self._answered else self.asked
        found.setdefault(name, []).append(question)

    def clean(self) -> dict[str, Any]:
        """Ask about free texts that may hold an identifier."""
        data = super().clean() or self.cleaned_data
        for name, field in self.fields.items():
            if isinstance(field, FreeTextField):
                for question in field.doubts(data.get(name) or ""):
                    self.ask(name, question)
        return data

    @property
    def is_blank(self) -> bool:
        """Say whether nothing was typed for this eye."""
        ignored = {"base_rev", *self.station}
        return not any(
            value not in (None, "", [], False)
            for name, value in self.cleaned_data.items()
            if name not in ignored
        )

    def values(self) -> dict[str, Any]:
        """Return the model's column values."""
        raise TypeError("each part says its own values")

    def children(self) -> dict[str, list[dict[str, Any]]]:
        """Return the values of child rows."""
        return {}

    def booking(self) -> dict[str, Any]:
        """Return booked day and time, for the next part."""
        return {}

    def part(self) -> EyePart:
        """Return what is to be stored for this eye."""
        return EyePart(
            values=self.values(),
            base_rev=self.cleaned_data.get("base_rev") or 0,
            children=self.children(),
            note=self.cleaned_data.get("note", ""),
            booking=self.booking(),
        )
