"""Everything stored of a person's eyes, in a fixed number of queries however long the history."""

from collections import defaultdict
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any, TypeVar

from django.db.models import QuerySet

from clinic.models import (
    Answer,
    ContactEntry,
    Course,
    Decided,
    Eye,
    EyeEvent,
    EyeNow,
    EyeState,
    History,
    Measured,
    NextStep,
    Patient,
    Review,
    Revision,
    Treated,
    Visit,
)

Row = TypeVar("Row", EyeState, History, EyeEvent, Course, Answer)
Of = TypeVar("Of", Measured, Decided, Treated, NextStep, ContactEntry)
Record = TypeVar("Record", bound=Revision)


def current(revisions: Sequence[Record]) -> Record | None:
    """Return the revision that counts: the newest, unless it withdraws the record."""
    if not revisions or revisions[-1].change == Revision.Change.WITHDRAWN:
        return None
    return revisions[-1]


@dataclass(frozen=True)
class VisitLog:
    """One visit of one eye: every revision of each record, oldest first."""

    visit: Visit
    measured: Sequence[Measured] = ()
    decided: Sequence[Decided] = ()
    treated: Sequence[Treated] = ()
    ahead: Sequence[NextStep] = ()
    contact: Sequence[ContactEntry] = ()
    review: Review | None = None

    @property
    def is_of_this_eye(self) -> bool:
        """Say whether anything of this eye was recorded at the visit."""
        return any((self.measured, self.decided, self.treated, self.ahead, self.contact))


@dataclass(frozen=True)
class EyeLog:
    """One eye's whole log; visits in order of day and entry."""

    eye: Eye
    visits: Sequence[VisitLog]
    states: Sequence[EyeState] = ()
    histories: Sequence[History] = ()
    events: Sequence[EyeEvent] = ()
    courses: Sequence[Course] = ()
    answers: Sequence[Answer] = ()
    now: EyeNow | None = None

    @property
    def state(self) -> EyeState | None:
        """Return the state that counts."""
        return self.states[-1] if self.states else None

    @property
    def history(self) -> History | None:
        """Return the history that counts."""
        return current(self.histories)

    def pairs(self, part: str) -> list[tuple[Visit, Any]]:
        """Return (visit, current record) of one part, where there is one."""
        rows = ((one.visit, current(getattr(one, part))) for one in self.visits)
        return [(visit, row) for visit, row in rows if row is not None]


def eye_logs(patient: Patient) -> list[EyeLog]:
    """Return the logs of a person's eyes, the right one first."""
    visits = _visit_logs(patient)
    mine = {"eye__patient": patient}
    answers = Answer.objects.filter(**mine).select_related("by", "visit")
    states = _by_eye(EyeState.objects.filter(**mine).order_by("seq"))
    histories = _by_eye(History.objects.filter(**mine).order_by("rev"))
    courses = _by_eye(Course.objects.filter(**mine).order_by("from_day", "seq"))
    answered = _by_eye(answers.order_by("visit__day", "seq"))
    events = _by_eye(standing_events(patient))
    nows = {now.eye_id: now for now in EyeNow.objects.filter(**mine).select_related("eye")}
    return [
        EyeLog(
            eye,
            visits(eye),
            states.get(eye.pk, ()),
            histories.get(eye.pk, ()),
            events.get(eye.pk, ()),
            courses.get(eye.pk, ()),
            answered.get(eye.pk, ()),
            nows.get(eye.pk),
        )
        for eye in patient.eyes.order_by("-side")
    ]


def _visit_logs(patient: Patient) -> Callable[[Eye], list[VisitLog]]:
    """Return what gives an eye's visits; every record of the person is read here, once."""
    lists = ("more_acuities", "more_pressures")
    measured = _revisions(
        Measured.objects.select_related("scanner").prefetch_related(*lists), patient
    )
    decided = _revisions(Decided.objects.all(), patient)
    treated = _revisions(Treated.objects.prefetch_related("more_treatments"), patient)
    ahead = _revisions(NextStep.objects.all(), patient)
    contact = _revisions(ContactEntry.objects.all(), patient)
    found = Review.objects.filter(visit__patient=patient).order_by("seq")
    reviews = {(review.visit_id, review.eye_id): review for review in found}
    visits = list(patient.visits.order_by("day", "entry"))

    def of(eye: Eye) -> list[VisitLog]:
        logs = [
            VisitLog(
                visit,
                measured.get((visit.pk, eye.pk), ()),
                decided.get((visit.pk, eye.pk), ()),
                treated.get((visit.pk, eye.pk), ()),
                ahead.get((visit.pk, eye.pk), ()),
                contact.get((visit.pk, eye.pk), ()),
                reviews.get((visit.pk, eye.pk)),
            )
            for visit in visits
        ]
        return [log for log in logs if log.is_of_this_eye]

    return of


def _revisions(rows: "QuerySet[Of]", patient: Patient) -> dict[tuple[int, int], list[Of]]:
    """Return every revision of a record by (visit, eye), oldest first."""
    found: dict[tuple[int, int], list[Of]] = defaultdict(list)
    mine = rows.filter(visit__patient=patient).select_related("by", "note")
    for row in mine.order_by("visit_id", "eye_id", "rev"):
        found[row.visit_id, row.eye_id].append(row)
    return found


def _by_eye(rows: Iterable[Row]) -> dict[int, list[Row]]:
    found: dict[int, list[Row]] = defaultdict(list)
    for row in rows:
        found[row.eye_id].append(row)
    return found


def standing_events(patient: Patient) -> list[EyeEvent]:
    """Return the dated events of a person's eyes that no later row withdrew."""
    rows = list(EyeEvent.objects.filter(eye__patient=patient).order_by("day", "pk"))
    withdrawn = {row.withdraws_id for row in rows if row.withdraws_id}
    return [row for row in rows if row.pk not in withdrawn and not row.withdraws_id]
