"""The base of every table that only grows."""

from typing import Any

from django.db import models


class AppendOnly(models.Model):
    """A row that is written once. Database triggers refuse UPDATE and DELETE on these tables.

    Personal data: who wrote it and when.
    """

    at = models.DateTimeField()
    by = models.ForeignKey("clinic.User", on_delete=models.PROTECT, related_name="+")

    class Meta:
        abstract = True

    def delete(self, *args: Any, **kwargs: Any) -> tuple[int, dict[str, int]]:
        """Refuse: the log only grows."""
        raise TypeError(f"{type(self).__name__} rows are never deleted.")


class Revision(AppendOnly):
    """One revision of a record; the current one is the highest ``rev`` of its key.

    ``change`` says why there is another revision: the first entry, an addition that only filled
    blanks, a correction that changed a value (with a reason), or a withdrawal (with a reason).
    """

    class Change(models.TextChoices):
        """Kind of change against the revision before."""

        ENTRY = "entry", "entry"
        ADDITION = "addition", "addition"
        CORRECTION = "correction", "correction"
        WITHDRAWN = "withdrawn", "withdrawn"

    rev = models.PositiveIntegerField()
    change = models.CharField(max_length=10, choices=Change, default=Change.ENTRY)
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        abstract = True
