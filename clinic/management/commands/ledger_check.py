"""``manage.py ledger_check``: does the ledger tie together, is the log still what was recorded."""

from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from clinic.models import Seal
from clinic.services.ledger_check import State, check

SHOWN = 20
BLIND = (
    "What this can't see: the newest entries of a chain cut off together with its head (compare "
    "the seal on a report or backup); a log and ledger replaced as a whole by somebody who holds "
    "the key; rows taken in by file (one digest a person is kept, not one a row); and whatever was "
    "never written. Tamper-evident, not tamper-proof."
)


class Command(BaseCommand):
    """Exit 1 and name the first broken link of each chain."""

    help = (
        "Walk every chain of the ledger, name the first broken link of each, and compare each "
        "recorded row with the log. Reads only. Exit 1 if anything doesn't hold. " + BLIND
    )
    requires_system_checks = []

    def handle(self, *args: Any, **options: Any) -> None:
        """Check, say what was found and what a check can't see."""
        start = timezone.now()
        state = check()
        self._say(state)
        seconds = (timezone.now() - start).total_seconds()
        self.stdout.write(f"{BLIND} ({seconds:.1f} s)")
        if state.broken:
            raise CommandError(f"{len(state.broken)} places don't hold.")

    def _say(self, state: State) -> None:
        self.stdout.write(
            f"{state.chains} chains, {state.entries} entries hold; {state.rows} rows compared."
        )
        for one in state.broken[:SHOWN]:
            self.stdout.write(f"BROKEN  {one}")
        if len(state.broken) > SHOWN:
            self.stdout.write(f"and {len(state.broken) - SHOWN} more")
        seal = Seal.objects.order_by("-day").first()
        self.stdout.write(f"Newest seal: {seal}" if seal else "No day is sealed yet.")
