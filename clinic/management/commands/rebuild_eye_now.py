"""``manage.py rebuild_eye_now``: make the projection from the log anew, and prove it equal."""

import argparse
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.db import transaction

from clinic.models import Patient
from clinic.services.projection import BATCH, differing, eye_now_refresh


class Command(BaseCommand):
    """Compare each eye's projection with the log; rebuild it unless only checking."""

    help = "Rebuild every eye's current projection from the log and say which differed."

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Offer a check without writing."""
        parser.add_argument(
            "--check", action="store_true", help="only compare; exit 1 if any differs"
        )

    def handle(self, *args: Any, **options: Any) -> None:
        """Walk all patients in batches."""
        patients = list(Patient.objects.order_by("pk"))
        wrong: list[int] = []
        for start in range(0, len(patients), BATCH):
            some = patients[start : start + BATCH]
            wrong += differing(some)
            if not options["check"]:
                with transaction.atomic():
                    eye_now_refresh(patients=some)
        if wrong and options["check"]:
            raise CommandError(f"{len(wrong)} eyes differ from the log. Run it without --check.")
        self.stdout.write(f"{len(patients)} patients; {len(wrong)} eyes differed from the log.")
