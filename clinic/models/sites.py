"""Sites, their scanners and their clinic days."""

from django.db import models


class Site(models.Model):
    """One clinic. A missing row means the clinic doesn't exist for anybody.

    Personal data: none. ``emergency_text`` is the clinic's own words, shown with every alarm.
    """

    class Paper(models.TextChoices):
        """Paper of the printed report."""

        A4 = "A4", "A4"
        LETTER = "Letter", "Letter"

    slug = models.SlugField(max_length=40, unique=True)
    label = models.CharField(max_length=80)
    emergency_text = models.CharField(max_length=280)
    time_zone = models.CharField(max_length=40, default="UTC")
    paper = models.CharField(max_length=8, choices=Paper, default=Paper.A4)
    clinic_weekdays = models.CharField(
        max_length=13,
        default="0,1,2,3,4",
        help_text="Weekdays with a clinic, 0 = Monday, separated by commas.",
    )
    gap_between_scanners = models.BooleanField(
        default=False,
        help_text="Draw a gap between two scanners of the same class, too.",
    )
    is_demo = models.BooleanField(default=False)

    class Meta:
        constraints = [
            models.CheckConstraint(
                condition=~models.Q(emergency_text=""), name="site_emergency_text_given"
            ),
            models.CheckConstraint(
                condition=models.Q(paper__in=["A4", "Letter"]), name="site_paper_known"
            ),
        ]

    def __str__(self) -> str:
        return self.label


class Scanner(models.Model):
    """One OCT scanner of a site, by class and boundary, never by maker or serial number.

    A missing row means scans can't be entered with a class. Personal data: none.
    """

    class OctClass(models.TextChoices):
        """Technology and outer boundary; the codes of the tidy file."""

        TD = "TD", "time-domain"
        SD_RPE = "SD-RPE", "spectral-domain, to the pigment epithelium"
        SD_BM = "SD-BM", "spectral-domain, to Bruch's membrane"
        SS = "SS", "swept-source"

    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="scanners")
    label = models.CharField(max_length=40)
    oct_class = models.CharField(max_length=8, choices=OctClass)
    retired_on = models.DateField(null=True, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["site", "label"], name="scanner_label_once_a_site"),
            models.CheckConstraint(
                condition=models.Q(oct_class__in=["TD", "SD-RPE", "SD-BM", "SS"]),
                name="scanner_class_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.label} ({self.get_oct_class_display()})"


class ClinicDay(models.Model):
    """An exception or a closing of one clinic day: cancelled, extra, or closed in the evening.

    A missing row means the weekday pattern of the site holds and the day is not closed.
    Personal data: none beyond who closed it.
    """

    class State(models.TextChoices):
        """What is said of the day."""

        EXTRA = "extra", "extra clinic"
        CANCELLED = "cancelled", "no clinic"
        CLOSED = "closed", "closed"

    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="clinic_days")
    day = models.DateField()
    seq = models.PositiveIntegerField(default=0)
    state = models.CharField(max_length=10, choices=State)
    at = models.DateTimeField()
    by = models.ForeignKey("clinic.User", on_delete=models.PROTECT, related_name="+")

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["site", "day", "seq"], name="clinic_day_seq_once"),
            models.CheckConstraint(
                condition=models.Q(state__in=["extra", "cancelled", "closed"]),
                name="clinic_day_state_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.day.isoformat()} {self.get_state_display()}"
