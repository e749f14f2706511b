"""Filters of every template: dates, signs and eyes in words."""

import datetime as dt

from django import template

register = template.Library()


@register.filter
def day(value: dt.date | None) -> str:
    """Return a date as ``3 Feb 2025``, never as numbers with slashes."""
    return f"{value.day} {value:%b %Y}" if value else ""


@register.filter
def iso(value: dt.date | None) -> str:
    """Return a date as ``2025-02-03``, for forms and addresses."""
    return value.isoformat() if value else ""
