"""Unsaved typing: how a draft comes in, and how it is put back into the sheet as it was typed."""

import json
from collections.abc import Mapping
from typing import Any

from django import forms

from clinic.forms.sheet.eye import EyeForm

MOST_FIELDS = 200
LONGEST_TEXT = 300
Payload = Mapping[str, list[str]]


def read_payload(text: str) -> dict[str, list[str]] | None:
    """Return field names with what was typed in them; None when it isn't of that shape."""
    try:
        found = json.loads(text)
    except json.JSONDecodeError:
        return None
    if not isinstance(found, dict) or len(found) > MOST_FIELDS:
        return None
    for values in found.values():
        if not isinstance(values, list) or not all(_is_text(value) for value in values):
            return None
    return found


def _is_text(value: object) -> bool:
    return isinstance(value, str) and len(value) <= LONGEST_TEXT


def put_back(form: type[EyeForm], side: str, payload: Payload) -> dict[str, Any]:
    """Return a form's first values from a draft; a box that wasn't ticked is unticked again."""
    found: dict[str, Any] = {}
    for name, field in form.base_fields.items():
        values = payload.get(f"{side}-{name}", [])
        if isinstance(field, forms.MultipleChoiceField):
            found[name] = list(values)
        elif isinstance(field, forms.BooleanField):
            found[name] = bool(values)
        else:
            found[name] = values[0] if values else ""
    return found
