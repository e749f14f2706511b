"""Filters of every template: dates, signs and eyes in words."""

import datetime as dt

from django import template
from django.forms import BoundField
from django.urls import reverse

from clinic.selectors.access import Here

register = template.Library()


@register.filter
def day(value: dt.date | None) -> str:
    """Return a date as ``3 Feb 2025``, never as numbers with slashes."""
    return f"{value.day} {value:%b %Y}" if value else ""


@register.filter
def iso(value: dt.date | None) -> str:
    """Return a date as ``2025-02-03``, for forms and addresses."""
    return value.isoformat() if value else ""


NAVIGATION = (
    ("list", "Clinic list"),
    ("awaiting", "Awaiting decision"),
    ("gone_quiet", "Gone quiet"),
    ("contacts", "Contacts"),
    ("enrol", "Enrol"),
    ("limit_set", "Limits"),
    ("sources", "Sources"),
)


@register.filter
def navigation(here: Here) -> list[dict[str, str]]:
    """Return the screens of a site in their order, with address and words."""
    return [
        {"name": name, "words": words, "url": reverse(name, kwargs={"slug": here.site.slug})}
        for name, words in NAVIGATION
    ]


@register.filter
def words(code: str) -> str:
    """Return a stored code as words: ``branch_vein`` is ``branch vein``."""
    return code.replace("_", " ")


@register.filter
def mmhg(tenths: int | None) -> str:
    """Return tenths of mmHg as mmHg."""
    return "" if tenths is None else f"{tenths / 10:g}"


@register.filter
def mg(ug: int | None) -> str:
    """Return thousandths of a mg as mg."""
    return "" if ug is None else f"{ug / 1000:g} mg"


@register.filter
def signed(number: float | None) -> str:
    """Return a change with its sign, a true minus."""
    return "" if number is None else f"{number:+g}".replace("-", "\u2212")


@register.filter
def signed_mmhg(tenths: int | None) -> str:
    """Return a change of tenths of mmHg as mmHg with its sign."""
    return signed(None if tenths is None else tenths / 10)


@register.filter
def questions(field: BoundField) -> list[str]:
    """Return the questions about an unlikely value of a field that aren't settled."""
    return list(getattr(field.form, "asked", {}).get(field.name, []))


@register.filter
def kept(field: BoundField) -> list[str]:
    """Return the questions that were answered with "it is meant"."""
    return list(getattr(field.form, "kept", {}).get(field.name, []))
