"""What the rules say of an eye as it stands, in words, from its stored reviews.

Raised is what the eye's newest review raised, and what an earlier one raised that stays until a
clinician answers (an alarm). The reading of each past visit is the one stored with that visit.
"""

import datetime as dt
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from clinic.content import AnswerRow, MissingText, VerdictText
from clinic.models import Answer, Patient, Review
from clinic.selectors.adopted import Adopted, adopted_for, of_cause
from clinic.selectors.eye_log import EyeLog, VisitLog
from clinic.selectors.eye_words import answer_text
from clinic.selectors.verdict_texts import Row, by_rank, missing_text, verdict_text
from clinic.selectors.visit_words import worded
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.rules import registry as rules

LIMIT_NOT_REACHED = "limit_not_reached"
BARS = "Bars: plus and minus the published repeatability of the method."
LINES = (
    "Lines join only readings taken in a comparable way, with no eye surgery between. "
    "Hollow: poor scan."
)


@dataclass(frozen=True, slots=True)
class EyeVerdicts:
    """Everything the rules and the regimen say of one eye."""

    limits: LimitSet | None = None
    adopted: str = ""
    regimen: str = ""
    reading: str = ""
    reading_from: dt.date | None = None
    readings: Mapping[int, str] = field(default_factory=dict)
    raised: tuple[VerdictText, ...] = ()
    still: tuple[VerdictText, ...] = ()
    could_not_tell: tuple[MissingText, ...] = ()
    limits_not_reached: tuple[str, ...] = ()
    open_answers: tuple[AnswerRow, ...] = ()
    titles: Mapping[str, str] = field(default_factory=dict)
    chart_notes: tuple[str, ...] = ()


def titles() -> dict[str, str]:
    """Return the title of every rule and regimen by id."""
    every = {**rules.by_id(), **regimens.by_id()}
    return {name: str(module.INFO.title) for name, module in every.items()}


def verdicts_for(patient: Patient, logs: Iterable[EyeLog]) -> dict[int, EyeVerdicts]:
    """Return what is said of each eye of a person, by the eye's key."""
    adopted = adopted_for(patient.site)
    named = titles()
    return {
        log.eye.pk: _verdicts(
            log,
            of_cause(adopted, log.state.cause if log.state else ""),
            patient.site.emergency_text,
            named,
        )
        for log in logs
    }


def _verdicts(
    log: EyeLog, adopted: Adopted | None, emergency_text: str, named: Mapping[str, str]
) -> EyeVerdicts:
    """Return what is said of one eye."""
    shown = [
        Shown(one, review, row, named, adopted.words if adopted else "", emergency_text)
        for one, review, row in standing_rows(log)
    ]
    texts = [one.text(log.answers) for one in shown if one.outcome in ("raised", "still")]
    raised = by_rank(text for text in texts if text.outcome == "Raised")
    readings = {
        one.visit.pk: str(one.review.reading.get("reading", ""))
        for one in log.visits
        if one.review and one.review.reading
    }
    last = newest(log)
    read = next((one for one in reversed(log.visits) if readings.get(one.visit.pk)), None)
    return EyeVerdicts(
        limits=adopted.limits if adopted else None,
        adopted=adopted.words if adopted else "",
        regimen=worded(log.courses[-1].regimen) if log.courses else "",
        reading=readings[read.visit.pk] if read else "",
        reading_from=read.visit.day if read else None,
        readings=readings,
        raised=raised,
        still=by_rank(text for text in texts if text.outcome == "Still"),
        could_not_tell=tuple(
            missing_text(one.row, title=one.title)
            for one in shown
            if one.outcome == "could_not_tell"
        ),
        limits_not_reached=tuple(
            named.get(rule, rule)
            for rule, outcome in (last.review.outcomes if last and last.review else {}).items()
            if outcome == LIMIT_NOT_REACHED
        ),
        open_answers=tuple(
            AnswerRow(text.from_day, text.title, text.rank)
            for text in raised
            if not text.answer and text.from_day
        ),
        titles=named,
        chart_notes=(BARS, LINES) if adopted else (LINES,),
    )


def newest(log: EyeLog) -> VisitLog | None:
    """Return the newest reviewed visit of an eye."""
    return next((one for one in reversed(log.visits) if one.review), None)


def standing_rows(log: EyeLog) -> Iterator[tuple[VisitLog, Review, Row]]:
    """Yield the rows of the newest review, then older alarms that nobody answered."""
    last = newest(log)
    for one in reversed(log.visits):
        for row in one.review.raised if one.review else ():
            if one.review and (one is last or (is_alarm(row) and not answered(log, one, row))):
                yield one, one.review, row


def is_alarm(row: Row) -> bool:
    """Say whether a raised row shows the emergency text and so stays until it is answered."""
    return row["outcome"] == "raised" and bool((row.get("working") or {}).get("emergency"))


def answered(log: EyeLog, one: VisitLog, row: Row) -> bool:
    """Say whether somebody answered a row of a visit."""
    return any(
        answer.visit_id == one.visit.pk and answer.rule == row["rule"] for answer in log.answers
    )


@dataclass(frozen=True, slots=True)
class Shown:
    """One row of a review with what is needed to put it into words."""

    visit: VisitLog
    review: Review
    row: Row
    named: Mapping[str, str]
    adopted: str
    emergency_text: str

    @property
    def outcome(self) -> str:
        """Return the outcome code."""
        return str(self.row["outcome"])

    @property
    def title(self) -> str:
        """Return the rule's title."""
        return self.named.get(str(self.row["rule"]), str(self.row["rule"]))

    def text(self, answers: Iterable[Answer]) -> VerdictText:
        """Return the row in words with its answer."""
        return verdict_text(
            self.row,
            title=self.title,
            kind=self.visit.visit.kind,
            adopted=self.adopted,
            emergency_text=self.emergency_text,
            answer=self.answer(answers),
            answerable=self.outcome == "raised",
        )

    def answer(self, answers: Iterable[Answer]) -> str:
        """Return the newest answer, and that it was given before a correction where it was."""
        mine = [
            answer
            for answer in answers
            if answer.visit_id == self.visit.visit.pk and answer.rule == self.row["rule"]
        ]
        if not mine:
            return ""
        last = mine[-1]
        said = f"{answer_text(last)}, {last.by}, {last.at:%Y-%m-%d}"
        if last.inputs_digest != self.review.inputs_digest:
            return f"open again; before the correction: {said}"
        return said
