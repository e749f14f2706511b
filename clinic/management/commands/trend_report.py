"""``manage.py trend_report``: the printed trend report of one or more people, as one PDF."""

import argparse
from pathlib import Path
from typing import Any

from django.core.management.base import BaseCommand, CommandError
from django.utils import timezone

from clinic import codes
from clinic.models import Patient, Site
from clinic.selectors.report_content import report_content
from clinic.services.prints import report_printed

BAD_INPUT = 2
PRINTED_BY = "command line"


class Command(BaseCommand):
    """Print trend reports to a file."""

    help = (
        "Write the trend report of one or more people as one PDF, a bookmark each, in the order "
        "given. Each print is noted in the ledger. Example: "
        "python manage.py trend_report 7K2M9QX4AB --out report.pdf"
    )

    def add_arguments(self, parser: argparse.ArgumentParser) -> None:
        """Take codes, the file, and another paper than the site's."""
        parser.add_argument(
            "codes", nargs="+", metavar="CODE", help="patient codes, ten characters"
        )
        parser.add_argument(
            "--out", required=True, type=Path, metavar="FILE.pdf", help="file to write"
        )
        parser.add_argument(
            "--paper",
            choices=[paper.value for paper in Site.Paper],
            help="paper (otherwise the paper of the first person's site)",
        )

    def handle(self, *args: Any, **options: Any) -> None:
        """Find everybody first, then print; nothing is written when a code is wrong."""
        from clinic.reports import trend

        patients = [self.patient(typed) for typed in dict.fromkeys(options["codes"])]
        out: Path = options["out"]
        if not out.parent.is_dir():
            raise CommandError(
                f"--out is {out}: the folder {out.parent} does not exist. Make it, or choose "
                "another.",
                returncode=BAD_INPUT,
            )
        at = timezone.now()
        report_printed(patients=patients, by=None, at=at)
        reports = [report_content(patient, printed_by=PRINTED_BY, at=at) for patient in patients]
        made = trend.render(reports, options["paper"] or patients[0].site.paper)
        try:
            out.write_bytes(made)
        except OSError as error:
            raise CommandError(f"{out} can't be written: {error.strerror}.") from error
        self.stdout.write(
            f"{out}: {len(reports)} report{'s'[: len(reports) != 1]}, {len(made)} bytes."
        )

    @staticmethod
    def patient(typed: str) -> Patient:
        """Return one patient, or say which code is wrong and how."""
        try:
            code = codes.normalise(typed)
        except codes.CodeMistyped as error:
            raise CommandError(str(error), returncode=BAD_INPUT) from error
        found = Patient.objects.filter(code=code).select_related("site").first()
        if found is None:
            raise CommandError(
                f"The code {code} is well formed, but nobody is enrolled under it here. "
                "Compare it with the card, or check that this is the right database.",
                returncode=BAD_INPUT,
            )
        return found
