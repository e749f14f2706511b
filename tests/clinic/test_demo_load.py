"""Loading the invented clinic: whole, into an empty database only."""

import datetime as dt

import pytest

from clinic.exchange.demo import load
from clinic.exchange.demo.generate import demo_rows
from clinic.exchange.demo.load import DemoLoaded, DemoRefused, demo_load
from clinic.models import (
    ContactEntry,
    Course,
    Entry,
    EyeEvent,
    History,
    Measured,
    Membership,
    Patient,
    PatientStatus,
    Plan,
    Scanner,
    Site,
    Treated,
    User,
    Visit,
)

pytestmark = pytest.mark.django_db
TODAY = dt.date(2026, 3, 7)
AT = dt.datetime(2026, 3, 7, 7, 30, tzinfo=dt.UTC)


@pytest.fixture
def loaded() -> DemoLoaded:
    return demo_load(today=TODAY, at=AT)


def test_every_row_of_the_generator_is_stored(loaded: DemoLoaded) -> None:
    rows = demo_rows(TODAY)
    visits = [visit for person in rows.people for visit in person.visits]
    eyes = [eye for visit in visits for eye in visit.eyes]
    assert Patient.objects.count() == len(rows.people)
    assert Visit.objects.exclude(kind="contact").count() == len(visits)
    assert Measured.objects.count() == sum(eye.measured is not None for eye in eyes)
    assert Treated.objects.count() == sum(eye.treated is not None for eye in eyes)
    assert Plan.objects.count() == sum(len(person.plans) for person in rows.people)
    assert ContactEntry.objects.count() == 1
    assert Scanner.objects.count() == 3
    assert PatientStatus.objects.count() == 2


def test_one_invented_person_of_each_role_can_be_given_a_password(loaded: DemoLoaded) -> None:
    roles = {(m.user.username, m.role) for m in Membership.objects.select_related("user")}
    assert {role for _, role in roles} == {"recorder", "clinician", "steward", "reader"}
    assert not any(user.has_usable_password() for user in User.objects.all())
    assert set(loaded.users) == set(User.objects.values_list("username", flat=True))


def test_an_eye_without_history_has_no_history_row_and_a_new_one_says_so(
    loaded: DemoLoaded,
) -> None:
    arrivals = {
        (person.key, eye.side): eye.arrival
        for person in demo_rows(TODAY).people
        for eye in person.eyes
    }
    for (key, side), arrival in arrivals.items():
        row = History.objects.filter(eye__patient=loaded.patients[key], eye__side=side).first()
        assert (row is None) == (arrival == "history_missing")
        assert row is None or row.new_eye == (arrival == "new")


def test_courses_and_events_are_stored_with_their_eyes(loaded: DemoLoaded) -> None:
    regimens = set(Course.objects.values_list("regimen", flat=True))
    assert regimens == {"treat_and_extend", "as_needed_stability", "fixed_interval"}
    assert {"lens_surgery", "laser"} <= set(EyeEvent.objects.values_list("kind", flat=True))


def test_letters_and_logmar_are_worked_out_from_what_was_typed(loaded: DemoLoaded) -> None:
    for row in Measured.objects.filter(acuity_notation="etdrs_letters")[:50]:
        # L = 85 - 50 logMAR, so logMAR in ten-thousandths is 17000 - 200 L.
        assert row.letters == int(row.acuity)
        assert row.logmar_e4 == 17000 - 200 * int(row.acuity)
    assert Measured.objects.get(acuity="HM").letters is None


def test_each_patient_has_a_ledger_entry(loaded: DemoLoaded) -> None:
    chains = set(Entry.objects.filter(action="demo").values_list("chain__name", flat=True))
    assert {f"patient:{patient.code}" for patient in loaded.patients.values()} <= chains
    assert {"site:harbour", "site:moorland"} <= chains


@pytest.mark.parametrize("who", ["site", "user"])
def test_the_demo_refuses_a_database_with_anybody_in_it(who: str) -> None:
    if who == "site":
        Site.objects.create(slug="real", label="Real", emergency_text="Ring the desk")
    else:
        User.objects.create_user("somebody", password="not-used-here-1")
    with pytest.raises(DemoRefused, match="never mixed"):
        demo_load(today=TODAY, at=AT)
    assert not Patient.objects.exists()


def test_a_load_that_breaks_off_leaves_nothing_behind(monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(*args: object, **kwargs: object) -> None:
        raise OSError("the disk is full")

    monkeypatch.setattr(load, "people", fails)
    with pytest.raises(OSError, match="full"):
        demo_load(today=TODAY, at=AT)
    assert not Site.objects.exists()
    assert not User.objects.exists()
