"""Limit sets as immutable text, and their adoption by a site for a cause."""

from django.db import models

from clinic.models.append_only import AppendOnly
from clinic.models.sites import Site


class LimitSetText(models.Model):
    """One immutable limit set: canonical TOML and its SHA-256. Shipped files only seed this table.

    A missing row means the set is unknown here. Personal data: none.
    """

    digest = models.CharField(max_length=64, unique=True)
    name = models.CharField(max_length=40)
    version = models.CharField(max_length=20)
    text = models.TextField()
    at = models.DateTimeField()

    def __str__(self) -> str:
        return f"{self.name} {self.version}"


class Adoption(AppendOnly):
    """A site's proposal to use a limit set for a cause (``by`` proposes).

    ``cause`` empty means every cause the set names. Personal data: staff only.
    """

    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="adoptions")
    limit_set = models.ForeignKey(LimitSetText, on_delete=models.PROTECT, related_name="+")
    cause = models.CharField(max_length=14, blank=True)
    seq = models.PositiveIntegerField()

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["site", "seq"], name="adoption_seq_once"),
        ]

    def __str__(self) -> str:
        return f"{self.site} proposes {self.limit_set}"


class AdoptionConfirmed(AppendOnly):
    """A clinician's confirmation, from an own account, that the set matches the local protocol.

    ``ticked`` lists the entries "from memory" that were checked against the original. The newest
    confirmed adoption counts. No row means the proposal isn't in force. Personal data: staff only.
    """

    adoption = models.OneToOneField(Adoption, on_delete=models.PROTECT, related_name="confirmation")
    ticked = models.JSONField(default=list)

    def __str__(self) -> str:
        return f"{self.adoption} confirmed"
