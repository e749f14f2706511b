"""Plans: when an eye is due, when it is booked, what is planned, and whether they came."""

from django.db import models

from clinic.models.append_only import AppendOnly
from clinic.models.patients import Eye


class Plan(AppendOnly):
    """One plan of an eye; the newest row (highest ``seq``) counts. No row means no plan.

    Lateness counts from the first due day after the last attended visit: rebooking never resets
    it. ``attendance`` says what became of the booking of the row before. Personal data: dates.
    """

    class Attendance(models.TextChoices):
        """What became of the earlier booking."""

        NONE = "", "not said"
        CAME = "came", "came"
        DID_NOT_COME = "did_not_come", "did not come"
        BY_PATIENT = "cancelled_by_patient", "cancelled by the patient"
        BY_CLINIC = "cancelled_by_clinic", "cancelled by the clinic"
        MOVED = "moved", "moved"

    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="plans")
    seq = models.PositiveIntegerField()
    due_day = models.DateField(null=True, blank=True)
    booked_day = models.DateField(null=True, blank=True)
    booked_time = models.TimeField(null=True, blank=True)
    planned_agent = models.CharField(max_length=40, blank=True)
    planned_dose_ug = models.PositiveIntegerField(null=True, blank=True)
    check_only = models.BooleanField(default=False)
    attendance = models.CharField(max_length=22, choices=Attendance, blank=True, default="")
    set_at_visit = models.ForeignKey(
        "clinic.Visit", null=True, blank=True, on_delete=models.PROTECT, related_name="plans"
    )
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["eye", "seq"], name="plan_seq_once"),
            models.CheckConstraint(
                condition=models.Q(
                    attendance__in=[
                        "",
                        "came",
                        "did_not_come",
                        "cancelled_by_patient",
                        "cancelled_by_clinic",
                        "moved",
                    ]
                ),
                name="plan_attendance_known",
            ),
        ]
        indexes = [models.Index(fields=["booked_day"]), models.Index(fields=["due_day"])]

    def __str__(self) -> str:
        return f"{self.eye} due {self.due_day} booked {self.booked_day}"
