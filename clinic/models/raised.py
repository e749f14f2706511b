"""Reviews (what the rules said of a visit), answers to them, and the eye's current projection."""

from django.db import models

from clinic.models.append_only import AppendOnly
from clinic.models.patients import Eye
from clinic.models.visits import Visit


class Review(AppendOnly):
    """Every outcome of every rule on one eye at one visit, with what made it.

    The newest ``seq`` counts; a newer one supersedes. ``outcomes`` maps rule to a short code;
    ``raised`` holds the full verdict rows (with working) of raised, still and couldn't-tell ones.
    No row means not reviewed yet. Personal data: pseudonymous.
    """

    visit = models.ForeignKey(Visit, on_delete=models.PROTECT, related_name="reviews")
    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="reviews")
    seq = models.PositiveIntegerField()
    limit_set_digest = models.CharField(max_length=64, blank=True)
    limit_set_name = models.CharField(max_length=62, blank=True)
    engine_version = models.CharField(max_length=20)
    inputs_digest = models.CharField(max_length=64)
    outcomes = models.JSONField(default=dict)
    raised = models.JSONField(default=list)
    reading = models.JSONField(default=dict)
    top_rank = models.CharField(max_length=12, blank=True)
    why = models.CharField(max_length=40, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["visit", "eye", "seq"], name="review_seq_once"),
        ]
        indexes = [models.Index(fields=["eye", "visit"])]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} review {self.seq}"


class Answer(AppendOnly):
    """How a clinician answered something raised. Bound to the inputs it was answered on.

    The newest ``seq`` counts. No row means unanswered. Personal data: pseudonymous.
    """

    class Kind(models.TextChoices):
        """The three answers."""

        ACTING = "acting", "seen, acting"
        NOT_ACTING = "not_acting", "seen, not acting"
        LOOK_AGAIN = "look_again", "look again"

    visit = models.ForeignKey(Visit, on_delete=models.PROTECT, related_name="answers")
    eye = models.ForeignKey(Eye, on_delete=models.PROTECT, related_name="answers")
    rule = models.CharField(max_length=40)
    seq = models.PositiveIntegerField()
    inputs_digest = models.CharField(max_length=64)
    answer = models.CharField(max_length=12, choices=Kind)
    look_again_on = models.DateField(null=True, blank=True)
    reason = models.CharField(max_length=280, blank=True)

    class Meta:
        constraints = [
            models.UniqueConstraint(fields=["visit", "eye", "rule", "seq"], name="answer_seq_once"),
            models.CheckConstraint(
                condition=~models.Q(answer="look_again") | models.Q(look_again_on__isnull=False),
                name="answer_look_again_has_a_date",
            ),
            models.CheckConstraint(
                condition=models.Q(answer__in=["acting", "not_acting", "look_again"]),
                name="answer_kind_known",
            ),
        ]

    def __str__(self) -> str:
        return f"{self.visit} {self.eye.side} {self.rule}: {self.get_answer_display()}"


class EyeNow(models.Model):
    """The eye as it stands: a projection that can be rebuilt from the log at any time.

    One row an eye; no row means nothing was projected yet. It serves lists in a fixed number of
    queries and is never a source. ``alarm_since`` is the day of the oldest told alarm that nobody
    answered. Personal data: pseudonymous.
    """

    eye = models.OneToOneField(Eye, on_delete=models.PROTECT, related_name="now")
    cause = models.CharField(max_length=14, blank=True)
    status = models.CharField(max_length=16, blank=True)
    regimen = models.CharField(max_length=30, blank=True)
    place = models.CharField(max_length=60, blank=True)
    reading = models.CharField(max_length=160, blank=True)
    reading_from = models.DateField(null=True, blank=True)
    last_visit_day = models.DateField(null=True, blank=True)
    last_measured_day = models.DateField(null=True, blank=True)
    last_measured_visit = models.ForeignKey(
        Visit, null=True, blank=True, on_delete=models.PROTECT, related_name="+"
    )
    last_treated_day = models.DateField(null=True, blank=True)
    last_agent = models.CharField(max_length=40, blank=True)
    due_day = models.DateField(null=True, blank=True)
    booked_day = models.DateField(null=True, blank=True)
    booked_time = models.TimeField(null=True, blank=True)
    planned_agent = models.CharField(max_length=40, blank=True)
    planned_dose_ug = models.PositiveIntegerField(null=True, blank=True)
    check_only = models.BooleanField(default=False)
    cst_um = models.PositiveSmallIntegerField(null=True, blank=True)
    cst_change_um = models.SmallIntegerField(null=True, blank=True)
    cst_since = models.DateField(null=True, blank=True)
    acuity_shown = models.CharField(max_length=40, blank=True)
    letters = models.SmallIntegerField(null=True, blank=True)
    letters_change = models.SmallIntegerField(null=True, blank=True)
    letters_since = models.DateField(null=True, blank=True)
    iop_tenths = models.PositiveSmallIntegerField(null=True, blank=True)
    iop_change_tenths = models.SmallIntegerField(null=True, blank=True)
    iop_since = models.DateField(null=True, blank=True)
    steroid_day = models.DateField(null=True, blank=True)
    lasting_steroid = models.BooleanField(default=False)
    last_iop_day = models.DateField(null=True, blank=True)
    unanswered_since = models.DateField(null=True, blank=True)
    undecided_since = models.DateField(null=True, blank=True)
    alarm_since = models.DateField(null=True, blank=True)
    history_entered = models.BooleanField(default=False)
    open_top_rank = models.CharField(max_length=12, blank=True)
    open_items = models.JSONField(default=list)
    digest = models.CharField(max_length=64, blank=True)

    class Meta:
        indexes = [
            models.Index(fields=["booked_day"]),
            models.Index(fields=["due_day"]),
            models.Index(fields=["alarm_since"]),
        ]

    def __str__(self) -> str:
        return f"{self.eye} now"
