"""Plans, closing a day, lateness, who is on no list, adoption, and the projection."""

import datetime as dt

import pytest
from django.core.management import CommandError, call_command
from django.db import connection
from django.test.utils import CaptureQueriesContext

from clinic.models import (
    Adoption,
    AdoptionConfirmed,
    ClinicDay,
    Entry,
    EyeNow,
    Patient,
    Plan,
    Review,
)
from clinic.selectors.access import Here
from clinic.selectors.clinic_list import clinic_list
from clinic.selectors.following import awaiting, gone_quiet
from clinic.services.following import day_close, tick_set
from clinic.services.limit_sets import (
    AdoptionRefused,
    adoption_confirm,
    adoption_propose,
    from_memory,
    limit_set_seed,
)
from clinic.services.patients import patient_status_record
from tests.clinic.at_the_desk import (
    GIVEN,
    NOW,
    TODAY,
    Desk,
    days_ago,
    eye_of,
    newest_review,
    now_of,
    open_rules,
    signed_in,
)
from trends.limits import shipped

pytestmark = pytest.mark.django_db


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def here(desk: Desk) -> Here:
    return Here(desk.site, desk.reader)


def due(desk: Desk, visit_days: int, due_days: int) -> Patient:
    """Return a person seen some days ago whose right eye was then due some days ago."""
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(visit_days), R=desk.scan(400))
    desk.save(patient, "treated", days_ago(visit_days), R=GIVEN)
    desk.save(patient, "next", days_ago(visit_days), R={"due_day": days_ago(due_days)})
    return patient


def test_lateness_counts_from_the_first_due_day_however_often_it_is_rebooked(
    desk: Desk, here: Here
) -> None:
    patient = due(desk, 60, 20)
    for later in (10, 5, -3):
        desk.plan(patient, due_day=days_ago(later), booked_day=days_ago(later))
    assert now_of(patient).due_day == days_ago(20)
    assert now_of(patient).booked_day == days_ago(-3)
    quiet = gone_quiet(here, TODAY)
    assert [row.days_late for row in quiet] == [20]
    # Yesterday, the last day that is over, was the 19th day past due.
    assert any("19 days" in sentence for sentence in quiet[0].sentences)


def test_an_attended_visit_starts_a_new_lateness(desk: Desk) -> None:
    patient = due(desk, 60, 20)
    desk.save(patient, "measured", days_ago(2), R=desk.scan(400))
    assert now_of(patient).due_day is None
    desk.save(patient, "next", days_ago(2), R={"due_day": days_ago(-28)})
    assert now_of(patient).due_day == days_ago(-28)


def test_a_call_is_no_visit_and_leaves_lateness_as_it_was(desk: Desk) -> None:
    patient = due(desk, 60, 20)
    desk.call(patient, days_ago(1), "none")
    assert now_of(patient).due_day == days_ago(20)
    assert now_of(patient).last_visit_day == days_ago(60)


def test_closing_a_day_keeps_due_days_and_ends_the_booking(desk: Desk, here: Here) -> None:
    patient = due(desk, 28, 0)
    desk.plan(patient, due_day=TODAY, booked_day=TODAY, planned_agent="aflibercept")
    day_close(site=desk.site, day=TODAY, absent=[eye_of(patient, "R")], by=desk.recorder, at=NOW)
    now = now_of(patient)
    assert (now.due_day, now.booked_day, now.planned_agent) == (TODAY, None, "aflibercept")
    assert Plan.objects.order_by("-seq")[0].attendance == "did_not_come"
    assert ClinicDay.objects.get().state == "closed"
    assert Entry.objects.filter(action__in=["did not come", "day closed"]).count() == 2
    assert any(row.now.eye.patient == patient for row in gone_quiet(here, TODAY))


@pytest.mark.parametrize("status", ["died", "moved"])
def test_who_died_or_moved_is_on_no_list_and_comes_back_when_active(
    desk: Desk, here: Here, status: str
) -> None:
    patient = due(desk, 60, 20)
    desk.save(patient, "measured", days_ago(59), "unscheduled", R=desk.scan(400))
    desk.plan(patient, booked_day=TODAY)

    def lists() -> list[bool]:
        return [
            bool(clinic_list(here, TODAY, TODAY).blocks),
            bool(gone_quiet(here, TODAY)),
            bool(awaiting(here, TODAY)),
        ]

    common = {"patient": patient, "from_day": TODAY, "reason": "", "by": desk.recorder, "at": NOW}
    assert lists() == [True, True, True]
    patient_status_record(status=status, **common)
    assert lists() == [False, False, False]
    patient_status_record(status="active", **common)
    assert lists() == [True, True, True]


def test_a_tick_is_kept_and_taken_back_as_rows_of_its_own(desk: Desk, here: Here) -> None:
    patient = due(desk, 60, 20)
    desk.plan(patient, booked_day=TODAY)
    for ticked in (True, False, True):
        tick_set(patient=patient, day=TODAY, ticked=ticked, by=desk.recorder, at=NOW)
        assert clinic_list(here, TODAY, TODAY).blocks[0].ticked is ticked
    assert Entry.objects.filter(action="list ticked").count() == 3


def proposed(desk: Desk) -> Adoption:
    row = next(one for one in limit_set_seed(at=NOW) if one.name == "general")
    return adoption_propose(site=desk.site, limit_set=row, by=desk.steward, at=NOW)


def confirm(adoption: Adoption, by: object, ticked: list[str]) -> AdoptionConfirmed:
    return adoption_confirm(adoption=adoption, ticked=ticked, by=by, at=NOW, today=TODAY)


def test_adoption_needs_every_value_from_memory_ticked() -> None:
    desk = Desk(adopt=False)
    adoption, ticks = proposed(desk), from_memory(shipped("general"))
    assert len(ticks) > 1
    for lacking in ticks:
        with pytest.raises(AdoptionRefused, match="A number from memory may be wrong"):
            confirm(adoption, desk.clinician, [one for one in ticks if one != lacking])
    assert not AdoptionConfirmed.objects.exists()
    assert confirm(adoption, desk.clinician, ticks).ticked == sorted(ticks)


@pytest.mark.parametrize("role", ["steward", "recorder", "reader"])
def test_adoption_needs_a_clinicians_own_account(role: str) -> None:
    desk = Desk(adopt=False)
    with pytest.raises(AdoptionRefused, match="A clinician answers for the limits"):
        confirm(proposed(desk), getattr(desk, role), from_memory(shipped("general")))


def test_a_clinician_of_another_clinic_cannot_confirm() -> None:
    desk, away = Desk(adopt=False), Desk("moorland", adopt=False)
    with pytest.raises(AdoptionRefused, match="a clinician of this clinic"):
        confirm(proposed(desk), away.clinician, from_memory(shipped("general")))


def test_adoption_reviews_the_latest_visit_only() -> None:
    desk = Desk(adopt=False)
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400))
    desk.save(patient, "measured", TODAY, R=desk.scan(450))
    assert open_rules(patient) == []
    confirm(proposed(desk), desk.clinician, from_memory(shipped("general")))
    assert "thickening" in open_rules(patient)
    assert newest_review(patient, TODAY).limit_set_name == "general 1"
    assert newest_review(patient, TODAY).why == "limit set adopted"
    assert newest_review(patient, days_ago(28)).seq == 1
    assert Review.objects.filter(limit_set_digest="").count() == 2


def test_a_proposal_alone_is_not_in_force() -> None:
    desk = Desk(adopt=False)
    proposed(desk)
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400))
    desk.save(patient, "measured", TODAY, R=desk.scan(450))
    assert open_rules(patient) == []


def test_the_projection_equals_the_log_after_all_kinds_of_writes(desk: Desk) -> None:
    patient = due(desk, 60, 20)
    other = desk.enrol()
    desk.plan(patient, due_day=days_ago(1), booked_day=TODAY, booked_time=dt.time(9, 30))
    desk.save(patient, "measured", TODAY, R=desk.scan(450, iop_tenths=310))
    desk.answer(patient, "pressure", TODAY, "planned", "acting")
    desk.save(patient, "decided", TODAY, R={"choice": "treat"}, by=desk.clinician)
    desk.save(patient, "measured", TODAY, R=desk.scan(440), reason="typed wrong")
    desk.call(other, TODAY, "pain", "R", "L")
    day_close(site=desk.site, day=TODAY, absent=[eye_of(other, "L")], by=desk.recorder, at=NOW)
    patient_status_record(
        patient=other, status="moved", from_day=TODAY, reason="", by=desk.recorder, at=NOW
    )
    call_command("rebuild_eye_now", "--check")


def test_a_projection_that_differs_from_the_log_is_found_and_rebuilt(desk: Desk) -> None:
    patient = due(desk, 60, 20)
    EyeNow.objects.filter(eye__patient=patient).update(cst_um=999)
    with pytest.raises(CommandError, match="1 eyes differ"):
        call_command("rebuild_eye_now", "--check")
    call_command("rebuild_eye_now")
    call_command("rebuild_eye_now", "--check")
    assert now_of(patient).cst_um == 400


def queries_of(desk: Desk, path: str) -> int:
    client = signed_in(desk.reader)
    client.get(path)
    with CaptureQueriesContext(
        connection,
    ) as seen:
        assert client.get(path).status_code == 200
    return len(seen)


def test_each_list_takes_as_many_queries_for_a_hundred_people_as_for_ten(desk: Desk) -> None:
    day = TODAY.isoformat()
    lists = (f"list/{day}/", "gone-quiet/", "awaiting/", "contacts/")
    screens = [f"/s/harbour/{one}" for one in lists]

    def more(count: int) -> None:
        for _ in range(count):
            patient = desk.enrol("R")
            desk.call(patient, days_ago(30), "floaters:gone")
            desk.plan(patient, due_day=TODAY, booked_day=TODAY, planned_agent="faricimab")

    more(10)
    few = [queries_of(desk, path) for path in screens]
    more(90)
    assert len(clinic_list(Here(desk.site, desk.reader), TODAY, TODAY).blocks) == 100
    assert [queries_of(desk, path) for path in screens] == few


def test_saving_a_part_takes_as_many_queries_with_thirty_visits_as_with_three(desk: Desk) -> None:
    patient = desk.enrol()

    def saved(visits: range) -> int:
        for number in visits:
            values = desk.scan(400 + number)
            with CaptureQueriesContext(connection) as seen:
                desk.save(patient, "measured", days_ago(290 - 8 * number), R=values, L=values)
        return len(seen)

    assert saved(range(3)) == saved(range(3, 30))
