"""What stands in a form, in words: for pages that show it without letting it be changed."""

from collections.abc import Sequence
from typing import Any

from clinic.forms.sheet.eye import EyeForm

UNTOLD = ("base_rev",)


def told(form: EyeForm, name: str) -> str:
    """Return one field's value as the page shows it: the words of a choice, not its code."""
    field, value = form.fields[name], form[name].value()
    values: Sequence[Any] = value if isinstance(value, list) else [value]
    if isinstance(value, bool) or value == "on":
        return "yes" if value else ""
    named = {str(getattr(key, "value", key)): str(words) for key, words in _choices(field)}
    return ", ".join(named.get(str(one), str(one)) for one in values if one not in (None, ""))


def _choices(field: Any) -> list[tuple[Any, Any]]:
    return list(getattr(field, "choices", []))


def label(form: EyeForm, name: str) -> str:
    """Return a field's label."""
    return str(form[name].label)


def rows(form: EyeForm) -> list[tuple[str, str]]:
    """Return label and words of every field that holds something."""
    pairs = [(label(form, name), told(form, name)) for name in form.fields if name not in UNTOLD]
    return [(name, words) for name, words in pairs if words]
