"""Patients by random code, their eyes, and what is known of each eye over time."""

from django.db import models

from clinic.models.append_only import AppendOnly, Revision
from clinic.models.sites import Site


class Patient(models.Model):
    """One person under a random, check-charactered code. A missing row means not enrolled here.

    Personal data (pseudonymous): year of birth (90 and over pooled, the year dropped) and sex.
    """

    class Sex(models.TextChoices):
        """Thickness limits differ by sex; unknown is allowed."""

        FEMALE = "f", "female"
        MALE = "m", "male"
        UNKNOWN = "", "not recorded"

    code = models.CharField(max_length=10, unique=True)
    site = models.ForeignKey(Site, on_delete=models.PROTECT, related_name="patients")
    birth_year = models.PositiveSmallIntegerField(null=True, blank=True)
    age_90_or_over = models.BooleanField(default=False)
    sex = models.CharField(max_length=1, choices=Sex, blank=True, default="")
    enrolled_at = models.DateTimeField()
    enrolled_by = models.ForeignKey("clinic.User", on_delete=models.PROTECT, related_name="+")

    class Meta:
        indexes = [models.Index(fields=["site", "code"])]
        constraints = [
            models.CheckConstraint(
                condition=models.Q(sex__in=["f", "m", ""]), name="patient_sex_known"
            ),
            models.CheckConstraint(
                condition=models.Q(birth_year__isnull=True) | models.Q(age_90_or_over=False),
                name="patient_90_or_over_has_no_birth_year",
            ),
        ]

    def __str__(self) -> str:
        return self.code


class PatientStatus(AppendOnly):
    """A person's standing: active, moved away or died. The newest row counts; none means active.

    Personal data: the fact itself, pseudonymous.
    """

    class Status(models.TextChoices):
        """``died`` and ``moved`` stop every list and can be reversed by a newer row."""

        ACTIVE = "active", "active"
        MOVED = "moved", "moved away"
        DIED = "died", "died"

    patient = models.ForeignKey(Patient, on_delete=models.PROTECT, related_name="statuses")
    seq = models.PositiveIntegerField()
    status = models.CharField(max_length=8, choices=Status)
    from_day = models.DateField()
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["patient", "seq"], name="patient_status_seq_once"),
            models.CheckConstraint(
                condition=models.Q(status__in=["active", "moved", "died"]),
                name="patient_status_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.patient} {self.get_status_display()}"


class Eye(models.Model):
    """One eye of one patient that the clinic follows. A missing row means the eye isn't followed.

    Personal data: none of its own.
    """

    class Side(models.TextChoices):
        """Always shown in words."""

        RIGHT = "R", "right eye"
        LEFT = "L", "left eye"

    patient = models.ForeignKey(Patient, on_delete=models.PROTECT, related_name="eyes")
    side = models.CharField(max_length=1, choices=Side)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["patient", "side"], name="eye_once_a_patient"),
            models.CheckConstraint(condition=models.Q(side__in=["R", "L"]), name="eye_side_known"),
        ]

    def __str__(self) -> str:
        return f"{self.patient} {self.get_side_display()}"


class EyeState(AppendOnly):
    """Cause and status of an eye from a day on; the newest row (highest ``seq``) counts.

    No row means cause not recorded and status "assumed in treatment". Personal data: pseudonymous.
    """

    class Cause(models.TextChoices):
        """Cause of the macular edema; the codes of the tidy file."""

        DIABETIC = "diabetic", "diabetic"
        BRANCH = "branch_vein", "branch vein occlusion"
        CENTRAL = "central_vein", "central vein occlusion"
        UVEITIC = "uveitic", "uveitic"
        SURGERY = "after_surgery", "after surgery"
        OTHER = "other", "other"
        UNKNOWN = "", "not recorded"

    class Status(models.TextChoices):
        """The codes of the tidy file."""

        IN_TREATMENT = "in_treatment", "in treatment"
        WATCHED = "watched", "watched"
        PAUSED = "paused", "paused"
        STOPPED = "stopped", "stopped"
        CARE_ELSEWHERE = "care_elsewhere", "care elsewhere"
        NOT_FOLLOWED = "not_followed", "not followed"
        UNKNOWN = "", "not recorded"

    class StopReason(models.TextChoices):
        """Why treatment of an eye was stopped."""

        DRY = "dry", "dry"
        NO_BENEFIT = "no_benefit", "no benefit"
        PATIENT = "patients_choice", "patient's choice"
        OTHER = "other", "other"
        NONE = "", "not given"

    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="states")
    seq = models.PositiveIntegerField()
    cause = models.CharField(max_length=14, choices=Cause, blank=True, default="")
    status = models.CharField(max_length=16, choices=Status, blank=True, default="")
    stop_reason = models.CharField(max_length=16, choices=StopReason, blank=True, default="")
    from_day = models.DateField()
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["eye", "seq"], name="eye_state_seq_once"),
            models.CheckConstraint(
                condition=models.Q(
                    cause__in=[
                        "diabetic",
                        "branch_vein",
                        "central_vein",
                        "uveitic",
                        "after_surgery",
                        "other",
                        "",
                    ]
                ),
                name="eye_state_cause_known",
            ),
            models.CheckConstraint(
                condition=models.Q(
                    status__in=[
                        "in_treatment",
                        "watched",
                        "paused",
                        "stopped",
                        "care_elsewhere",
                        "not_followed",
                        "",
                    ]
                ),
                name="eye_state_status_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.eye}: {self.get_status_display()} from {self.from_day.isoformat()}"


class History(Revision):
    """What is known of an eye that arrived mid-course, at enrolment. Highest ``rev`` counts.

    No row means "history not entered", never "no history". ``new_eye`` means: treatment starts
    here, there is no earlier history. Units: weeks, letters, µm, tenths of mmHg.
    Personal data: pseudonymous.
    """

    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="histories")
    new_eye = models.BooleanField(default=False)
    diagnosed_on = models.DateField(null=True, blank=True)
    treatments_so_far = models.PositiveSmallIntegerField(null=True, blank=True)
    agent = models.CharField(max_length=40, blank=True)
    last_treatment_on = models.DateField(null=True, blank=True)
    interval_weeks = models.PositiveSmallIntegerField(null=True, blank=True)
    loading_done = models.BooleanField(null=True, blank=True)
    steroid_ever = models.BooleanField(null=True, blank=True)
    pressure_rise_after_steroid = models.BooleanField(null=True, blank=True)
    baseline_letters = models.SmallIntegerField(null=True, blank=True)
    baseline_cst_um = models.PositiveSmallIntegerField(null=True, blank=True)
    baseline_iop_tenths = models.PositiveSmallIntegerField(null=True, blank=True)
    lens = models.CharField(max_length=16, blank=True)
    vitrectomy = models.BooleanField(null=True, blank=True)
    laser = models.BooleanField(null=True, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["eye", "rev"], name="history_rev_once"),
        ]

    def __str__(self) -> str:
        return f"{self.eye} history, revision {self.rev}"


class EyeEvent(AppendOnly):
    """A dated event of an eye (surgery, laser, occlusion). No row means none recorded.

    ``withdraws`` points to an earlier row entered by mistake. Personal data: pseudonymous.
    """

    class Kind(models.TextChoices):
        """Lens surgery, vitrectomy and oil break comparability; the rest are drawn only."""

        LENS = "lens_surgery", "cataract surgery"
        CAPSULOTOMY = "capsulotomy", "capsulotomy"
        VITRECTOMY = "vitrectomy", "vitrectomy"
        OIL = "oil", "oil in the eye"
        LASER = "laser", "laser"
        OCCLUSION = "occlusion", "vein occlusion"

    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="events")
    kind = models.CharField(max_length=14, choices=Kind)
    day = models.DateField()
    withdraws = models.ForeignKey(
        "self", null=True, blank=True, on_delete=models.PROTECT, related_name="withdrawn_by"
    )
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        indexes = [models.Index(fields=["eye", "day"])]
        constraints = [
            models.CheckConstraint(
                condition=models.Q(
                    kind__in=[
                        "lens_surgery",
                        "capsulotomy",
                        "vitrectomy",
                        "oil",
                        "laser",
                        "occlusion",
                    ]
                ),
                name="eye_event_kind_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.eye} {self.get_kind_display()} {self.day.isoformat()}"


class Course(AppendOnly):
    """A treatment course: care of one eye under one regimen, opened by a clinician with a reason.

    ``params`` overrides the adopted limit set's defaults (JSON object). The course with the latest
    ``from_day`` (then highest ``seq``) counts from that day. No row means no regimen chosen.
    ``regimen`` empty ends the course. Personal data: pseudonymous.
    """

    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="courses")
    seq = models.PositiveIntegerField()
    regimen = models.CharField(max_length=30, blank=True)
    agent = models.CharField(max_length=40, blank=True)
    params = models.JSONField(default=dict, blank=True)
    from_day = models.DateField()
    reason = models.CharField(max_length=280)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["eye", "seq"], name="course_seq_once"),
        ]

    def __str__(self) -> str:
        return f"{self.eye} {self.regimen or 'no regimen'} from {self.from_day.isoformat()}"
