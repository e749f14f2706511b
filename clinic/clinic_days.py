"""Which days have a clinic: the site's weekdays, changed by exceptions."""

import datetime as dt
from collections.abc import Mapping

from clinic.models import ClinicDay, Site

LOOK_AHEAD_DAYS = 400


def exceptions(site: Site) -> dict[dt.date, str]:
    """Return the newest state of every day with an exception or a closing."""
    rows = ClinicDay.objects.filter(site=site).order_by("seq").values_list("day", "state")
    return dict(rows)


def closed_days(site: Site) -> set[dt.date]:
    """Return the days that were closed in the evening and not opened again."""
    return {day for day, state in exceptions(site).items() if state == ClinicDay.State.CLOSED}


def weekdays(site: Site) -> set[int]:
    """Return the weekdays with a clinic, 0 = Monday."""
    return {int(part) for part in site.clinic_weekdays.split(",") if part.strip().isdigit()}


def is_clinic_day(site: Site, day: dt.date, said: Mapping[dt.date, str]) -> bool:
    """Say whether a day has a clinic."""
    state = said.get(day)
    if state == ClinicDay.State.CANCELLED:
        return False
    return state is not None or day.weekday() in weekdays(site)


def next_clinic_day(site: Site, after: dt.date, said: Mapping[dt.date, str]) -> dt.date | None:
    """Return the first clinic day after a day, or None within a year."""
    for ahead in range(1, LOOK_AHEAD_DAYS):
        day = after + dt.timedelta(days=ahead)
        if is_clinic_day(site, day, said):
            return day
    return None


def default_day(site: Site, today: dt.date) -> dt.date:
    """Return today while it is a clinic day and not closed, else the next clinic day."""
    said = exceptions(site)
    if is_clinic_day(site, today, said) and said.get(today) != ClinicDay.State.CLOSED:
        return today
    return next_clinic_day(site, today, said) or today


def last_ended_day(today: dt.date, said: Mapping[dt.date, str]) -> dt.date:
    """Return the last day that is over: yesterday, or today once it was closed.

    Standing rules are asked as of the end of a day: before that nobody failed to come.
    """
    closed = said.get(today) == ClinicDay.State.CLOSED
    return today if closed else today - dt.timedelta(days=1)
