"""What the rules say of an eye as it stands, in words.

Raised is what the eye's newest visit raises, what a contact after it raises, and an alarm of an
earlier visit that nobody answered.
"""

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from clinic.chart.spoken import day_words
from clinic.content import AnswerRow, MissingText, VerdictText
from clinic.models import Patient
from clinic.selectors.adopted import Adopted, adopted_for, of_cause
from clinic.selectors.eye_log import EyeLog
from clinic.selectors.eye_said import EyeSaid, Row, SaidRow, said_of
from clinic.selectors.eye_words import answer_text
from clinic.selectors.standing import standing_items
from clinic.selectors.verdict_texts import by_rank, missing_text, verdict_text
from clinic.selectors.visit_words import worded
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.rules import registry as rules

LIMIT_NOT_REACHED = "limit_not_reached"


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


def titles() -> dict[str, str]:
    """Return the title of every rule and regimen by id."""
    every = {**rules.by_id(), **regimens.by_id()}
    return {name: str(module.INFO.title) for name, module in every.items()}


def verdicts_for(
    patient: Patient, logs: Sequence[EyeLog], today: dt.date
) -> dict[int, EyeVerdicts]:
    """Return what is said of each eye of a person, by the eye's key."""
    adopted = adopted_for(patient.site)
    sets = {log.eye.pk: of_cause(adopted, log.state.cause if log.state else "") for log in logs}
    said = said_of(patient, {pk: one.limits if one else None for pk, one in sets.items()}, today)
    standing = standing_items([log.now for log in logs if log.now], patient.site, today)
    named = titles()
    return {
        log.eye.pk: _verdicts(
            Asked(log, sets[log.eye.pk], patient.site.emergency_text, named),
            said[log.eye.pk],
            standing.get(log.eye.pk, []),
        )
        for log in logs
    }


@dataclass(frozen=True, slots=True)
class Asked:
    """One eye with what is needed to put its verdicts into words."""

    log: EyeLog
    adopted: Adopted | None
    emergency_text: str
    named: Mapping[str, str]

    def title(self, row: Row) -> str:
        """Return the title of a row's rule."""
        return self.named.get(str(row["rule"]), str(row["rule"]))

    def text(self, one: SaidRow) -> VerdictText:
        """Return a row in words with its newest answer."""
        return verdict_text(
            one.row,
            title=self.title(one.row),
            kind=one.kind,
            adopted=self.adopted.words if self.adopted else "",
            emergency_text=self.emergency_text,
            answer=self.answer(one),
            answerable=one.row["outcome"] == "raised",
        )

    def standing_text(self, row: Row) -> VerdictText:
        """Return what a rule of today's date raises; it goes when the date or the plan changes."""
        return verdict_text(
            {**row, "outcome": "raised"},
            title=self.title(row),
            adopted=self.adopted.words if self.adopted else "",
            emergency_text=self.emergency_text,
        )

    def answer(self, one: SaidRow) -> str:
        """Return the newest answer; one given on other inputs leaves the row open again."""
        mine = [
            answer
            for answer in self.log.answers
            if answer.visit_id == one.visit_id and answer.rule == one.row["rule"]
        ]
        if not mine:
            return ""
        last = mine[-1]
        told = f"{answer_text(last)}, {last.by}, {day_words(last.at)}"
        same = last.inputs_digest == self.digest(one)
        return told if same else f"open again; before the correction: {told}"

    def digest(self, one: SaidRow) -> str:
        """Return the digest of the evidence an answer to this row is bound to, as stored."""
        reviews = (log.review for log in self.log.visits if log.visit.pk == one.visit_id)
        stored = (row for review in reviews if review for row in review.raised)
        return next((row["digest"] for row in stored if row["rule"] == one.row["rule"]), "")


def _verdicts(asked: Asked, said: EyeSaid, standing: Sequence[Row]) -> EyeVerdicts:
    """Return what is said of one eye: its visits, then what depends on today alone."""
    log, adopted = asked.log, asked.adopted
    texts = [asked.text(one) for one in said.rows if one.row["outcome"] in ("raised", "still")]
    newest = max((text.from_day for text in texts if text.from_day), default=None)
    shown = [text for text in texts if text.outcome == "Raised" and not _is_done(text, newest)]
    raised = by_rank([*shown, *(asked.standing_text(row) for row in standing)])
    read = next((one for one in reversed(log.visits) if one.visit.pk in said.readings), None)
    return EyeVerdicts(
        limits=adopted.limits if adopted else None,
        adopted=adopted.words if adopted else "",
        regimen=worded(log.courses[-1].regimen) if log.courses else "",
        reading=said.readings[read.visit.pk] if read else "",
        reading_from=read.visit.day if read else None,
        readings=said.readings,
        raised=raised,
        still=by_rank(text for text in texts if text.outcome == "Still"),
        could_not_tell=tuple(
            missing_text(one.row, title=asked.title(one.row))
            for one in said.rows
            if one.row["outcome"] == "could_not_tell"
        ),
        limits_not_reached=tuple(
            asked.title(one.row) for one in said.rows if one.row["outcome"] == LIMIT_NOT_REACHED
        ),
        open_answers=tuple(
            AnswerRow(text.from_day, text.title, text.rank)
            for text in raised
            if not text.answer and text.from_day
        ),
        titles=asked.named,
    )


def _is_done(text: VerdictText, newest: dt.date | None) -> bool:
    """Say whether an alarm of an earlier visit was answered, and so need not be shown as raised."""
    older = bool(newest and text.from_day and text.from_day < newest)
    answered = bool(text.answer) and not text.answer.startswith("open again")
    return older and answered and bool(text.emergency_text)
