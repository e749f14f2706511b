"""``manage.py clinic_list``: a day's list as text, CSV or JSON, with the notice."""

import argparse
import datetime as dt
import json
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from clinic.exchange.day_list import as_patients, text_lines, write_csv
from clinic.models import Site, User
from clinic.selectors.access import READER, Here
from clinic.selectors.clinic_list import clinic_list

FORMATS = ("text", "csv", "json")
REFUSED_EXIT = 2


class Command(BaseCommand):
    """Print the clinic list of one day, in the order of the page."""

    help = (
        "Print the clinic list of one day. JSON: a list of patients with their eyes; CSV: one row "
        "an eye, safe to open in a spreadsheet. Nothing raised is no promise: the counts of "
        "limits not reached and of rules that couldn't tell stand beside it."
    )

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Take site, day and format."""
        parser.add_argument("--site", required=True, help="short name of the site")
        parser.add_argument("--on", help="day as YYYY-MM-DD (today)")
        parser.add_argument("--format", choices=FORMATS, default="text", help="text, csv or json")

    def handle(self, *args: Any, **options: Any) -> None:
        """Print the list."""
        site = Site.objects.filter(slug=options["site"]).first()
        if site is None:
            known = ", ".join(Site.objects.order_by("slug").values_list("slug", flat=True))
            raise CommandError(
                f"--site is {options['site']}; allowed: {known or 'no site yet'}.",
                returncode=REFUSED_EXIT,
            )
        today = timezone.localdate()
        here = Here(site, User(), frozenset({READER}))
        found = clinic_list(here, self.day(options["on"], today), today)
        if options["format"] == "json":
            text = json.dumps(as_patients(found, site), indent=2, ensure_ascii=False)
            self.stdout.write(text)
        elif options["format"] == "csv":
            write_csv(self.stdout, found, site)  # type: ignore[arg-type]
        else:
            self.stdout.write("\n".join(text_lines(found, site)))

    def day(self, typed: str | None, today: dt.date) -> dt.date:
        """Return the day asked for; refuse anything but an ISO date."""
        if typed is None:
            return today
        try:
            return dt.date.fromisoformat(typed)
        except ValueError as problem:
            raise CommandError(
                f"--on is {typed}; allowed: a date as YYYY-MM-DD, because 03/04/2026 is two days "
                "in two countries.",
                returncode=REFUSED_EXIT,
            ) from problem
