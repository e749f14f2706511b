"""Parts of addresses: a day in ISO form, nothing else."""

import datetime as dt

from django.urls import register_converter


class IsoDay:
    """A date in an address: 2026-03-04 and nothing else."""

    regex = r"\d{4}-\d{2}-\d{2}"

    def to_python(self, text: str) -> dt.date:
        """Return the date; an impossible one is no address."""
        return dt.date.fromisoformat(text)

    def to_url(self, day: dt.date | str) -> str:
        """Return ISO text."""
        return day if isinstance(day, str) else day.isoformat()


register_converter(IsoDay, "day")
