"""The invented clinic, once loaded: nothing of it is lost, and it says what it should."""

import datetime as dt
from collections.abc import Iterator

import pytest
from django.db import transaction
from pytest_django import DjangoDbBlocker

from clinic.exchange.demo.generate import demo_rows
from clinic.exchange.demo.load import DemoLoaded, demo_load
from clinic.models import (
    Answer,
    ContactEntry,
    Course,
    Entry,
    Eye,
    EyeEvent,
    EyeNow,
    History,
    Measured,
    Membership,
    Patient,
    PatientStatus,
    PersonFact,
    Plan,
    Review,
    Scanner,
    Treated,
    User,
    Visit,
)
from clinic.selectors.adopted import adopted_for
from clinic.selectors.judged import judge
from clinic.services.projection import differing
from clinic.services.reviews import changed, newest_reviews

pytestmark = pytest.mark.django_db
TODAY = dt.date(2026, 3, 7)
AT = dt.datetime(2026, 3, 7, 7, 30, tzinfo=dt.UTC)


@pytest.fixture(scope="module", autouse=True)
def loaded(django_db_setup: None, django_db_blocker: DjangoDbBlocker) -> Iterator[DemoLoaded]:
    """Load once for the module and roll back after it: loading takes seconds."""
    with django_db_blocker.unblock(), transaction.atomic():
        yield demo_load(today=TODAY, at=AT)
        transaction.set_rollback(True)


def test_every_row_of_the_generator_is_stored(loaded: DemoLoaded) -> None:
    rows = demo_rows(TODAY)
    visits = [visit for person in rows.people for visit in person.visits]
    eyes = [eye for visit in visits for eye in visit.eyes]
    assert Patient.objects.count() == len(rows.people)
    assert Visit.objects.exclude(kind="contact").count() == len(visits)
    assert Measured.objects.filter(rev=1).count() == sum(eye.measured is not None for eye in eyes)
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


def test_the_projection_and_the_reviews_equal_what_the_log_gives(loaded: DemoLoaded) -> None:
    patients = list(Patient.objects.select_related("site").order_by("pk"))
    assert EyeNow.objects.count() == Eye.objects.count()
    assert differing(patients) == []
    for site in loaded.sites.values():
        here = [patient for patient in patients if patient.site_id == site.pk]
        newest = newest_reviews([patient.pk for patient in here])
        reviewed = {(row.visit_id, row.eye_id) for row in newest.values()}
        found = judge(here, TODAY, lambda place, r=reviewed: (place.visit_id, place.eye_id) in r)
        assert len(found) == len(newest) > 20
        assert changed(found, newest) == []


def test_the_general_set_is_adopted_and_the_answers_stand(loaded: DemoLoaded) -> None:
    for site in loaded.sites.values():
        found = adopted_for(site)[""]
        assert found.limits.name == "general"
        assert "Tomas Verrill" in found.words
    kinds = set(Answer.objects.values_list("answer", flat=True))
    assert kinds == {"acting", "not_acting", "look_again"}
    eye = loaded.patients["steroid"].eyes.get()
    item = next(item for item in eye.now.open_items if item.get("rule") == "pressure")
    assert (item["answer"], item["stands"]) == ("acting", True)


def test_one_scan_was_corrected_with_a_reason(loaded: DemoLoaded) -> None:
    row = Measured.objects.get(rev=2)
    before = Measured.objects.get(visit=row.visit, eye=row.eye, rev=1)
    assert row.change == "correction"
    assert row.reason
    assert row.cst_um != before.cst_um
    assert row.acuity == before.acuity


def test_the_alarm_stands_first_and_open(loaded: DemoLoaded) -> None:
    now = loaded.patients["called"].eyes.get().now
    assert now.open_top_rank == "raise_first"
    assert now.open_items[0]["rule"] == "alarm_symptoms"
    assert now.open_items[0]["alarm"] is True
    assert now.booked_day == TODAY
    # The call takes nothing away of what the visit before it said.
    assert now.reading
    assert now.open_items[-1]["counts"]["limit_not_reached"] > 0


def test_each_patient_has_a_ledger_entry(loaded: DemoLoaded) -> None:
    chains = set(Entry.objects.filter(action="demo").values_list("chain__name", flat=True))
    assert {f"patient:{patient.code}" for patient in loaded.patients.values()} <= chains
    assert {"site:harbour", "site:moorland"} <= chains


def test_most_people_were_asked_what_bears_on_a_treatment_and_some_never(
    loaded: DemoLoaded,
) -> None:
    asked = set(PersonFact.objects.values_list("patient_id", flat=True))
    never = {patient.pk for patient in loaded.patients.values()} - asked
    assert len(asked) > len(never) > 0
    stroke = PersonFact.objects.get(kind="stroke")
    assert stroke.patient == loaded.patients["longest"]
    last = Review.objects.filter(eye__patient=stroke.patient).order_by("-visit__day", "-seq")[0]
    # Sixty days before the visit is within six months: raised, or not where nothing was planned.
    assert last.outcomes["treatment_context"] in {"raised", "does_not_apply"}
    raised = Review.objects.filter(eye__patient=stroke.patient, visit__day=stroke.day)
    assert "raised" in {one.outcomes["treatment_context"] for one in raised}
