"""Rows become columns: what several values at a visit come to, and what a digest covers."""

import datetime as dt

import pytest

from clinic import adapters
from clinic.models import Patient
from clinic.services.parts import EyePart
from clinic.services.patients import eye_event_record, history_record
from tests.clinic.a_clinic import ACUITY, Clinic, eye_of, weeks_ago
from trends.visits import MISSING

pytestmark = pytest.mark.django_db


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


def letters(patient: Patient) -> list[int]:
    return adapters.load([patient]).visits.letters.tolist()


def acuity(letters: int, correction: str) -> dict[str, object]:
    return {
        **ACUITY,
        "acuity": str(letters),
        "letters": letters,
        "logmar_e4": 17000 - 200 * letters,
        "acuity_correction": correction,
    }


def two(first: dict[str, object], second: dict[str, object]) -> EyePart:
    return EyePart(first, children={"more_acuities": [second]})


def test_of_two_first_acuities_the_best_corrected_counts(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    typed = two(acuity(60, "none"), acuity(72, "refracted"))
    clinic.save("measured", patient, weeks_ago(1), R=typed)
    assert letters(patient) == [72]


def test_of_two_later_acuities_the_one_like_the_last_counts(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, weeks_ago(8), R=acuity(70, "glasses"))
    typed = two(acuity(75, "refracted"), acuity(66, "glasses"))
    clinic.save("measured", patient, weeks_ago(1), R=typed)
    assert letters(patient) == [70, 66]


def test_the_acuity_that_counts_is_shown_as_it_was_entered(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    typed = two(acuity(60, "none"), acuity(72, "refracted"))
    clinic.save("measured", patient, weeks_ago(1), R=typed)
    assert eye_of(patient).now.acuity_shown == "72 etdrs_letters"


def test_of_two_pressures_the_highest_counts(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    more = {"more_pressures": [{"iop_tenths": 310, "iop_method": "non_contact"}]}
    typed = EyePart({"iop_tenths": 240, "iop_method": "applanation"}, children=more)
    clinic.save("measured", patient, weeks_ago(1), R=typed)
    loaded = adapters.load([patient])
    assert loaded.visits.iop_tenths.tolist() == [310]
    raised = [item["rule"] for item in eye_of(patient).now.open_items if "rule" in item]
    assert "pressure" in raised


def test_a_withdrawn_eye_has_no_row(clinic: Clinic) -> None:
    from clinic.services.parts import part_withdraw

    patient = clinic.enrol("R")
    saved = clinic.save("measured", patient, weeks_ago(1), R=clinic.scan(400))
    assert saved.visit is not None
    part_withdraw(
        part="measured",
        visit=saved.visit,
        eye=eye_of(patient),
        reason="wrong person",
        base_rev=1,
        **clinic.who(),
    )
    assert len(adapters.load([patient]).visits) == 0


def test_laser_alone_is_no_injection_and_a_nameless_treatment_is_not_nothing(
    clinic: Clinic,
) -> None:
    patient = clinic.enrol("R")
    clinic.save("treated", patient, weeks_ago(8), R={"outcome": "given", "laser": "grid"})
    clinic.save("treated", patient, weeks_ago(4), R={"outcome": "given", "agent": "aflibercept"})
    clinic.save("treated", patient, weeks_ago(1), R={"outcome": "nothing"})
    visits = adapters.load([patient]).visits
    assert [visits.text("agents", row) for row in range(3)] == ["none", "aflibercept", "none"]
    assert visits.laser.tolist() == [1, 0, 0]


def test_two_agents_of_a_day_are_joined_in_order(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    second = {"more_treatments": [{"agent": "aflibercept"}]}
    typed = EyePart({"outcome": "given", "agent": "triamcinolone"}, children=second)
    clinic.save("treated", patient, weeks_ago(1), R=typed)
    visits = adapters.load([patient]).visits
    assert visits.text("agents", 0) == "aflibercept+triamcinolone"


def test_an_event_breaks_what_comes_after_it_only(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    for weeks in (9, 5, 1):
        clinic.save("measured", patient, weeks_ago(weeks), R=clinic.scan(400))
    eye_event_record(
        eye=eye_of(patient), kind="vitrectomy", day=weeks_ago(5), reason="", **clinic.who()
    )
    assert adapters.load([patient]).visits.breaks.tolist() == [0, 1, 1]


def test_a_blank_part_is_missing_and_never_a_value(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("decided", patient, weeks_ago(1), R={"choice": "treat"})
    visits = adapters.load([patient]).visits
    for name in ("cst_um", "iop_tenths", "letters", "due_day"):
        assert visits.columns[name].tolist() == [MISSING]
    assert visits.given.tolist() == [-1]


def test_a_digest_is_the_same_whoever_else_is_loaded(clinic: Clinic) -> None:
    people = [clinic.enrol("R", "L") for _ in range(3)]
    for number, patient in enumerate(people):
        eyes = {side: clinic.scan(400 + number, grader="technician") for side in "RL"}
        clinic.save("measured", patient, weeks_ago(1), **eyes)
        given = {"outcome": "given", "agent": ("aflibercept", "faricimab")[number % 2]}
        clinic.save("treated", patient, weeks_ago(1), R=given)
    together = adapters.load(people)
    for patient in people:
        alone = adapters.load([patient])
        mine = [
            d
            for p, d in zip(together.places, together.digests, strict=True)
            if p.patient_id == patient.pk
        ]
        assert mine == alone.digests


def test_a_history_entered_later_changes_the_digest_of_every_visit(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    for weeks in (5, 1):
        clinic.save("measured", patient, weeks_ago(weeks), R=clinic.scan(400))
    before = adapters.load([patient]).digests
    values = {"treatments_so_far": 3, "agent": "ranibizumab", "loading_done": False}
    history_record(eye=eye_of(patient), values=values, **clinic.who())
    after = adapters.load([patient]).digests
    assert all(old != new for old, new in zip(before, after, strict=True))


def test_a_later_value_leaves_the_digest_of_an_earlier_visit(clinic: Clinic) -> None:
    patient = clinic.enrol("R", "L")
    clinic.save("measured", patient, weeks_ago(5), R=clinic.scan(400))
    before = adapters.load([patient]).digests
    clinic.save("measured", patient, weeks_ago(1), R=clinic.scan(410), L=clinic.scan(300))
    loaded = adapters.load([patient])
    by_day = {place.day: one for place, one in zip(loaded.places, loaded.digests, strict=True)}
    assert [by_day[weeks_ago(5)]] == before


def test_status_is_the_one_in_force_on_the_day_and_cause_fills_every_row(clinic: Clinic) -> None:
    from clinic.services.patients import eye_state_record

    patient = clinic.enrol("R", cause="")
    for weeks in (5, 1):
        clinic.save("measured", patient, weeks_ago(weeks), R=clinic.scan(400))
    values = {"cause": "uveitic", "status": "watched", "from_day": weeks_ago(3)}
    eye_state_record(eye=eye_of(patient), values=values, **clinic.who())
    visits = adapters.load([patient]).visits
    assert visits.status.tolist() == [0, 1]
    assert visits.cause.tolist() == [3, 3]


def test_a_second_visit_of_a_day_keeps_its_order(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    day = weeks_ago(1)
    clinic.save("measured", patient, day, "virtual", R=clinic.scan(400))
    clinic.save("measured", patient, day, "unscheduled", R=clinic.scan(450))
    loaded = adapters.load([patient])
    assert [place.kind for place in loaded.places] == ["virtual", "unscheduled"]
    assert loaded.visits.cst_um.tolist() == [400, 450]
    assert loaded.visits.entry.tolist() == [0, 1]
    assert isinstance(loaded.places[0].day, dt.date)
