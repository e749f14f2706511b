"""``manage.py intake``: bring in past visits from a CSV or Excel file, all or nothing."""

import argparse
import datetime as dt
import time
from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from clinic.exchange.intake.account import write_fates, write_refused
from clinic.exchange.intake.keys import read_keys
from clinic.exchange.intake.mapping import HELP, read_mapping
from clinic.exchange.intake.plan import IntakePlan, plan_intake
from clinic.exchange.intake.refused import CellsRefused, IntakeRefused, RefusedCell
from clinic.exchange.intake.source import read_source
from clinic.exchange.intake.take_in import (
    known_patients,
    recover_keys,
    refuse_twice,
    take_in,
)
from clinic.local import home
from clinic.models import Membership, Site, User
from clinic.notice import NOTICE

SHOWN_CELLS = 20
REFUSED_EXIT = 2


def iso_day(text: str) -> dt.date:
    """Return a date typed as YYYY-MM-DD."""
    try:
        return dt.date.fromisoformat(text)
    except ValueError as problem:
        raise argparse.ArgumentTypeError(f"{text!r} is no date as YYYY-MM-DD") from problem


class Command(BaseCommand):
    """Read, check, show each row's fate, store; with --dry-run stop before storing."""

    help = (
        "Bring in past visits from a CSV or Excel file. Every cell is checked before anything is "
        "stored; a refused cell is named with row, column, value, what is allowed and why.\n\n"
    ) + HELP

    def create_parser(self, prog_name: str, subcommand: str, **kwargs: Any) -> Any:
        """Keep the line breaks of the mapping's description in ``--help``."""
        kwargs.setdefault("formatter_class", argparse.RawDescriptionHelpFormatter)
        return super().create_parser(prog_name, subcommand, **kwargs)

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Take the file, the site, the mapping and what goes with them."""
        parser.add_argument("file", type=Path, help="CSV or Excel (.xlsx) file of past visits")
        parser.add_argument("--site", required=True, help="short name of the site")
        parser.add_argument("--mapping", required=True, type=Path, help="mapping (TOML)")
        parser.add_argument("--day-zero", type=iso_day, help="date of day 0 (YYYY-MM-DD)")
        parser.add_argument(
            "--keys", type=Path, help="key file: read if it exists, new people are added to it"
        )
        parser.add_argument("--account", type=Path, help="where the CSV accounts go (a folder)")
        parser.add_argument("--by", help="sign-in name of the steward who takes the file in")
        parser.add_argument("--dry-run", action="store_true", help="show the fates, store nothing")

    def handle(self, *args: Any, **options: Any) -> None:
        """Run the steps; a refusal ends with exit code 2 and nothing stored."""
        try:
            self.take(options)
        except CellsRefused as refused:
            self.refuse_cells(refused.cells, options)
        except IntakeRefused as refused:
            raise CommandError(str(refused), returncode=REFUSED_EXIT) from refused

    def take(self, options: dict[str, Any]) -> None:
        """Plan and, unless it is a dry run, store."""
        started = time.monotonic()
        site, by = self.site(options["site"]), self.steward(options["site"], options["by"])
        path, mapping = self.existing(options["file"]), read_mapping(options["mapping"])
        source = read_source(path, mapping.sheet)
        self.say(f"Read {len(source.cells):,} rows ({source.read_as}).")
        key_path = options["keys"] or home() / "keys" / f"{site.slug}-{source.sha256[:12]}.csv"
        if recovered := recover_keys(site, key_path):
            self.say(recovered)
        refuse_twice(site, source.sha256)
        keys = read_keys(key_path) if key_path.exists() else {}
        plan = plan_intake(
            source,
            mapping,
            day_zero=options["day_zero"],
            known=known_patients(site, keys),
            today=timezone.localdate(),
        )
        self.say(f"Checked every cell ({time.monotonic() - started:.1f} s).")
        self.report(plan, options)
        if options["dry_run"]:
            self.say("Dry run: nothing was stored.")
            return
        stored = take_in(
            plan,
            site=site,
            keys=keys,
            key_path=key_path,
            label=mapping.about or path.name,
            by=by,
            at=timezone.now(),
            today=timezone.localdate(),
        )
        self.say(
            f"Stored {plan.visits:,} eye-visits of {plan.eyes:,} eyes, "
            f"{len(stored.patients):,} people ({time.monotonic() - started:.1f} s)."
        )
        self.say(f"Key file (who is who; keep it safe): {key_path}")
        self.say(NOTICE)

    def report(self, plan: IntakePlan, options: dict[str, Any]) -> None:
        """Say what would be stored, left out, asked and assumed; write the accounts."""
        left = len(plan.fates) - plan.visits
        self.say(f"Rows to store: {plan.visits:,}; left out: {left:,}.")
        if plan.not_taken:
            self.say("Columns that are not stored: " + ", ".join(plan.not_taken) + ".")
        for sentence, count in plan.asked:
            self.say(f"  {count:,} rows: {sentence}")
        for sentence in plan.assumed:
            self.say(f"Assumed: {sentence}")
        folder = self.account_folder(options, plan.source.sha256)
        write_fates(folder / "rows.csv", plan.fates)
        write_refused(folder / "refused.csv", plan.refused)
        self.say(f"Each row's fate and every refused cell: {folder}")

    def refuse_cells(self, cells: list[RefusedCell], options: dict[str, Any]) -> None:
        """Name the refused cells and end with exit code 2."""
        folder = self.account_folder(options, options["file"].stem)
        write_refused(folder / "refused.csv", cells)
        for cell in cells[:SHOWN_CELLS]:
            self.stderr.write(cell.sentence())
        raise CommandError(
            f"{len(cells)} cells refused; nothing was stored. All of them: {folder}/refused.csv. "
            'Correct them, or write [refused] then = "leave_out" into the mapping to leave out '
            "their rows.",
            returncode=REFUSED_EXIT,
        )

    def account_folder(self, options: dict[str, Any], name: str) -> Path:
        """Return the folder of the accounts."""
        folder: Path = options["account"] or home() / "intake" / name[:40]
        return folder

    def existing(self, path: Path) -> Path:
        """Return a file that exists."""
        if not path.is_file():
            raise IntakeRefused("file", path, "a file", "There is none by that name.", "")
        return path

    def site(self, slug: str) -> Site:
        """Return the site by its short name."""
        site = Site.objects.filter(slug=slug).first()
        if site is None:
            known = ", ".join(Site.objects.order_by("slug").values_list("slug", flat=True))
            raise IntakeRefused("--site", slug, known or "no site yet", "No such site.", "")
        return site

    def steward(self, slug: str, username: str | None) -> User:
        """Return the steward who takes the file in: the one named, or the only one there is."""
        found = User.objects.filter(
            memberships__site__slug=slug,
            memberships__role=Membership.Role.STEWARD,
            memberships__active=True,
        ).order_by("username")
        people = [user for user in found if username in (None, user.username)]
        if len(people) != 1:
            names = ", ".join(user.username for user in found) or "none"
            raise IntakeRefused(
                "--by",
                username or "not given",
                f"one steward of the site ({names})",
                "The log keeps who took a file in.",
                "Name one with --by.",
            )
        return people[0]

    def say(self, line: str) -> None:
        """Print one progress line at once."""
        self.stdout.write(line)
        self.stdout.flush()
