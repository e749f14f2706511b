"""The append-only ledger: chained entries, chain heads and daily seals."""

from django.db import models


class Chain(models.Model):
    """The head of one chain (``patient:CODE``, ``site:SLUG`` or ``system``): its newest entry.

    A missing row means the chain has no entry yet. The only ledger row that changes.
    Personal data: none beyond the code.
    """

    name = models.CharField(max_length=60, unique=True)
    seq = models.PositiveIntegerField(default=0)
    digest = models.CharField(max_length=64, blank=True)

    def __str__(self) -> str:
        return f"{self.name} at {self.seq}"


class Entry(models.Model):
    """One thing somebody did, chained to the entry before by an HMAC.

    ``payload`` holds digests of the rows written, never clinical values. Personal data: who, when.
    """

    chain = models.ForeignKey(Chain, on_delete=models.PROTECT, related_name="entries")
    seq = models.PositiveIntegerField()
    at = models.DateTimeField()
    by = models.ForeignKey(
        "clinic.User", null=True, blank=True, on_delete=models.PROTECT, related_name="+"
    )
    action = models.CharField(max_length=40)
    subject = models.CharField(max_length=80, blank=True)
    payload = models.JSONField(default=dict)
    key_id = models.CharField(max_length=16)
    previous = models.CharField(max_length=64, blank=True)
    digest = models.CharField(max_length=64)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["chain", "seq"], name="entry_seq_once_a_chain"),
        ]
        indexes = [models.Index(fields=["at"])]

    def __str__(self) -> str:
        return f"{self.chain.name} {self.seq} {self.action}"


class Seal(models.Model):
    """The seal of one day over all chain heads, made in the first write of a later day.

    No row means the day isn't sealed yet. Personal data: none.
    """

    day = models.DateField(unique=True)
    heads = models.PositiveIntegerField()
    key_id = models.CharField(max_length=16)
    digest = models.CharField(max_length=64)
    at = models.DateTimeField()

    def __str__(self) -> str:
        return f"{self.day.isoformat()} {self.digest[:12]}"
