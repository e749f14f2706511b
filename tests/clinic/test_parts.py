"""Saving a part: entries, additions, corrections, taking back, double clicks, two editors."""

import datetime as dt
import uuid

import pytest

from clinic.models import Chain, Decided, Entry, Measured, NextStep, Plan, Review, Visit
from clinic.services import ledger
from clinic.services.parts import (
    Conflict,
    EyePart,
    PartRefused,
    ReasonNeeded,
    part_save,
    part_withdraw,
)
from tests.clinic.at_the_desk import (
    GIVEN,
    NOW,
    SEEN,
    TODAY,
    Desk,
    days_ago,
    eye_of,
    newest_review,
    now_of,
    open_rules,
    posts,
)

pytestmark = pytest.mark.django_db


@pytest.fixture
def desk() -> Desk:
    return Desk()


def test_the_first_saving_is_an_entry_and_filling_blanks_an_addition_without_reason(
    desk: Desk,
) -> None:
    patient = desk.enrol()
    first = desk.save(patient, "measured", TODAY, R=desk.scan(400))
    again = desk.save(patient, "measured", TODAY, R=desk.scan(400, iop_tenths=150))
    assert first.changes == {"R": "entry"}
    assert again.changes == {"R": "addition"}
    rows = list(Measured.objects.order_by("rev").values_list("rev", "change", "reason"))
    assert rows == [(1, "entry", ""), (2, "addition", "")]


def test_a_changed_value_needs_a_reason_and_the_earlier_one_stays(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400))
    with pytest.raises(ReasonNeeded, match="A stored value is being changed"):
        desk.save(patient, "measured", TODAY, R=desk.scan(440))
    saved = desk.save(patient, "measured", TODAY, R=desk.scan(440), reason="typed wrong")
    assert saved.changes == {"R": "correction"}
    rows = Measured.objects.order_by("rev").values_list("cst_um", "reason")
    assert list(rows) == [(400, ""), (440, "typed wrong")]
    assert now_of(patient).cst_um == 440


def test_blanking_a_stored_value_is_a_correction(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400, iop_tenths=150))
    with pytest.raises(ReasonNeeded):
        desk.save(patient, "measured", TODAY, R=desk.scan(400))


def test_a_refused_eye_keeps_the_other_eye_from_being_stored_too(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400))
    before = Entry.objects.count(), posts()
    with pytest.raises(ReasonNeeded):
        desk.save(patient, "measured", TODAY, L=desk.scan(300), R=desk.scan(440))
    assert not Measured.objects.filter(eye__side="L").exists()
    assert (Entry.objects.count(), posts()) == before


def test_saving_the_same_again_stores_no_revision(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400))
    assert desk.save(patient, "measured", TODAY, R=desk.scan(400)).changes == {}
    assert Measured.objects.count() == 1


def test_what_is_taken_back_leaves_the_rules_and_can_be_entered_again(desk: Desk) -> None:
    patient = desk.enrol()
    visit = desk.save(patient, "measured", TODAY, R=desk.scan(400)).visit
    assert visit is not None
    taken = part_withdraw(
        part="measured",
        visit=visit,
        eye=eye_of(patient, "R"),
        reason="another person's scan",
        base_rev=1,
        by=desk.recorder,
        at=NOW,
        today=TODAY,
    )
    assert (taken.rev, taken.change) == (2, "withdrawn")
    assert now_of(patient).cst_um is None
    again = desk.save(patient, "measured", TODAY, R=desk.scan(380))
    assert again.changes == {"R": "entry"}
    assert now_of(patient).cst_um == 380
    assert Measured.objects.count() == 3


def test_taking_back_needs_a_reason_and_something_that_stands(desk: Desk) -> None:
    patient = desk.enrol()
    visit = desk.save(patient, "measured", TODAY, R=desk.scan(400)).visit
    assert visit is not None
    common = {"part": "measured", "visit": visit, "by": desk.recorder, "at": NOW, "today": TODAY}
    with pytest.raises(ReasonNeeded):
        part_withdraw(eye=eye_of(patient, "R"), reason=" ", base_rev=1, **common)
    with pytest.raises(PartRefused, match="nothing to take back"):
        part_withdraw(eye=eye_of(patient, "L"), reason="x", base_rev=0, **common)


def test_the_same_request_stores_once_and_answers_the_same(desk: Desk) -> None:
    patient, request = desk.enrol(), uuid.uuid4()
    first = desk.save(patient, "measured", TODAY, R=desk.scan(400), request_id=request)
    second = desk.save(patient, "measured", TODAY, R=desk.scan(400), request_id=request, base_rev=0)
    assert (first.repeated, second.repeated) == (False, True)
    assert first.visit == second.visit
    assert Measured.objects.count() == Visit.objects.count() == posts() == 1


def test_the_second_of_two_editors_is_refused_and_nothing_of_theirs_is_stored(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400), base_rev=0)
    with pytest.raises(Conflict) as refused:
        desk.save(
            patient, "measured", TODAY, R=desk.scan(410), L=desk.scan(300), base_rev=0, reason="x"
        )
    assert refused.value.sides == ("R",)
    assert list(Measured.objects.values_list("eye__side", "cst_um")) == [("R", 400)]


def test_two_people_may_save_different_parts_of_one_visit(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, R=desk.scan(400))
    desk.save(patient, "decided", TODAY, R={"choice": "treat"}, by=desk.clinician)
    assert Visit.objects.count() == 1
    assert Decided.objects.get().by == desk.clinician


def test_a_visit_tomorrow_is_refused_with_a_sentence(desk: Desk) -> None:
    patient = desk.enrol()
    with pytest.raises(PartRefused, match="has not happened yet") as refused:
        desk.save(patient, "measured", TODAY + dt.timedelta(days=1), R=desk.scan(400))
    assert "2026-03-10" in str(refused.value.allowed)
    assert not Visit.objects.exists()


def test_a_second_visit_of_another_kind_on_one_day_is_ordered_after_the_first(desk: Desk) -> None:
    patient = desk.enrol()
    desk.save(patient, "measured", TODAY, "planned", R=desk.scan(400))
    desk.save(patient, "measured", TODAY, "unscheduled", R=desk.scan(420))
    rows = Visit.objects.order_by("entry").values_list("kind", "entry")
    assert list(rows) == [("planned", 0), ("unscheduled", 1)]
    assert now_of(patient).cst_um == 420


def test_every_write_adds_one_entry_to_the_persons_chain_with_the_rows_digest(desk: Desk) -> None:
    patient = desk.enrol()
    chain = Chain.objects.get(name=f"patient:{patient.code}")
    assert chain.seq == 1
    desk.save(patient, "measured", TODAY, R=desk.scan(400), L=desk.scan(300))
    chain.refresh_from_db()
    assert chain.seq == 2
    entry = Entry.objects.get(chain=chain, seq=2)
    assert entry.action == "measured entry"
    expected = {
        f"Measured:{row.pk}": ledger.row_digest(row) for row in Measured.objects.order_by("pk")
    }
    assert entry.payload["rows"] == expected
    assert len(expected) == 2


def test_a_note_stands_in_the_ledger_by_its_digest_only(desk: Desk) -> None:
    patient = desk.enrol()
    part_save(
        part="measured",
        patient=patient,
        day=TODAY,
        kind="planned",
        eyes={"R": EyePart(desk.scan(400), note="blinks much")},
        request_id=uuid.uuid4(),
        by=desk.recorder,
        at=NOW,
        today=TODAY,
    )
    entry = Entry.objects.get(action="measured entry")
    note = Measured.objects.get().note
    assert note is not None
    assert entry.payload["notes"] == [note.digest]
    assert "blinks" not in str(entry.payload)


def test_a_correction_reviews_later_visits_of_both_eyes(desk: Desk) -> None:
    # Both eyes were last treated on one day, so an alarm in the right raises the left too.
    patient = desk.enrol()
    treated, later = days_ago(28), days_ago(0)
    desk.save(patient, "treated", treated, R=GIVEN, L=GIVEN)
    desk.save(
        patient,
        "measured",
        later,
        R=desk.scan(400, symptoms="pain"),
        L=desk.scan(300, symptoms="none"),
    )
    assert "alarm_symptoms" in open_rules(patient, "L")
    # The right eye was not treated that day after all: the left eye's later review changes.
    desk.save(patient, "treated", treated, R={"outcome": "nothing"}, reason="wrong eye")
    assert "alarm_symptoms" not in open_rules(patient, "L")
    assert "alarm_symptoms" in open_rules(patient, "R")
    assert newest_review(patient, later, "L").why == "after a correction"
    assert newest_review(patient, later, "L").seq == 2


def test_a_correction_leaves_reviews_alone_whose_input_did_not_change(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400))
    desk.save(patient, "treated", days_ago(28), R={**GIVEN, "lot": "A1"})
    desk.save(patient, "measured", TODAY, R=desk.scan(410))
    before = Review.objects.count()
    other_dose = {**GIVEN, "lot": "A1", "dose_ug": 8000}
    desk.save(patient, "treated", days_ago(28), R=other_dose, reason="typed wrong")
    assert Review.objects.count() == before
    other_lot = {**other_dose, "lot": "A2"}
    desk.save(patient, "treated", days_ago(28), R=other_lot, reason="typed wrong")
    assert Review.objects.count() == before + 2


def test_an_earlier_visit_is_not_touched_by_a_later_ones_correction(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400))
    desk.save(patient, "measured", TODAY, R=desk.scan(410))
    desk.save(patient, "measured", TODAY, R=desk.scan(470), reason="typed wrong")
    assert newest_review(patient, days_ago(28)).seq == 1
    assert newest_review(patient, TODAY).seq == 2


def test_a_booking_added_later_to_the_next_part_is_not_lost(desk: Desk) -> None:
    patient = desk.enrol("R")
    ahead = {"due_weeks": 4, "due_day": TODAY + dt.timedelta(weeks=4)}
    desk.save(patient, "next", TODAY, R=ahead)
    booked = TODAY + dt.timedelta(weeks=4, days=1)
    saved = part_save(
        part="next",
        patient=patient,
        day=TODAY,
        kind="planned",
        eyes={
            "R": EyePart(ahead, 1, booking={"booked_day": booked, "booked_time": dt.time(9, 30)})
        },
        request_id=uuid.uuid4(),
        by=desk.recorder,
        at=NOW,
        today=TODAY,
    )
    assert saved.changes == {"R": "booking"}
    assert now_of(patient).booked_day == booked
    assert now_of(patient).due_day == ahead["due_day"]
    assert (NextStep.objects.count(), Plan.objects.count()) == (1, 2)
    assert Entry.objects.filter(action="next booking").count() == 1


def test_saving_the_next_part_again_unchanged_makes_no_second_plan(desk: Desk) -> None:
    patient = desk.enrol("R")
    ahead = {"due_weeks": 4, "due_day": TODAY + dt.timedelta(weeks=4)}
    desk.save(patient, "next", TODAY, R=ahead)
    assert desk.save(patient, "next", TODAY, R=ahead).changes == {}
    assert Plan.objects.count() == 1


def test_an_acuity_and_a_scan_that_did_not_change_raise_nothing(desk: Desk) -> None:
    patient = desk.enrol("R")
    values = desk.scan(400, irf="no", srf="no", iop_tenths=150, symptoms="none", **SEEN)
    desk.save(patient, "measured", days_ago(28), R=values)
    desk.save(patient, "measured", TODAY, R=values)
    assert open_rules(patient) == []
