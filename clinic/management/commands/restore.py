"""``manage.py restore``: check a copy, or put a copy of an SQLite database into place."""

import argparse
from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError

from clinic.exchange.backups import BackupRefused, check, restore_into


class Command(BaseCommand):
    """Never overwrites anything."""

    help = (
        "Check that a copy made by backup holds the rows its list names (--check), or check it and "
        "put it at a path where nothing stands yet (--into). A running database is never touched."
    )
    requires_system_checks = []

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Ask for the copy and what to do with it."""
        parser.add_argument("file", type=Path, metavar="FILE", help="the copy itself")
        what = parser.add_mutually_exclusive_group(required=True)
        what.add_argument("--check", action="store_true", help="only check")
        what.add_argument("--into", type=Path, metavar="PATH", help="a new SQLite file")

    def handle(self, *args: Any, **options: Any) -> None:
        """Check, and restore where asked."""
        copy = options["file"]
        try:
            listed = restore_into(copy, options["into"]) if options["into"] else check(copy)
        except BackupRefused as error:
            raise CommandError(str(error)) from error
        rows = sum(table["rows"] for table in listed["tables"].values())
        self.stdout.write(f"{copy} is sound: {rows} rows, made {listed['made']}")
        if options["into"]:
            self.stdout.write(
                f"Put at {options['into']}. It needs the ledger.key and secret.key it was made "
                "with: put them into EBBLINE_HOME, then run migrate and check."
            )
