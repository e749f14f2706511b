"""Visits and contacts, and the four kinds of record an eye has at a visit."""

from django.db import models

from clinic.models.append_only import AppendOnly, Revision
from clinic.models.patients import Eye, Patient


class Visit(models.Model):
    """One kind of visit of one patient on one day, or a contact between visits.

    A second visit the same day must be of another kind; ``entry`` orders them. A missing row means
    nobody came. The row itself never changes. Personal data: the true date (pseudonymous).
    """

    class Kind(models.TextChoices):
        """The codes of the tidy file."""

        PLANNED = "planned", "planned"
        CHECK_ONLY = "check_only", "check only"
        TREATMENT_ONLY = "treatment_only", "treatment only"
        VIRTUAL = "virtual", "virtual (measured now, decided later)"
        UNSCHEDULED = "unscheduled", "unscheduled"
        AFTER_SURGERY = "after_surgery", "after surgery"
        CONTACT = "contact", "contact"

    patient = models.ForeignKey(Patient, on_delete=models.PROTECT, related_name="visits")
    day = models.DateField()
    kind = models.CharField(max_length=16, choices=Kind, default=Kind.PLANNED)
    entry = models.PositiveSmallIntegerField(default=0)
    from_intake = models.ForeignKey(
        "clinic.IntakeFile",
        null=True,
        blank=True,
        on_delete=models.PROTECT,
        related_name="visits",
    )
    at = models.DateTimeField()
    by = models.ForeignKey("clinic.User", on_delete=models.PROTECT, related_name="+")

    class Meta:
        constraints = [
            models.UniqueConstraint(
                fields=["patient", "day", "kind"], name="visit_kind_once_a_day"
            ),
            models.CheckConstraint(
                condition=models.Q(
                    kind__in=[
                        "planned",
                        "check_only",
                        "treatment_only",
                        "virtual",
                        "unscheduled",
                        "after_surgery",
                        "contact",
                    ]
                ),
                name="visit_kind_known",
            ),
        ]
        indexes = [models.Index(fields=["day"])]

    def __str__(self) -> str:
        return f"{self.patient} {self.day.isoformat()} {self.get_kind_display()}"


class PostedPart(AppendOnly):
    """The hidden id of one posted part; unique, so a double click stores once.

    ``result`` is where the first post redirected to. Personal data: none.
    """

    request_id = models.UUIDField(unique=True)
    visit = models.ForeignKey(Visit, null=True, blank=True, on_delete=models.PROTECT)
    part = models.CharField(max_length=20)
    result = models.CharField(max_length=200)

    def __str__(self) -> str:
        return f"{self.part} {self.request_id}"


class Note(models.Model):
    """Erasable free text (at most 280 characters), kept outside the chains.

    Only ``digest`` (salted SHA-256) stands inside the ledger. Redaction empties ``text`` and sets
    ``redacted_at``. Personal data: whatever was typed in spite of the guard.
    """

    text = models.CharField(max_length=280, blank=True)
    salt = models.CharField(max_length=32)
    digest = models.CharField(max_length=64)
    redacted_at = models.DateTimeField(null=True, blank=True)

    def __str__(self) -> str:
        return f"note {self.pk}"


class EyeRecord(Revision):
    """What the four records share: one visit, one eye, revisions, an optional note."""

    visit = models.ForeignKey(Visit, on_delete=models.PROTECT, related_name="%(class)s_set")
    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="%(class)s_set")
    note = models.ForeignKey(Note, null=True, blank=True, on_delete=models.PROTECT)

    class Meta:
        abstract = True
        constraints = [
            models.UniqueConstraint(fields=["visit", "eye", "rev"], name="%(class)s_rev_once"),
            models.CheckConstraint(
                condition=models.Q(change__in=["entry", "addition"]) | ~models.Q(reason=""),
                name="%(class)s_reason_for_change",
            ),
        ]


class Measured(EyeRecord):
    """What was measured on one eye at one visit. No row means not measured; blank means not done.

    Units: CST whole µm; acuity as typed plus letters and logMAR in 1/10,000; IOP in tenths of mmHg.
    The acuity here is the one used by rules (comparable with the last, else best corrected); more
    acuities and pressures are child rows. Personal data: pseudonymous.
    """

    cst_um = models.PositiveSmallIntegerField(null=True, blank=True)
    scanner = models.ForeignKey(
        "clinic.Scanner", null=True, blank=True, on_delete=models.PROTECT, related_name="+"
    )
    scanner_label = models.CharField(max_length=40, blank=True)
    oct_class = models.CharField(max_length=8, blank=True)
    one_scanner_assumed = models.BooleanField(default=False)
    scan_quality = models.CharField(max_length=4, blank=True)
    irf = models.CharField(max_length=10, blank=True)
    srf = models.CharField(max_length=10, blank=True)
    grader = models.CharField(max_length=12, blank=True)
    acuity = models.CharField(max_length=16, blank=True)
    acuity_notation = models.CharField(max_length=14, blank=True)
    acuity_chart = models.CharField(max_length=18, blank=True)
    acuity_correction = models.CharField(max_length=10, blank=True)
    acuity_distance = models.CharField(max_length=8, blank=True)
    letters = models.SmallIntegerField(null=True, blank=True)
    logmar_e4 = models.IntegerField(null=True, blank=True)
    iop_tenths = models.PositiveSmallIntegerField(null=True, blank=True)
    iop_method = models.CharField(max_length=12, blank=True)
    lens = models.CharField(max_length=16, blank=True)
    symptoms = models.CharField(max_length=160, blank=True)
    symptoms_onset = models.DateField(null=True, blank=True)

    class Meta(EyeRecord.Meta):
        constraints = [
            *EyeRecord.Meta.constraints,
            models.CheckConstraint(
                condition=models.Q(cst_um__isnull=True)
                | models.Q(cst_um__gte=50, cst_um__lte=1500),
                name="measured_cst_possible",
            ),
            models.CheckConstraint(
                condition=models.Q(iop_tenths__isnull=True) | models.Q(iop_tenths__lte=800),
                name="measured_iop_possible",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} measured, revision {self.rev}"


class MoreAcuity(models.Model):
    """A further acuity of the same measured record. Append-only with its parent."""

    measured = models.ForeignKey(Measured, on_delete=models.PROTECT, related_name="more_acuities")
    acuity = models.CharField(max_length=16)
    acuity_notation = models.CharField(max_length=14)
    acuity_chart = models.CharField(max_length=18, blank=True)
    acuity_correction = models.CharField(max_length=10, blank=True)
    acuity_distance = models.CharField(max_length=8, blank=True)
    letters = models.SmallIntegerField(null=True, blank=True)
    logmar_e4 = models.IntegerField(null=True, blank=True)

    def __str__(self) -> str:
        return f"{self.acuity} {self.acuity_notation}"


class MorePressure(models.Model):
    """A further pressure of the same measured record. Append-only with its parent."""

    measured = models.ForeignKey(Measured, on_delete=models.PROTECT, related_name="more_pressures")
    iop_tenths = models.PositiveSmallIntegerField()
    iop_method = models.CharField(max_length=12, blank=True)

    def __str__(self) -> str:
        return f"{self.iop_tenths / 10} mmHg"


class Decided(EyeRecord):
    """What the clinician decided for one eye at one visit. No row means not decided yet.

    Personal data: pseudonymous.
    """

    class Choice(models.TextChoices):
        """What was decided."""

        TREAT = "treat", "treat"
        WITHHOLD = "withhold", "withhold"
        INTERVAL = "interval", "change the interval"
        SWITCH = "switch", "switch the agent"
        STOP = "stop", "stop"

    choice = models.CharField(max_length=10, choices=Choice)
    interval_weeks = models.PositiveSmallIntegerField(null=True, blank=True)
    agent = models.CharField(max_length=40, blank=True)
    departs_because = models.CharField(max_length=280, blank=True)

    class Meta(EyeRecord.Meta):
        constraints = [
            *EyeRecord.Meta.constraints,
            models.CheckConstraint(
                condition=models.Q(choice__in=["treat", "withhold", "interval", "switch", "stop"]),
                name="decided_choice_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} {self.choice}"


class Treated(EyeRecord):
    """What was given to one eye at one visit. No row means not recorded (nothing is assumed).

    ``outcome`` says given, nothing given, or planned but not given (with a reason). Dose in
    thousandths of mg. Check after treatment: perception and pressure. Personal data: pseudonymous.
    """

    class Outcome(models.TextChoices):
        """Nothing given is a fact; a missing row is not."""

        GIVEN = "given", "given"
        NOTHING = "nothing", "nothing given"
        NOT_GIVEN = "not_given", "planned but not given"

    outcome = models.CharField(max_length=10, choices=Outcome)
    agent = models.CharField(max_length=40, blank=True)
    dose_ug = models.PositiveIntegerField(null=True, blank=True)
    route = models.CharField(max_length=16, blank=True)
    lot = models.CharField(max_length=20, blank=True)
    laser = models.CharField(max_length=10, blank=True)
    implant = models.BooleanField(default=False)
    not_given_because = models.CharField(max_length=280, blank=True)
    perception_after = models.CharField(max_length=16, blank=True)
    iop_after_tenths = models.PositiveSmallIntegerField(null=True, blank=True)
    iop_after_method = models.CharField(max_length=12, blank=True)
    complications = models.CharField(max_length=160, blank=True)

    class Meta(EyeRecord.Meta):
        constraints = [
            *EyeRecord.Meta.constraints,
            models.CheckConstraint(
                condition=models.Q(outcome__in=["given", "nothing", "not_given"]),
                name="treated_outcome_known",
            ),
            models.CheckConstraint(
                condition=models.Q(iop_after_tenths__isnull=True)
                | models.Q(iop_after_tenths__lte=800),
                name="treated_iop_possible",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} {self.agent or self.outcome}"


class MoreTreatment(models.Model):
    """A second treatment of the same treated record. Append-only with its parent."""

    treated = models.ForeignKey(Treated, on_delete=models.PROTECT, related_name="more_treatments")
    agent = models.CharField(max_length=40)
    dose_ug = models.PositiveIntegerField(null=True, blank=True)
    route = models.CharField(max_length=16, blank=True)
    lot = models.CharField(max_length=20, blank=True)

    def __str__(self) -> str:
        return self.agent


class NextStep(EyeRecord):
    """The due date set at this visit for the next one, and what is planned then.

    No row means no date was set at this visit. The booking itself is a ``Plan`` row.
    Personal data: pseudonymous.
    """

    due_weeks = models.PositiveSmallIntegerField(null=True, blank=True)
    due_day = models.DateField(null=True, blank=True)
    planned_agent = models.CharField(max_length=40, blank=True)
    planned_dose_ug = models.PositiveIntegerField(null=True, blank=True)
    check_only = models.BooleanField(default=False)

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} next {self.due_day}"


class ContactEntry(EyeRecord):
    """What a patient or carer told between visits about one eye, or a try to reach them.

    Hangs on a ``Visit`` of kind contact. Personal data: pseudonymous.
    """

    class Direction(models.TextChoices):
        """Who called whom."""

        FROM_PATIENT = "from_patient", "patient or carer told us"
        TO_PATIENT = "to_patient", "we tried to reach them"

    direction = models.CharField(max_length=14, choices=Direction)
    symptoms = models.CharField(max_length=160, blank=True)
    symptoms_onset = models.DateField(null=True, blank=True)
    outcome = models.CharField(max_length=24, blank=True)
    told_whom = models.CharField(max_length=60, blank=True)
    told_at = models.DateTimeField(null=True, blank=True)

    class Meta(EyeRecord.Meta):
        constraints = [
            *EyeRecord.Meta.constraints,
            models.CheckConstraint(
                condition=models.Q(direction__in=["from_patient", "to_patient"]),
                name="contact_direction_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} contact"


class Draft(models.Model):
    """Unsaved typing of one person for one patient and day; outside rules and ledger.

    Gone after saving or 24 hours. Personal data: pseudonymous, until saved or expired.
    """

    user = models.ForeignKey("clinic.User", on_delete=models.CASCADE, related_name="drafts")
    patient = models.ForeignKey(Patient, on_delete=models.CASCADE, related_name="drafts")
    day = models.DateField()
    part = models.CharField(max_length=20)
    payload = models.JSONField(default=dict)
    at = models.DateTimeField()

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["user", "patient", "day", "part"], name="draft_once"),
        ]

    def __str__(self) -> str:
        return f"draft {self.pk}"


class RecordDone(AppendOnly):
    """Marks kept for the clinic list: a patient ticked as seen to on a clinic day by somebody.

    No row means not ticked. Personal data: none of its own.
    """

    patient = models.ForeignKey(Patient, on_delete=models.PROTECT, related_name="ticks")
    day = models.DateField()
    seq = models.PositiveIntegerField()
    ticked = models.BooleanField(default=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["patient", "day", "seq"], name="tick_seq_once"),
        ]

    def __str__(self) -> str:
        return f"{self.patient} {self.day.isoformat()} {self.ticked}"
