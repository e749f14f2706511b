"""What is handed over when many past visits are stored at once: checked, typed values.

The inner mappings hold column values of the model they are named after, under its own names
(``measured={"cst_um": 412, "irf": "no"}``), so that intake and demo fill exactly what a visit sheet
fills. None means that part was not filled in. Nothing here is checked again but by the database.
"""

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from clinic.models import Patient

Values = Mapping[str, Any]


@dataclass(frozen=True)
class PastEyeVisit:
    """One eye at one visit: columns of Measured, Decided, Treated and NextStep.

    ``also_given`` holds the columns of MoreTreatment, one mapping a further treatment.
    """

    side: str
    measured: Values | None = None
    decided: Values | None = None
    treated: Values | None = None
    ahead: Values | None = None
    also_given: tuple[Values, ...] = ()


@dataclass(frozen=True)
class PastVisit:
    """One visit of one person; ``contact`` holds the columns of ContactEntry by side."""

    day: dt.date
    kind: str
    entry: int
    eyes: tuple[PastEyeVisit, ...] = ()
    contact: Mapping[str, Values] = field(default_factory=dict)


@dataclass(frozen=True)
class PastEye:
    """One eye: its states, history, events and courses, oldest first (columns of each model).

    ``is_known`` says that the eye is enrolled already: only visits are added.
    """

    side: str
    states: tuple[Values, ...] = ()
    history: Values | None = None
    events: tuple[Values, ...] = ()
    courses: tuple[Values, ...] = ()
    plans: tuple[Values, ...] = ()
    is_known: bool = False


@dataclass(frozen=True)
class PastPerson:
    """One person. ``patient`` is given when the person is enrolled already."""

    key: str
    sex: str
    birth_year: int | None
    eyes: tuple[PastEye, ...]
    visits: tuple[PastVisit, ...]
    age_90_or_over: bool = False
    statuses: tuple[Values, ...] = ()
    patient: Patient | None = None


@dataclass(frozen=True)
class PastFile:
    """The file the visits come from: columns of IntakeFile."""

    sha256: str
    label: str
    rows: int
    cells_refused: int
    assumed: tuple[str, ...]
