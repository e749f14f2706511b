"""``manage.py bench``: how fast and how big, each figure beside its goal."""

import argparse
import importlib
import os
import subprocess
import sys
import tempfile
from typing import Any

from django.conf import settings
from django.core.management import call_command
from django.core.management.base import BaseCommand

PARTS = ("engine", "pages", "intake", "server")


class Command(BaseCommand):
    """Run each part in a process and an empty database of its own, never in the clinic's."""

    help = (
        "Print times, memory and ratios, each beside its goal. Every part runs in a process of its "
        "own with an empty database in a folder that is removed afterwards; the clinic's own data "
        "isn't touched. Times depend on the machine and are no test."
    )
    requires_system_checks = []

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Choose parts."""
        parser.add_argument("parts", nargs="*", choices=[[], *PARTS], help=", ".join(PARTS))
        parser.add_argument("--inside", choices=PARTS, help=argparse.SUPPRESS)

    def handle(self, *args: Any, **options: Any) -> None:
        """Run one part here, or all the asked ones each in its own process."""
        if options["inside"]:
            self.measure(options["inside"])
            return
        for part in options["parts"] or PARTS:
            self.stdout.write(f"== {part}")
            self.stdout.flush()
            with tempfile.TemporaryDirectory(prefix="ebbline-bench-") as folder:
                os.chmod(folder, 0o700)
                apart = {k: v for k, v in os.environ.items() if k != "DATABASE_URL"}
                apart |= {"EBBLINE_HOME": folder, "EBBLINE_DEMO": "1"}
                command = [sys.executable, str(settings.BASE_DIR / "manage.py"), "bench"]
                subprocess.run([*command, "--inside", part], env=apart, check=True)  # noqa: S603

    def measure(self, part: str) -> None:
        """Print each figure of one part as it comes."""
        if part != "engine":
            call_command("migrate", verbosity=0, interactive=False)
        module = importlib.import_module(f"clinic.management.bench.{part}")
        for figure in module.figures():
            self.stdout.write(figure.line())
            self.stdout.flush()
