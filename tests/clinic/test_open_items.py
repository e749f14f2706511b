"""What stays open on an eye: alarms until answered, answers bound to their evidence."""

import datetime as dt

import pytest

from clinic.models import Answer, EyeNow
from clinic.selectors.access import Here
from clinic.selectors.clinic_list import clinic_list
from clinic.services.following import answer_record
from clinic.services.parts import PartRefused
from tests.clinic.at_the_desk import (
    GIVEN,
    NOW,
    TODAY,
    Desk,
    days_ago,
    eye_of,
    item_of,
    now_of,
    open_rules,
)

pytestmark = pytest.mark.django_db


@pytest.fixture
def desk() -> Desk:
    return Desk()


def thicker(desk: Desk) -> object:
    """Return a person whose right eye rose from 400 to 450 µm: 12.5 %, above 10 % and 20 µm."""
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400, iop_tenths=150))
    desk.save(patient, "measured", TODAY, R=desk.scan(450, iop_tenths=150))
    assert "thickening" in open_rules(patient)
    return patient


def test_an_alarm_of_a_call_stays_after_a_later_visit_until_somebody_answers(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "treated", days_ago(11), R=GIVEN)
    desk.call(patient, days_ago(7), "pain+blurred")
    desk.save(patient, "measured", days_ago(1), R=desk.scan(400, symptoms="none"))
    assert "alarm_symptoms" in open_rules(patient)
    assert now_of(patient).open_top_rank == "raise_first"
    desk.answer(patient, "alarm_symptoms", days_ago(7), "contact", "acting")
    assert "alarm_symptoms" not in open_rules(patient)
    assert now_of(patient).open_top_rank != "raise_first"


def test_what_is_no_alarm_goes_with_the_next_measured_visit(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(56), R=desk.scan(400))
    desk.save(patient, "measured", days_ago(28), R=desk.scan(450))
    assert "thickening" in open_rules(patient)
    # 440 after 450 is no rise.
    desk.save(patient, "measured", TODAY, R=desk.scan(440))
    assert "thickening" not in open_rules(patient)


def test_a_call_without_symptoms_leaves_open_what_the_last_visit_raised(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(56), R=desk.scan(400))
    desk.save(patient, "measured", days_ago(28), R=desk.scan(450))
    desk.call(patient, TODAY, "none")
    assert "thickening" in open_rules(patient)


def test_an_answer_stays_when_its_evidence_stays(desk: Desk) -> None:
    patient = thicker(desk)
    desk.answer(patient, "thickening", TODAY, "planned", "not_acting")
    right = desk.scan(450, iop_tenths=160)
    desk.save(patient, "measured", TODAY, R=right, reason="pressure typed wrong")
    item = item_of(patient, "thickening")
    assert (item["answer"], item["stands"]) == ("not_acting", True)
    assert "thickening" not in open_rules(patient)


def test_an_answer_reopens_when_its_evidence_is_corrected(desk: Desk) -> None:
    patient = thicker(desk)
    desk.answer(patient, "thickening", TODAY, "planned", "not_acting")
    right = desk.scan(470, iop_tenths=150)
    desk.save(patient, "measured", TODAY, R=right, reason="thickness typed wrong")
    item = item_of(patient, "thickening")
    assert (item["answer"], item["stands"]) == ("not_acting", False)
    assert "thickening" in open_rules(patient)


def test_an_answer_comes_back_into_force_when_the_correction_is_undone(desk: Desk) -> None:
    patient = thicker(desk)
    desk.answer(patient, "thickening", TODAY, "planned", "not_acting")
    for um, why in ((470, "typed wrong"), (450, "it was right")):
        desk.save(patient, "measured", TODAY, R=desk.scan(um, iop_tenths=150), reason=why)
    assert item_of(patient, "thickening")["stands"]


def test_correcting_the_earlier_scan_reopens_the_answer_to_the_later_visit(desk: Desk) -> None:
    patient = thicker(desk)
    desk.answer(patient, "thickening", TODAY, "planned", "acting")
    # From 405 to 450 µm is 11.1 %: still raised, on other evidence.
    right = desk.scan(405, iop_tenths=150)
    desk.save(patient, "measured", days_ago(28), R=right, reason="typed wrong")
    assert not item_of(patient, "thickening")["stands"]


def test_the_newest_answer_counts_and_the_earlier_ones_stay(desk: Desk) -> None:
    patient = thicker(desk)
    for answer in ("not_acting", "acting"):
        desk.answer(patient, "thickening", TODAY, "planned", answer)
    assert item_of(patient, "thickening")["answer"] == "acting"
    assert Answer.objects.count() == 2


def test_what_is_not_raised_cannot_be_answered(desk: Desk) -> None:
    patient = thicker(desk)
    with pytest.raises(PartRefused, match="isn't raised any more"):
        desk.answer(patient, "pressure", TODAY, "planned", "acting")


def again(desk: Desk, patient: object, rule: str, kind: str, on: dt.date | None) -> None:
    answer_record(
        visit=patient.visits.get(day=TODAY, kind=kind),
        eye=eye_of(patient, "R"),
        rule=rule,
        answer="look_again",
        look_again_on=on,
        by=desk.clinician,
        at=NOW,
        today=TODAY,
    )


def test_look_again_is_refused_for_an_alarm(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.call(patient, TODAY, "pain")
    with pytest.raises(PartRefused, match="can't be put off"):
        again(desk, patient, "alarm_symptoms", "contact", TODAY + dt.timedelta(days=7))
    assert not Answer.objects.exists()


@pytest.mark.parametrize("on", [None, TODAY, days_ago(1)])
def test_look_again_needs_a_day_to_come(desk: Desk, on: dt.date | None) -> None:
    patient = thicker(desk)
    with pytest.raises(PartRefused, match="when this comes back"):
        again(desk, patient, "thickening", "planned", on)


def test_look_again_is_closed_until_its_day_and_open_from_then_on(desk: Desk) -> None:
    patient = thicker(desk)
    back = TODAY + dt.timedelta(days=14)
    again(desk, patient, "thickening", "planned", back)
    desk.plan(patient, booked_day=back)
    here = Here(desk.site, desk.reader)

    def is_open(shown: dt.date, today: dt.date) -> bool:
        block = next(one for one in clinic_list(here, shown, today).blocks)
        item = next(one for one in block.eyes[0].raised if one.rule == "thickening")
        return item.is_open

    assert not is_open(TODAY, TODAY)
    # The list of that day, looked at the evening before, shows it open already.
    assert is_open(back, back - dt.timedelta(days=1))
    assert is_open(back, back)
    assert is_open(back, back + dt.timedelta(days=1))


def test_look_again_ends_when_worse_evidence_comes(desk: Desk) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(56), R=desk.scan(400))
    desk.save(patient, "measured", days_ago(28), R=desk.scan(450))
    answer_record(
        visit=patient.visits.get(day=days_ago(28)),
        eye=eye_of(patient, "R"),
        rule="thickening",
        answer="look_again",
        look_again_on=TODAY + dt.timedelta(days=60),
        by=desk.clinician,
        at=NOW,
        today=TODAY,
    )
    assert "thickening" not in open_rules(patient)
    # 510 after 450 µm: 13.3 %.
    desk.save(patient, "measured", TODAY, R=desk.scan(510))
    assert "thickening" in open_rules(patient)


def test_only_the_floor_is_raised_without_an_adopted_set() -> None:
    desk = Desk(adopt=False)
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400, iop_tenths=150))
    desk.save(patient, "measured", TODAY, R=desk.scan(450, iop_tenths=310, symptoms="pain"))
    assert sorted(open_rules(patient)) == ["alarm_symptoms", "pressure"]
    assert EyeNow.objects.get().open_top_rank == "raise_first"
