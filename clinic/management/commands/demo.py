"""``manage.py demo``: an invented clinic on this machine, with one command."""

import argparse
import secrets
from typing import Any

from django.core.management import call_command
from django.core.management.base import BaseCommand, CommandError
from django.db import connection, transaction
from django.db.migrations.executor import MigrationExecutor
from django.utils import timezone

from clinic import serving
from clinic.models import Membership, Site, User
from clinic.services.accounts import demo_passwords_renewed

# Plain letters and digits without look-alikes: the password is typed from a terminal.
ALPHABET = "abcdefghjkmnpqrstuvwxyz23456789"


def one_time_password() -> str:
    """Return a random password of four groups, about 79 bits."""
    return "-".join("".join(secrets.choice(ALPHABET) for _ in range(4)) for _ in range(4))


class Command(BaseCommand):
    """Make the database, load the invented demo once, print passwords, serve."""

    help = (
        "Start Ebbline with an invented clinic on this machine. The first start loads the demo and "
        "prints a random password for one person of each role; later starts keep all data."
    )
    requires_system_checks = []

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Offer new passwords, loading without serving, and another port."""
        parser.add_argument(
            "--new-passwords", action="store_true", help="give the demo people new passwords"
        )
        parser.add_argument("--no-serve", action="store_true", help="prepare everything, then stop")
        parser.add_argument("--port", type=int, default=8000, help="port on 127.0.0.1 (8000)")

    def handle(self, *args: Any, **options: Any) -> None:
        """Run the steps in order; each says what to do when it can't."""
        port = options["port"]
        if not 1024 <= port <= 65535:
            raise CommandError(f"--port is {port}; allowed: 1024 to 65535. Choose one of those.")
        if not options["no_serve"] and not serving.port_is_free(port):
            raise CommandError(
                f"Port {port} on 127.0.0.1 is taken, perhaps by another Ebbline. Stop that one, "
                f"or choose another port: python3 manage.py demo --port {port + 1}"
            )
        self.migrate()
        fresh = self.load()
        if fresh or options["new_passwords"]:
            self.print_passwords()
        elif not options["no_serve"]:
            self.stdout.write("Demo data kept. Forgot a password? Start with --new-passwords.")
        if not options["no_serve"]:
            self.stdout.write(
                f"Ebbline is at http://127.0.0.1:{port}/ (stop with Ctrl+C). All people in it "
                "are invented."
            )
            self.stdout.flush()
            connection.close()
            serving.serve(port)

    def migrate(self) -> None:
        """Bring the tables up to date, only when they aren't."""
        executor = MigrationExecutor(connection)
        if executor.migration_plan(executor.loader.graph.leaf_nodes()):
            self.stdout.write("Preparing the database ...")
            call_command("migrate", verbosity=0, interactive=False)

    def load(self) -> bool:
        """Load the invented clinic into an empty database; True if it was loaded now."""
        if Site.objects.filter(is_demo=True).exists():
            if Site.objects.filter(is_demo=False).exists():
                raise CommandError(
                    "This database holds a clinic that isn't the demo. The demo never mixes with "
                    "other people: set EBBLINE_HOME to another folder and start it there."
                )
            return False
        if Site.objects.exists() or User.objects.exists():
            raise CommandError(
                "This database holds people who aren't the demo's; the demo isn't loaded into it. "
                "Set EBBLINE_HOME to another folder and start the demo there."
            )
        from clinic.exchange.demo.load import demo_load

        self.stdout.write("Loading an invented clinic ...")
        demo_load(today=timezone.localdate(), at=timezone.now())
        return True

    def print_passwords(self) -> None:
        """Give each demo person a new random password and print it once."""
        people = (
            User.objects.filter(memberships__site__is_demo=True).distinct().order_by("username")
        )
        rows = []
        with transaction.atomic():
            for person in people:
                password = one_time_password()
                person.set_password(password)
                person.save(update_fields=["password"])
                roles = Membership.objects.filter(user=person, active=True)
                shown = ", ".join(sorted({one.get_role_display() for one in roles}))
                rows.append(f"  {person.username:<12} {password}   {shown}")
            demo_passwords_renewed(at=timezone.now())
        self.stdout.write("Sign in as one of these invented people (shown once):")
        self.stdout.write("\n".join(rows))
