"""Storing many past visits at once: computed first, then written in one short transaction.

Used by intake and demo. Everything is built and prepared before the write lock is taken; under it
rows are numbered and inserted, and one ledger row a patient is written. All or nothing.
"""

import datetime as dt
import hashlib
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from django.db import models, transaction

from clinic import codes
from clinic.canonical import canonical_text
from clinic.models import (
    ContactEntry,
    Course,
    Decided,
    Eye,
    EyeEvent,
    EyeState,
    History,
    IntakeFile,
    Measured,
    MoreTreatment,
    NextStep,
    Patient,
    PatientStatus,
    Plan,
    Site,
    Treated,
    User,
    Visit,
)
from clinic.services import ledger
from clinic.services.bulk_insert import Prepared, insert, prepare
from clinic.services.bulk_review import said_of
from clinic.services.past import PastEye, PastEyeVisit, PastFile, PastPerson, PastVisit
from clinic.services.projection import eye_now_refresh
from clinic.services.reviews import review_latest

PARTS: tuple[tuple[str, type[models.Model]], ...] = (
    ("measured", Measured),
    ("decided", Decided),
    ("treated", Treated),
    ("ahead", NextStep),
)
KNOWN_AT_ONCE = 200
# Parents before children: a row can only point to what has its key already.
ORDER: tuple[type[models.Model], ...] = (
    Patient,
    PatientStatus,
    Eye,
    EyeState,
    History,
    EyeEvent,
    Course,
    Visit,
    Measured,
    Decided,
    Treated,
    MoreTreatment,
    NextStep,
    ContactEntry,
    Plan,
)


@dataclass
class Built:
    """Unsaved rows by model, and for each patient what the ledger will say."""

    by: User
    at: dt.datetime
    file: IntakeFile | None = None
    rows: dict[type[models.Model], list[models.Model]] = field(default_factory=dict)
    patients: dict[str, Patient] = field(default_factory=dict)
    digests: dict[str, Any] = field(default_factory=dict)
    visits: int = 0

    def add(self, row: models.Model) -> None:
        """Keep a row for its turn."""
        self.rows.setdefault(type(row), []).append(row)


@dataclass(frozen=True)
class Stored:
    """What was stored: the patient of each key, how many visits, and the file's row if any."""

    patients: dict[str, Patient]
    visits: int
    file: IntakeFile | None


def visits_take_in(
    *,
    site: Site,
    people: Sequence[PastPerson],
    by: User,
    at: dt.datetime,
    action: str,
    file: PastFile | None = None,
    before_commit: Callable[[dict[str, Patient]], None] | None = None,
    today: dt.date,
) -> Stored:
    """Store people with all their past visits, or nothing.

    The newest visit of each new eye is reviewed and the eye projected, both worked out beforehand;
    eyes that were known before are reviewed and projected right after, in a transaction of their
    own. ``before_commit`` is called with the patients while the transaction is still open (the key
    file is written there); if it raises, nothing is stored. Raises ``IntegrityError`` when the file
    was taken in before or a visit of that kind and day exists.
    """
    built = build(site=site, people=people, by=by, at=at, file=file)
    assumed = () if file is None else file.assumed
    said = said_of(
        built.rows, site=site, by=by, at=built.at, today=today, why=action, assumed=assumed
    )
    ready = [prepare(built.rows.get(model, [])) for model in ORDER]
    ready.append(prepare(said.reviews))
    items = ledger_items(built, action)
    with transaction.atomic():
        if built.file is not None:
            built.file.save()
        insert_all(ready)
        insert(prepare(said.eye_now()))
        ledger.record_many(items, by=by, at=at)
        if before_commit is not None:
            before_commit(built.patients)
    review_known(people, by=by, at=built.at, today=today, why=action)
    return Stored(built.patients, built.visits, built.file)


def review_known(
    people: Sequence[PastPerson], *, by: User, at: dt.datetime, today: dt.date, why: str
) -> None:
    """Review the newest visits of people who were enrolled before, and project their eyes anew."""
    known = [person.patient for person in people if person.patient is not None]
    if not known:
        return
    review_latest(patients=known, by=by, at=at, today=today, why=why)
    for start in range(0, len(known), KNOWN_AT_ONCE):
        with transaction.atomic():
            eye_now_refresh(patients=known[start : start + KNOWN_AT_ONCE])


def insert_all(ready: Iterable[Prepared | None]) -> None:
    """Insert what was prepared, parents first."""
    for prepared in ready:
        insert(prepared)


def build(
    *, site: Site, people: Sequence[PastPerson], by: User, at: dt.datetime, file: PastFile | None
) -> Built:
    """Return every row that is to be written, unsaved."""
    built = Built(by, at.replace(microsecond=0))
    if file is not None:
        built.file = IntakeFile(
            site=site,
            sha256=file.sha256,
            label=file.label,
            rows=file.rows,
            visits_stored=sum(len(person.visits) for person in people),
            cells_refused=file.cells_refused,
            assumed=list(file.assumed),
            at=built.at,
            by=by,
        )
    drawn = iter(fresh_codes(sum(person.patient is None for person in people)))
    for person in people:
        patient = person.patient
        if patient is None:
            patient = new_patient(built, site, person, next(drawn))
        built.patients[person.key] = patient
        add_person(built, patient, person)
    return built


def fresh_codes(count: int) -> list[str]:
    """Return codes that no patient of any site has."""
    found: set[str] = set()
    while len(found) < count:
        drawn = {codes.fresh() for _ in range(count - len(found))}
        taken: set[str] = set()
        for some in batches(sorted(drawn), 500):
            taken.update(Patient.objects.filter(code__in=some).values_list("code", flat=True))
        found |= drawn - taken
    return sorted(found)


def batches(items: Sequence[str], size: int) -> Iterable[Sequence[str]]:
    """Return the items in runs of at most ``size``."""
    return (items[start : start + size] for start in range(0, len(items), size))


def new_patient(built: Built, site: Site, person: PastPerson, code: str) -> Patient:
    """Return a patient that is to be enrolled."""
    patient = Patient(
        code=code,
        site=site,
        sex=person.sex,
        birth_year=person.birth_year,
        age_90_or_over=person.age_90_or_over,
        enrolled_at=built.at,
        enrolled_by=built.by,
    )
    built.add(patient)
    return patient


def add_person(built: Built, patient: Patient, person: PastPerson) -> None:
    """Add one person's eyes, visits and plans."""
    stamp = {"at": built.at, "by": built.by}
    for seq, values in enumerate(person.statuses, start=1):
        built.add(PatientStatus(patient=patient, seq=seq, **values, **stamp))
    known = {} if person.patient is None else {eye.side: eye for eye in patient.eyes.all()}
    eyes = {eye.side: add_eye(built, patient, eye, known.get(eye.side)) for eye in person.eyes}
    for visit in person.visits:
        add_visit(built, patient, {**known, **eyes}, visit)
    built.visits += len(person.visits)
    built.digests[person.key] = digest_of(person)


def add_eye(built: Built, patient: Patient, past: PastEye, known: Eye | None) -> Eye:
    """Add one eye with what is known of it; a known eye gets nothing but visits."""
    if known is not None:
        return known
    stamp = {"at": built.at, "by": built.by}
    eye = Eye(patient=patient, side=past.side)
    built.add(eye)
    for seq, values in enumerate(past.states, start=1):
        built.add(EyeState(eye=eye, seq=seq, **values, **stamp))
    if past.history is not None:
        built.add(History(eye=eye, rev=1, **past.history, **stamp))
    for values in past.events:
        built.add(EyeEvent(eye=eye, **values, **stamp))
    for seq, values in enumerate(past.courses, start=1):
        built.add(Course(eye=eye, seq=seq, **values, **stamp))
    for seq, values in enumerate(past.plans, start=1):
        built.add(Plan(eye=eye, seq=seq, **values, **stamp))
    return eye


def add_visit(built: Built, patient: Patient, eyes: dict[str, Eye], past: PastVisit) -> None:
    """Add one visit with the filled parts of each eye."""
    stamp = {"at": built.at, "by": built.by}
    visit = Visit(
        patient=patient,
        day=past.day,
        kind=past.kind,
        entry=past.entry,
        from_intake=built.file,
        **stamp,
    )
    built.add(visit)
    for one in past.eyes:
        add_parts(built, visit, eyes[one.side], one)
    for side, values in past.contact.items():
        built.add(ContactEntry(visit=visit, eye=eyes[side], rev=1, **values, **stamp))


def add_parts(built: Built, visit: Visit, eye: Eye, past: PastEyeVisit) -> None:
    """Add the records of one eye at one visit, each as its first revision."""
    for name, model in PARTS:
        values = getattr(past, name)
        if values is not None:
            row = model(visit=visit, eye=eye, rev=1, at=built.at, by=built.by, **values)
            built.add(row)
            if isinstance(row, Treated):
                for more in past.also_given:
                    built.add(MoreTreatment(treated=row, **more))


def digest_of(person: PastPerson) -> dict[str, Any]:
    """Return what the ledger keeps of one person: counts and a digest, never a value."""
    content = [
        [[eye.side, eye.states, eye.history, eye.events, eye.courses] for eye in person.eyes],
        [
            [
                visit.day,
                visit.kind,
                [
                    [e.side, e.measured, e.decided, e.treated, e.ahead, e.also_given]
                    for e in visit.eyes
                ],
                visit.contact,
            ]
            for visit in person.visits
        ],
    ]
    text = canonical_text(content)
    return {"visits": len(person.visits), "content": hashlib.sha256(text.encode()).hexdigest()}


def ledger_items(built: Built, action: str) -> list[ledger.Item]:
    """Return one ledger row a patient; the file's digest stands in each."""
    source = {} if built.file is None else {"file": built.file.sha256}
    return [
        ledger.Item(built.patients[key], action, payload={**digest, **source})
        for key, digest in built.digests.items()
    ]
