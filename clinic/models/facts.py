"""Dated facts of a person that bear on a treatment, with a day to ask again by."""

from django.db import models

from clinic.models.append_only import AppendOnly
from clinic.models.patients import Eye, Patient


class PersonFact(AppendOnly):
    """One thing told or measured of a person, or what became of it later.

    An entry stands from ``day`` on. Rows ``about`` it say that it still holds, that it ended, or
    that it was entered by mistake. No row of a kind means never asked, never "no". Units: mmHg,
    tenths of g/dL. ``happened_on`` is the day of a stroke or heart attack; blank means not known.
    Personal data: health facts, pseudonymous.
    """

    class Kind(models.TextChoices):
        """What is told; only an inflammation is of one eye."""

        ASKED_NONE = "asked_none", "asked: none of these"
        PREGNANCY = "pregnancy", "pregnancy"
        STROKE = "stroke", "stroke"
        HEART_ATTACK = "heart_attack", "heart attack"
        ALLERGY_DRUG = "allergy_drug", "allergy to a drug"
        ALLERGY_ANTISEPTIC = "allergy_antiseptic", "allergy to an antiseptic"
        INFLAMMATION = "inflammation", "earlier inflammation with an agent"
        GLITAZONE = "glitazone", "takes a glitazone"
        KIDNEY = "kidney", "kidney disease"
        BLOOD_PRESSURE = "blood_pressure", "blood pressure"
        TOTAL_PROTEIN = "total_protein", "total protein"

    class Change(models.TextChoices):
        """What a row says of the fact."""

        ENTRY = "entry", "entered"
        STILL = "still", "still holds"
        ENDED = "ended", "ended"
        WITHDRAWN = "withdrawn", "entered by mistake"

    patient = models.ForeignKey(Patient, on_delete=models.PROTECT, related_name="facts")
    eye = models.ForeignKey(
        Eye, null=True, blank=True, on_delete=models.PROTECT, related_name="facts"
    )
    seq = models.PositiveIntegerField()
    kind = models.CharField(max_length=20, choices=Kind)
    change = models.CharField(max_length=10, choices=Change, default=Change.ENTRY)
    about = models.ForeignKey(
        "self", null=True, blank=True, on_delete=models.PROTECT, related_name="later"
    )
    day = models.DateField()
    happened_on = models.DateField(null=True, blank=True)
    agent = models.CharField(max_length=40, blank=True)
    systolic_mmhg = models.PositiveSmallIntegerField(null=True, blank=True)
    diastolic_mmhg = models.PositiveSmallIntegerField(null=True, blank=True)
    protein_tenths = models.PositiveSmallIntegerField(null=True, blank=True)
    ask_again_by = models.DateField(null=True, blank=True)
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["patient", "seq"], name="person_fact_seq_once"),
            models.CheckConstraint(
                condition=models.Q(
                    kind__in=[
                        "asked_none",
                        "pregnancy",
                        "stroke",
                        "heart_attack",
                        "allergy_drug",
                        "allergy_antiseptic",
                        "inflammation",
                        "glitazone",
                        "kidney",
                        "blood_pressure",
                        "total_protein",
                    ]
                ),
                name="person_fact_kind_known",
            ),
            models.CheckConstraint(
                condition=models.Q(change="entry", about__isnull=True)
                | models.Q(change__in=["still", "ended", "withdrawn"], about__isnull=False),
                name="person_fact_change_is_about_an_entry",
            ),
            models.CheckConstraint(
                condition=~models.Q(change="withdrawn") | ~models.Q(reason=""),
                name="person_fact_reason_for_withdrawal",
            ),
            models.CheckConstraint(
                condition=models.Q(kind="inflammation", eye__isnull=False)
                | (~models.Q(kind="inflammation") & models.Q(eye__isnull=True)),
                name="person_fact_only_inflammation_has_an_eye",
            ),
            models.CheckConstraint(
                condition=models.Q(systolic_mmhg__isnull=True)
                | models.Q(systolic_mmhg__gt=models.F("diastolic_mmhg")),
                name="person_fact_systolic_above_diastolic",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.patient} {self.get_kind_display()} {self.day.isoformat()}"
