"""Fields every form shares: ISO dates, decimals with comma or point, errors of the parsers."""

import datetime as dt
import re
from collections.abc import Callable
from typing import Any

from django import forms

from clinic.identifiers import Match, found
from trends.errors import EbblineError
from trends.measures.ranges import ranges


def sentence(error: EbblineError) -> str:
    """Return a refusal as one sentence: the value, the allowed range, why, what to do."""
    parts = [
        f"{error.value!r} can't be taken.",
        f"Allowed: {error.allowed}.",
        error.why,
        error.todo,
    ]
    return " ".join(part.rstrip(".") + "." for part in parts if part)


class ParsedField(forms.CharField):
    """A text that one of the engine's parsers reads; blank is None."""

    def __init__(self, parse: Callable[[str], Any], **kwargs: Any) -> None:
        self.parse = parse
        kwargs.setdefault("required", False)
        super().__init__(**kwargs)

    def clean(self, value: Any) -> Any:
        """Return the parsed value; the parser's refusal becomes the field's error."""
        text = super().clean(value)
        if not text:
            return None
        try:
            return self.parse(text)
        except EbblineError as error:
            raise forms.ValidationError(sentence(error)) from error


def told(match: Match) -> str:
    """Return what was found in a free text, the match shown with the reason."""
    return f"{match.text!r} looks like {match.words}."


class FreeTextField(forms.CharField):
    """A short free text that must hold no identifier of a person.

    What surely is one is refused with the match; ``doubts`` returns what only may be one. A bare
    name can't be caught: say so beside the field.
    """

    def clean(self, value: Any) -> Any:
        """Return the text, or refuse it with what was found."""
        text = super().clean(value)
        for match in found(text or ""):
            if match.blocks:
                raise forms.ValidationError(
                    f"{told(match)} Nothing that identifies a person is kept here, because the "
                    "log is shared in the clinic. Take it out and save again."
                )
        return text

    @staticmethod
    def doubts(text: str) -> list[str]:
        """Return questions about what may be an identifier."""
        return [f"{told(match)} Keep it only if it is none." for match in found(text)]


class IsoDateField(forms.DateField):
    """A date written 2026-03-04 and no other way."""

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("required", False)
        kwargs["input_formats"] = ["%Y-%m-%d"]
        kwargs.setdefault(
            "error_messages",
            {
                "invalid": "Allowed: a date such as 2026-03-04 (year-month-day). "
                "03/04/2026 is two days in two countries. Type it again."
            },
        )
        kwargs["widget"] = forms.TextInput(
            attrs={"inputmode": "numeric", "placeholder": "YYYY-MM-DD", "size": "11"}
        )
        super().__init__(**kwargs)


class ClockField(forms.TimeField):
    """A time written 09:30."""

    def __init__(self, **kwargs: Any) -> None:
        kwargs.setdefault("required", False)
        kwargs["input_formats"] = ["%H:%M"]
        kwargs["error_messages"] = {"invalid": "Allowed: a time such as 09:30. Type it again."}
        kwargs["widget"] = forms.TextInput(attrs={"placeholder": "HH:MM", "size": "6"})
        super().__init__(**kwargs)


def dose_ug(text: str) -> int:
    """Read a dose in mg (comma or point) as whole µg."""
    bounds = ranges("dose_ug")
    plain = text.replace(",", ".").removesuffix("mg").strip()
    if re.fullmatch(r"[0-9]{1,2}(\.[0-9]{1,3})?", plain):
        whole, _, part = plain.partition(".")
        value = int(whole) * 1000 + int(part.ljust(3, "0") or 0)
        if bounds.number("least") <= value <= bounds.number("most"):
            return value
    raise EbblineError("dose", text, bounds.text("allowed"), bounds.text("why"), "Type mg.")


def whole_number(name: str) -> Callable[[str], int]:
    """Return a reader of whole numbers within one of the ranges."""

    def read(text: str) -> int:
        bounds = ranges(name)
        if re.fullmatch(r"[0-9]{1,5}", text):
            value = int(text)
            if bounds.number("least") <= value <= bounds.number("most"):
                return value
        raise EbblineError(name, text, bounds.text("allowed"), bounds.text("why"), "Type it again.")

    return read


def birth_year(today: dt.date) -> Callable[[str], int]:
    """Return a reader of a year of birth of an adult under 90."""

    def read(text: str) -> int:
        bounds = ranges("birth_year")
        least = today.year - bounds.number("oldest_age")
        most = today.year - bounds.number("youngest_age")
        if re.fullmatch(r"[0-9]{4}", text) and least <= int(text) <= most:
            return int(text)
        raise EbblineError(
            "year of birth",
            text,
            f"{least} to {most}; for 90 and over tick the box instead",
            bounds.text("why"),
            "Check the card.",
        )

    return read


def choices(*codes: str, blank: str = "not recorded") -> list[tuple[str, str]]:
    """Return choices with words for codes, blank first."""
    return [("", blank), *((code, code.replace("_", " ")) for code in codes)]
