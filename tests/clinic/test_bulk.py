"""Many past visits at once: all or nothing, numbered under the lock, one ledger row a patient."""

import datetime as dt

import pytest
from django.db import IntegrityError, connection

from clinic import codes
from clinic.models import (
    Chain,
    ContactEntry,
    Entry,
    Eye,
    EyeNow,
    EyeState,
    IntakeFile,
    Measured,
    Patient,
    Plan,
    Review,
    Site,
    Treated,
    User,
    Visit,
)
from clinic.services.bulk import Stored, visits_take_in
from clinic.services.past import PastEye, PastEyeVisit, PastFile, PastPerson, PastVisit
from clinic.services.projection import differing

pytestmark = pytest.mark.django_db
TODAY = dt.date(2026, 3, 4)
AT = dt.datetime(2026, 3, 4, 9, 30, tzinfo=dt.UTC)
FILE = PastFile("ab" * 32, "old log", 2, 0, ("one scanner per eye",))


@pytest.fixture
def site() -> Site:
    return Site.objects.create(slug="here", label="Here", emergency_text="Ring the desk")


@pytest.fixture
def by() -> User:
    return User.objects.create_user("odile", password="not-used-here-1")


def person(
    key: str, *days: int, kind: str = "planned", patient: Patient | None = None
) -> PastPerson:
    visits = tuple(
        PastVisit(
            dt.date(2025, 1, day),
            kind,
            0,
            (PastEyeVisit("R", {"cst_um": 400 + day}, None, {"outcome": "nothing"}),),
        )
        for day in days
    )
    eye = PastEye(
        "R",
        states=({"cause": "diabetic", "from_day": dt.date(2025, 1, 1)},),
        plans=({"due_day": dt.date(2025, 3, 1)},),
    )
    return PastPerson(key, "f", 1950, (eye,), visits, patient=patient)


def take_in(site: Site, by: User, *people: PastPerson, file: PastFile | None = FILE) -> Stored:
    return visits_take_in(
        site=site, people=people, by=by, at=AT, today=TODAY, action="intake", file=file
    )


def test_everything_is_stored_and_points_to_its_own_parents(site: Site, by: User) -> None:
    take_in(site, by, person("a", 1, 2), person("b", 3), file=None)
    stored = take_in(site, by, person("c", 4, 5, 6))
    patient = Patient.objects.get(code=stored.patients["c"].code)
    assert codes.fits(patient.code)
    assert [visit.day.day for visit in patient.visits.order_by("day")] == [4, 5, 6]
    scans = Measured.objects.filter(visit__patient=patient).order_by("visit__day")
    assert [scan.cst_um for scan in scans] == [404, 405, 406]
    assert {scan.eye.patient_id for scan in scans} == {patient.pk}
    assert Treated.objects.filter(eye__patient=patient, outcome="nothing").count() == 3
    assert EyeState.objects.get(eye__patient=patient).cause == "diabetic"
    assert Plan.objects.get(eye__patient=patient).due_day == dt.date(2025, 3, 1)
    assert Visit.objects.filter(patient=patient, from_intake=stored.file).count() == 3


def test_a_row_written_by_the_usual_way_afterwards_gets_the_next_key(site: Site, by: User) -> None:
    take_in(site, by, person("a", 1, 2))
    patient = Patient.objects.get()
    visit = Visit.objects.create(patient=patient, day=dt.date(2025, 2, 1), at=AT, by=by)
    assert visit.pk > max(Visit.objects.exclude(pk=visit.pk).values_list("pk", flat=True))


def test_a_known_patient_gets_visits_and_no_second_eye(site: Site, by: User) -> None:
    first = take_in(site, by, person("a", 1))
    again = person("a", 9, patient=first.patients["a"])
    take_in(site, by, again, file=None)
    assert Patient.objects.count() == 1
    assert Eye.objects.count() == 1
    assert EyeState.objects.count() == 1
    assert Visit.objects.count() == 2


def test_one_ledger_row_a_patient_names_the_file_and_no_value(site: Site, by: User) -> None:
    stored = take_in(site, by, person("a", 1, 2), person("b", 3))
    entries = Entry.objects.filter(action="intake")
    assert entries.count() == 2
    entry = entries.get(chain__name=f"patient:{stored.patients['a'].code}")
    assert entry.payload["visits"] == 2
    assert entry.payload["file"] == FILE.sha256
    assert set(entry.payload) == {"visits", "content", "file"}


def test_a_visit_that_is_there_already_leaves_nothing_behind(site: Site, by: User) -> None:
    first = take_in(site, by, person("a", 1), file=None)
    with pytest.raises(IntegrityError):
        take_in(site, by, person("b", 2), person("a", 1, patient=first.patients["a"]))
    connection.check_constraints()
    assert Patient.objects.count() == 1
    assert Visit.objects.count() == 1
    assert not IntakeFile.objects.exists()
    assert Chain.objects.filter(name__startswith="patient:").count() == 1


def test_an_error_before_the_commit_leaves_nothing_behind(site: Site, by: User) -> None:
    def fails(patients: dict[str, Patient]) -> None:
        raise OSError("the disk is full")

    with pytest.raises(OSError, match="full"):
        visits_take_in(
            site=site,
            people=[person("a", 1)],
            by=by,
            at=AT,
            today=TODAY,
            action="intake",
            before_commit=fails,
        )
    assert not Patient.objects.exists()


def test_the_same_file_twice_at_one_site_is_refused(site: Site, by: User) -> None:
    take_in(site, by, person("a", 1))
    with pytest.raises(IntegrityError):
        take_in(site, by, person("b", 1))
    assert Patient.objects.count() == 1


def test_a_later_file_reviews_and_projects_the_people_it_adds_to(site: Site, by: User) -> None:
    first = take_in(site, by, person("a", 1), file=None)
    patient = first.patients["a"]
    assert patient.eyes.get().now.last_visit_day == dt.date(2025, 1, 1)
    take_in(site, by, person("a", 9, patient=patient), file=None)
    assert EyeNow.objects.get().last_visit_day == dt.date(2025, 1, 9)
    assert differing([patient]) == []
    assert Review.objects.filter(visit__day=dt.date(2025, 1, 9)).count() == 1


def test_what_intake_assumed_is_said_in_the_stored_working(site: Site, by: User) -> None:
    alarm = PastVisit(dt.date(2025, 1, 5), "planned", 0, (PastEyeVisit("R", {"symptoms": "pain"}),))
    base = person("a", 1)
    take_in(site, by, PastPerson("a", "f", 1950, base.eyes, (alarm,)))
    row = next(row for row in Review.objects.get().raised if row["rule"] == "alarm_symptoms")
    assert "one scanner per eye" in row["working"]["assumed"]


def test_contacts_are_stored_with_their_eye(site: Site, by: User) -> None:
    call = PastVisit(
        dt.date(2025, 1, 5),
        "contact",
        1,
        (),
        {"R": {"direction": "from_patient", "symptoms": "pain"}},
    )
    base = person("a", 1)
    take_in(site, by, PastPerson("a", "f", 1950, base.eyes, (*base.visits, call)))
    entry = ContactEntry.objects.get()
    assert (entry.symptoms, entry.eye.side, entry.visit.kind) == ("pain", "R", "contact")


def test_what_the_tables_refuse_is_refused_here_too(site: Site, by: User) -> None:
    visit = PastVisit(dt.date(2025, 1, 5), "planned", 0, (PastEyeVisit("R", {"cst_um": 9000}),))
    base = person("a", 1)
    with pytest.raises(IntegrityError):
        take_in(site, by, PastPerson("a", "f", 1950, base.eyes, (visit,)))
