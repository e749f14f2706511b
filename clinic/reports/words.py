"""Dates and lists as they are written on paper."""

import datetime as dt
from collections.abc import Iterable


def day_words(day: dt.date | None) -> str:
    """Return ``3 Feb 2025``, never numbers with slashes; empty for none."""
    return f"{day.day} {day:%b %Y}" if day else ""


def moment_words(at: dt.datetime) -> str:
    """Return ``3 Feb 2025 16:05``."""
    return f"{day_words(at)} {at:%H:%M}"


def joined(parts: Iterable[str], by: str = " · ") -> str:
    """Return the parts that say something, joined."""
    return by.join(part for part in parts if part)


def rules(count: int) -> str:
    """Return ``limits not reached by 3 rules``."""
    return f"limits not reached by {count} rule{'' if count == 1 else 's'}"
