"""What the generator hands over: plain rows of invented people, free of any database.

Units: CST whole µm, pressure tenths of mmHg, dose thousandths of mg. Codes are those of the tidy
file. A part that is None was not filled in.
"""

import datetime as dt
from dataclasses import dataclass, field


@dataclass(frozen=True)
class Readings:
    """What was measured on one eye."""

    cst_um: int | None
    scanner: str
    scan_quality: str
    irf: str
    srf: str
    grader: str
    acuity: str
    notation: str
    chart: str
    correction: str
    iop_tenths: int | None
    iop_method: str
    lens: str
    symptoms: str = ""
    symptoms_onset: dt.date | None = None


@dataclass(frozen=True)
class Decision:
    """What the clinician decided for one eye."""

    choice: str
    interval_weeks: int | None = None
    agent: str = ""
    departs_because: str = ""


@dataclass(frozen=True)
class Given:
    """What was given to one eye."""

    outcome: str
    agent: str = ""
    dose_ug: int | None = None
    route: str = ""
    laser: str = ""
    implant: bool = False
    not_given_because: str = ""
    perception_after: str = ""
    iop_after_tenths: int | None = None


@dataclass(frozen=True)
class Ahead:
    """The due date set for one eye, and what is planned then."""

    due_weeks: int
    due_day: dt.date
    planned_agent: str = ""
    planned_dose_ug: int | None = None
    check_only: bool = False


@dataclass(frozen=True)
class EyeVisit:
    """One eye at one visit, in four parts."""

    side: str
    measured: Readings | None = None
    decided: Decision | None = None
    treated: Given | None = None
    ahead: Ahead | None = None


@dataclass(frozen=True)
class VisitRow:
    """One visit of one person."""

    day: dt.date
    kind: str
    eyes: tuple[EyeVisit, ...]

    def eye(self, side: str) -> EyeVisit | None:
        """Return one eye's part of the visit, if it has any."""
        return next((eye for eye in self.eyes if eye.side == side), None)


@dataclass(frozen=True)
class ContactRow:
    """A telephone call between two visits about one eye."""

    day: dt.date
    side: str
    direction: str
    symptoms: str
    symptoms_onset: dt.date | None
    outcome: str
    told_whom: str


@dataclass(frozen=True)
class PlanRow:
    """One plan of one eye, in the order they were made."""

    side: str
    due_day: dt.date | None
    booked_day: dt.date | None
    booked_time: dt.time | None = None
    planned_agent: str = ""
    planned_dose_ug: int | None = None
    check_only: bool = False
    attendance: str = ""
    reason: str = ""


@dataclass(frozen=True)
class PastCare:
    """What an eye that arrived mid-course brought along."""

    treatments_so_far: int
    agent: str
    last_treatment_on: dt.date
    interval_weeks: int
    loading_done: bool
    steroid_ever: bool
    baseline_letters: int
    baseline_cst_um: int
    baseline_iop_tenths: int
    diagnosed_on: dt.date
    lens: str


@dataclass(frozen=True)
class EyeRow:
    """One eye: cause, status, how it arrived, its regimen and its dated events.

    ``arrival`` is new, history or history_missing.
    """

    side: str
    cause: str
    arrival: str
    history: PastCare | None
    regimen: str
    agent: str
    course_from: dt.date
    status: str = "in_treatment"
    stop_reason: str = ""
    status_from: dt.date | None = None
    events: tuple[tuple[str, dt.date], ...] = ()


@dataclass(frozen=True)
class AnswerRow:
    """A clinician's answer to what a rule raised on an eye at the last visit."""

    side: str
    rule: str
    answer: str
    reason: str = ""


@dataclass(frozen=True)
class PersonRow:
    """One invented person with everything recorded about them."""

    key: str
    site: str
    sex: str
    birth_year: int | None
    eyes: tuple[EyeRow, ...]
    visits: tuple[VisitRow, ...]
    plans: tuple[PlanRow, ...] = ()
    contacts: tuple[ContactRow, ...] = ()
    answers: tuple[AnswerRow, ...] = ()
    standing: str = "active"
    standing_from: dt.date | None = None
    stories: frozenset[str] = field(default=frozenset())

    def eye(self, side: str) -> EyeRow:
        """Return one eye of the person."""
        return next(eye for eye in self.eyes if eye.side == side)


@dataclass(frozen=True)
class SiteRow:
    """One invented clinic with its scanners (label, OCT class)."""

    slug: str
    label: str
    emergency_text: str
    paper: str
    scanners: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class DemoRows:
    """The whole invented clinic."""

    sites: tuple[SiteRow, ...]
    people: tuple[PersonRow, ...]
