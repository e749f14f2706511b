"""Files taken in."""

from django.db import models

from clinic.models.append_only import AppendOnly
from clinic.models.sites import Site

OWN_CALENDAR = "each eye counts from its own first visit: the two eyes' dates don't match"
"""Taken for granted of a file with a day 0 an eye: no rule compares its two eyes by day."""


class IntakeFile(AppendOnly):
    """One file of past visits that was taken in, whole. The same file is refused a second time.

    A missing row means the file was never taken in. Personal data: none; the file isn't kept.
    """

    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="intake_files")
    sha256 = models.CharField(max_length=64)
    label = models.CharField(max_length=80, blank=True)
    rows = models.PositiveIntegerField()
    visits_stored = models.PositiveIntegerField()
    cells_refused = models.PositiveIntegerField()
    assumed = models.JSONField(default=list)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["site", "sha256"], name="intake_file_once_a_site"),
        ]

    def __str__(self) -> str:
        return f"{self.label or self.sha256[:12]}"
