"""People who sign in, and their roles at sites."""

from django.contrib.auth.models import AbstractUser
from django.db import models

from clinic.models.sites import Site


class User(AbstractUser):
    """One person who signs in. A missing row means nobody by that name may sign in.

    Personal data: a sign-in name and a display name of staff, never of patients.
    """

    display_name = models.CharField(max_length=60, blank=True)

    def __str__(self) -> str:
        return self.display_name or self.username


class Membership(models.Model):
    """One role of one person at one site; a person may hold several.

    A missing row means the site doesn't exist for that person (404). Personal data: staff only.
    """

    class Role(models.TextChoices):
        """What a person may do at a site."""

        RECORDER = "recorder", "Recorder"
        CLINICIAN = "clinician", "Clinician"
        STEWARD = "steward", "Steward"
        READER = "reader", "Reader"

    user = models.ForeignKey(User, on_delete=models.PROTECT, related_name="memberships")
    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="memberships")
    role = models.CharField(max_length=10, choices=Role)
    active = models.BooleanField(default=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["user", "site", "role"], name="membership_once"),
            models.CheckConstraint(
                condition=models.Q(role__in=["recorder", "clinician", "steward", "reader"]),
                name="membership_role_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.user} {self.get_role_display()} at {self.site}"
