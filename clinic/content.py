"""What an eye course or a print holds: finished words and numbers, frozen.

It lies under the selectors that fill it and the reports that print it, and knows neither.
"""

import datetime as dt
from dataclasses import dataclass, field

from clinic.chart import EyeGiven, Panels

Words = tuple[str, ...]


@dataclass(frozen=True, slots=True)
class ValueUsed:
    """One value a rule used. ``amount`` is as shown with its unit; ``assumed`` says what was."""

    what: str
    amount: str
    day: dt.date | None = None
    method: str = ""
    as_entered: str = ""
    assumed: str = ""


@dataclass(frozen=True, slots=True)
class VerdictText:
    """Something raised or still standing, with its full working in nine parts.

    1 ``sentence``, 2 ``values``, 3 ``arithmetic``, 4 ``rule`` to ``adopted``, 5 ``sources``,
    6 ``noise``, 7 ``unknowns``, 8 ``options`` (or ``emergency_text``), 9 ``not_for``. ``kind`` and
    ``from_day`` name the visit an answer is bound to.
    """

    rule: str
    title: str
    outcome: str
    rank: str
    sentence: str
    from_day: dt.date | None = None
    values: tuple[ValueUsed, ...] = ()
    arithmetic: Words = ()
    version: str = ""
    limit: str = ""
    adopted: str = ""
    sources: Words = ()
    noise: str = ""
    unknowns: Words = ()
    options: Words = ()
    emergency_text: str = ""
    not_for: Words = ()
    answer: str = ""
    kind: str = ""
    answerable: bool = False
    may_look_again: bool = False


@dataclass(frozen=True, slots=True)
class MissingText:
    """A rule that couldn't tell, and what was missing for it."""

    rule: str
    title: str
    sentence: str
    missing: Words = ()


@dataclass(frozen=True, slots=True)
class VisitRow:
    """One visit of one eye, as it stands after corrections (``changes`` names them)."""

    day: dt.date
    kind: str
    cst: str = ""
    scanner: str = ""
    fluid: str = ""
    acuity: str = ""
    letters: str = ""
    iop: str = ""
    treated: str = ""
    reading: str = ""
    decided: str = ""
    due: str = ""
    symptoms: str = ""
    note: str = ""
    changes: Words = ()
    kind_code: str = ""


@dataclass(frozen=True, slots=True)
class DecisionRow:
    """What was decided at one visit, by whom."""

    day: dt.date
    choice: str
    because: str = ""
    by: str = ""


@dataclass(frozen=True, slots=True)
class AnswerRow:
    """How something raised was answered; ``answer`` empty means still open."""

    day: dt.date
    title: str
    rank: str
    answer: str = ""
    because: str = ""
    by: str = ""


@dataclass(frozen=True, slots=True)
class Dated:
    """A dated line: an event, a course, a contact."""

    day: dt.date | None
    what: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class ContextRow:
    """A number shown apart, used by no rule."""

    what: str
    amount: str
    note: str = ""


@dataclass(frozen=True, slots=True)
class EyeReport:
    """One eye. ``side`` is ``R`` or ``L``; ``side_words`` the same in words."""

    side: str
    side_words: str
    chart: Panels
    given: EyeGiven
    cause: str = ""
    status: str = ""
    regimen: str = ""
    place: str = ""
    reading: str = ""
    reading_from: dt.date | None = None
    history: str = ""
    chart_notes: Words = ()
    raised: tuple[VerdictText, ...] = ()
    still: tuple[VerdictText, ...] = ()
    could_not_tell: tuple[MissingText, ...] = ()
    limits_not_reached: Words = ()
    visits: tuple[VisitRow, ...] = ()
    decisions: tuple[DecisionRow, ...] = ()
    answers: tuple[AnswerRow, ...] = ()
    courses: tuple[Dated, ...] = ()
    events: tuple[Dated, ...] = ()
    contacts: tuple[Dated, ...] = ()
    context: tuple[ContextRow, ...] = ()

    @property
    def side_slug(self) -> str:
        """Return the side as addresses spell it."""
        return "right" if self.side == "R" else "left"


@dataclass(frozen=True, slots=True)
class PatientReport:
    """One person's trend report. ``printed_at`` is in the site's time and part of the content."""

    code: str
    site_label: str
    printed_at: dt.datetime
    printed_by: str
    version: str
    notice: str
    eyes: tuple[EyeReport, ...]
    person: str = ""
    dates_from: dt.date | None = None
    dates_to: dt.date | None = None
    limit_sets: Words = ()
    ledger_seal: str = ""
    sources: Words = field(default=())
    emergency_text: str = ""


@dataclass(frozen=True, slots=True)
class EveningEye:
    """One eye on the evening-before list."""

    side_words: str
    facts: str
    values: str
    reading: str = ""
    raised: Words = ()
    folded: str = ""


@dataclass(frozen=True, slots=True)
class EveningBlock:
    """One person on the evening-before list."""

    code: str
    person: str
    booked: str
    rank: str
    eyes: tuple[EveningEye, ...]


@dataclass(frozen=True, slots=True)
class EveningList:
    """The clinic list of one day, for a day without power."""

    site_label: str
    day: dt.date
    printed_at: dt.datetime
    printed_by: str
    version: str
    notice: str
    head: Words
    blocks: tuple[EveningBlock, ...]
    ledger_seal: str = ""
    emergency_text: str = ""
