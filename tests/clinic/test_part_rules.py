"""What a part may hold behind the forms, and what a booking or a blank eye comes to."""

import datetime as dt
import uuid

import pytest

from clinic.models import Measured, NextStep, Plan, PostedPart, Scanner, Visit
from clinic.services.parts import Conflict, EyePart, PartRefused, ReasonNeeded, part_withdraw
from tests.clinic.a_clinic import ACUITY, TODAY, Clinic, eye_of, weeks_ago

pytestmark = pytest.mark.django_db
LATER = TODAY + dt.timedelta(weeks=6)
LAST = TODAY + dt.timedelta(weeks=16)


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


@pytest.mark.parametrize(
    "part,values,what",
    [
        ("measured", {"cst_um": 49}, "CST"),
        ("measured", {"cst_um": 1501}, "CST"),
        ("measured", {"iop_tenths": 801}, "IOP"),
        ("measured", {"irf": "maybe"}, "irf"),
        ("measured", {"oct_class": "XX"}, "oct class"),
        ("measured", {"symptoms": "sore"}, "symptoms"),
        ("measured", {"symptoms": "pain", "symptoms_onset": LATER}, "symptoms since"),
        ("measured", {**ACUITY, "acuity": "101"}, "acuity"),
        ("measured", {**ACUITY, "acuity_notation": ""}, "acuity"),
        ("decided", {"choice": "guess"}, "decision"),
        ("decided", {"choice": "interval", "interval_weeks": 105}, "interval"),
        ("treated", {"outcome": "given"}, "treatment"),
        ("treated", {"outcome": "nothing", "agent": "aflibercept"}, "treatment"),
        ("treated", {"outcome": "not_given"}, "why not given"),
        ("treated", {"outcome": "given", "agent": "aflibercept", "dose_ug": 25001}, "dose"),
        ("treated", {"outcome": "nothing", "iop_after_tenths": 801}, "IOP after"),
        ("next", {"due_weeks": 0}, "due in weeks"),
        ("next", {"due_day": TODAY}, "due day"),
        ("contact", {"direction": "sideways"}, "who called"),
    ],
)
def test_what_cannot_be_is_refused_and_nothing_is_stored(
    clinic: Clinic, part: str, values: dict[str, object], what: str
) -> None:
    patient = clinic.enrol("R")
    kind = "contact" if part == "contact" else "planned"
    with pytest.raises(PartRefused) as refused:
        clinic.save(part, patient, TODAY, kind, R=values)
    assert refused.value.what.startswith(what)
    assert not Visit.objects.exists()
    assert not PostedPart.objects.filter(visit__isnull=False).exists()


@pytest.mark.parametrize("um", [50, 1500])
def test_the_ends_of_the_range_are_taken(clinic: Clinic, um: int) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, TODAY, R=clinic.scan(um))
    assert Measured.objects.get().cst_um == um


def test_another_clinics_scanner_is_refused(clinic: Clinic) -> None:
    away = Clinic("away")
    patient = clinic.enrol("R")
    with pytest.raises(PartRefused, match="no such scanner"):
        clinic.save("measured", patient, TODAY, R=clinic.scan(400, scanner_id=away.scanner.pk))


def test_the_class_is_the_scanners_own_whatever_was_posted(clinic: Clinic) -> None:
    swept = Scanner.objects.create(site=clinic.site, label="Room 2", oct_class="SS")
    patient = clinic.enrol("R")
    clinic.save("measured", patient, TODAY, R=clinic.scan(400, scanner_id=swept.pk))
    stored = Measured.objects.get()
    assert (stored.scanner_label, stored.oct_class) == ("Room 2", "SS")


def test_letters_follow_from_what_was_typed_whatever_was_posted(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    # 20/40 is V = 0.5, logMAR 0.3010, snapped to the line 0.30: 85 - 15 = 70 letters.
    typed = {"acuity": "20/40", "acuity_notation": "snellen_ft", "acuity_chart": "snellen"}
    clinic.save("measured", patient, TODAY, R={**typed, "letters": 3, "logmar_e4": 1})
    stored = Measured.objects.get()
    assert (stored.letters, stored.logmar_e4) == (70, 3000)


@pytest.mark.parametrize(
    "side,part,kind",
    [
        ("L", "measured", "planned"),
        ("R", "dreamed", "planned"),
        ("R", "measured", "sometimes"),
    ],
)
def test_an_eye_part_or_kind_that_is_not_there_is_refused(
    clinic: Clinic, side: str, part: str, kind: str
) -> None:
    patient = clinic.enrol("R")
    with pytest.raises(PartRefused):
        clinic.save(part, patient, TODAY, kind, **{side: {"cst_um": 400}})
    assert not Visit.objects.exists()


def test_a_pressure_of_zero_is_a_value_and_changing_it_a_correction(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, TODAY, R={"iop_tenths": 0})
    with pytest.raises(ReasonNeeded):
        clinic.save("measured", patient, TODAY, R=EyePart({"iop_tenths": 150}, base_rev=1))


def test_a_blank_eye_leaves_no_row_beside_a_filled_one(clinic: Clinic) -> None:
    patient = clinic.enrol()
    saved = clinic.save("measured", patient, TODAY, R=clinic.scan(400), L={"cst_um": None})
    assert saved.changes == {"R": "entry"}
    assert Measured.objects.count() == 1


def test_a_second_acuity_posted_again_changes_nothing(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    more = {k: v for k, v in ACUITY.items() if k != "acuity_correction"}
    children = {"more_acuities": [{**more, "acuity": "60"}]}
    clinic.save("measured", patient, TODAY, R=EyePart(ACUITY, children=children))
    again = EyePart(ACUITY, base_rev=1, children=children)
    assert clinic.save("measured", patient, TODAY, R=again).changes == {}
    without = EyePart(ACUITY, base_rev=1)
    with pytest.raises(ReasonNeeded):
        clinic.save("measured", patient, TODAY, R=without)


def test_a_note_too_long_is_refused(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    with pytest.raises(PartRefused, match="280"):
        clinic.save("measured", patient, TODAY, R=EyePart(clinic.scan(400), note="x" * 281))


def test_another_persons_request_is_not_answered(clinic: Clinic) -> None:
    mine, other = clinic.enrol("R"), Clinic("away")
    theirs, request = other.enrol("R"), uuid.uuid4()
    other.save("measured", theirs, TODAY, R=other.scan(400), request_id=request)
    with pytest.raises(PartRefused, match="used before"):
        clinic.save("measured", mine, TODAY, R=clinic.scan(300), request_id=request)
    assert Measured.objects.count() == 1


def test_taking_back_an_older_revision_is_a_conflict(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    saved = clinic.save("measured", patient, TODAY, R=clinic.scan(400))
    clinic.save("measured", patient, TODAY, R=EyePart(clinic.scan(400, irf="no"), base_rev=1))
    assert saved.visit is not None
    back = {"part": "measured", "visit": saved.visit, "eye": eye_of(patient), "reason": "wrong"}
    with pytest.raises(Conflict):
        part_withdraw(**back, base_rev=1, **clinic.who())
    assert part_withdraw(**back, base_rev=2, **clinic.who()).rev == 3
    with pytest.raises(PartRefused, match="nothing to take back"):
        part_withdraw(**back, base_rev=3, **clinic.who())


def due(clinic: Clinic, patient: object) -> dt.date | None:
    now = eye_of(patient).now  # type: ignore[arg-type]
    return now.due_day


def test_correcting_the_next_part_moves_the_due_day(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("next", patient, TODAY, R={"due_weeks": 16, "due_day": LAST})
    right = EyePart({"due_weeks": 6, "due_day": LATER}, base_rev=1)
    clinic.save("next", patient, TODAY, R=right, reason="typed wrong")
    assert due(clinic, patient) == LATER


def test_taking_the_next_part_back_takes_the_due_day_back_and_keeps_the_booking(
    clinic: Clinic,
) -> None:
    patient = clinic.enrol("R")
    typed = EyePart({"due_day": LATER}, booking={"booked_day": LATER})
    saved = clinic.save("next", patient, TODAY, R=typed)
    assert saved.visit is not None
    part_withdraw(
        part="next",
        visit=saved.visit,
        eye=eye_of(patient),
        reason="wrong eye",
        base_rev=1,
        **clinic.who(),
    )
    assert due(clinic, patient) is None
    assert eye_of(patient).now.booked_day == LATER


def test_a_booking_alone_is_stored_without_a_new_revision(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("next", patient, TODAY, R=EyePart({"due_day": LATER}))
    typed = EyePart({"due_day": LATER}, base_rev=1, booking={"booked_day": LATER})
    assert clinic.save("next", patient, TODAY, R=typed).changes == {"R": "booking"}
    assert clinic.save("next", patient, TODAY, R=typed).changes == {}
    assert NextStep.objects.count() == 1
    assert eye_of(patient).now.booked_day == LATER
    assert due(clinic, patient) == LATER


def test_an_earlier_booking_survives_a_new_due_day(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    typed = EyePart({"due_day": LAST}, booking={"booked_day": LATER, "booked_time": dt.time(9, 30)})
    clinic.save("next", patient, weeks_ago(4), R=typed)
    clinic.save("next", patient, TODAY, R={"due_day": LAST})
    now = eye_of(patient).now
    assert (now.booked_day, now.booked_time) == (LATER, dt.time(9, 30))


def test_a_booking_cleared_on_the_sheet_is_gone(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    typed = EyePart({"due_day": LAST}, booking={"booked_day": LATER})
    clinic.save("next", patient, TODAY, R=typed)
    cleared = EyePart({"due_day": LAST}, base_rev=1, booking={"booked_day": None})
    clinic.save("next", patient, TODAY, R=cleared)
    assert eye_of(patient).now.booked_day is None


def test_a_visit_entered_late_leaves_the_newer_plan_alone(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    typed = EyePart({"due_day": LATER, "planned_agent": "faricimab"}, booking={"booked_day": LATER})
    clinic.save("next", patient, TODAY, R=typed)
    clinic.save("next", patient, weeks_ago(8), R={"due_day": weeks_ago(2)})
    now = eye_of(patient).now
    assert (now.due_day, now.booked_day, now.planned_agent) == (LATER, LATER, "faricimab")
    assert Plan.objects.count() == 1
