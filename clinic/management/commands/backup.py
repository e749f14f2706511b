"""``manage.py backup --to DIR``: one checked copy of the whole database while others write."""

import argparse
import json
from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from clinic.exchange.backups import BackupRefused, backup, list_of


class Command(BaseCommand):
    """Copy, check, count and digest in one step."""

    help = (
        "Write a copy of the whole database into a folder while others go on working, check it, "
        "and write a list of its tables with counts and digests beside it. The keys (ledger.key, "
        "secret.key) and key files are not in it: keep them apart. What it holds is pseudonymous "
        "health data: encrypt the folder."
    )

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Ask for the folder."""
        parser.add_argument("--to", type=Path, required=True, metavar="DIR", help="made if absent")

    def handle(self, *args: Any, **options: Any) -> None:
        """Make one copy and say what is in it."""
        try:
            copy = backup(options["to"], at=timezone.now())
        except BackupRefused as error:
            raise CommandError(str(error)) from error
        listed = json.loads(list_of(copy).read_text(encoding="utf-8"))
        rows = sum(table["rows"] for table in listed["tables"].values())
        self.stdout.write(f"{copy}: {rows} rows in {len(listed['tables'])} tables")
        self.stdout.write(f"SHA-256 {listed['sha256']}")
        seal = listed["seal"]
        sealed = f"{seal['digest'][:12]} of {seal['day']}" if seal else "none yet"
        self.stdout.write(f"ledger seal {sealed}; check with: restore --check {copy}")
