"""Facts of a person: what is refused, what stands on a day, and what the rules make of it."""

import datetime as dt
from typing import Any

import pytest
from django.db import IntegrityError, transaction
from django.http import HttpResponse
from time_machine import travel

from clinic import adapters
from clinic.models import (
    OWN_CALENDAR,
    Entry,
    IntakeFile,
    Patient,
    PersonFact,
    Review,
    Visit,
)
from clinic.services.facts import fact_follow, fact_record
from clinic.services.parts import EyePart, PartRefused
from tests.clinic.a_clinic import AT, TODAY, Clinic, eye_of, raised_rules, weeks_ago
from tests.clinic.at_the_desk import NOW, Desk, signed_in
from tests.clinic.filled_forms import own_form, words_of
from trends.errors import EbblineError
from trends.measures import context
from trends.visits import MISSING, day_number

pytestmark = pytest.mark.django_db
TOMORROW = TODAY + dt.timedelta(days=1)
YESTERDAY = TODAY - dt.timedelta(days=1)


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


def enter(
    clinic: Clinic, patient: Patient, kind: str, day: dt.date = TODAY, side: str = "", **more: Any
) -> PersonFact:
    eye = eye_of(patient, side) if side else None
    values = {"day": day, "ask_again_by": None, **more}
    return fact_record(patient=patient, kind=kind, values=values, eye=eye, **clinic.who())


def follow(
    clinic: Clinic, entry: PersonFact, change: str, day: dt.date = TODAY, **more: Any
) -> PersonFact:
    return fact_follow(entry=entry, change=change, day=day, **more, **clinic.who())


@pytest.mark.parametrize(
    "kind,side,values",
    [
        ("mood", "", {}),
        ("pregnancy", "", {"day": TOMORROW}),
        ("pregnancy", "", {"ask_again_by": TODAY}),
        ("pregnancy", "", {"happened_on": YESTERDAY}),
        ("pregnancy", "R", {}),
        ("stroke", "", {"happened_on": TOMORROW}),
        ("inflammation", "R", {}),
        ("inflammation", "", {"agent": "brolucizumab"}),
        ("inflammation", "R", {"agent": "camomile"}),
        ("blood_pressure", "", {"systolic_mmhg": 140}),
        ("blood_pressure", "", {"systolic_mmhg": 80, "diastolic_mmhg": 80}),
        ("blood_pressure", "", {"systolic_mmhg": 301, "diastolic_mmhg": 80}),
        ("total_protein", "", {"protein_tenths": 121}),
        ("total_protein", "", {}),
    ],
)
def test_an_impossible_fact_is_refused(
    clinic: Clinic, kind: str, side: str, values: dict[str, Any]
) -> None:
    patient = clinic.enrol()
    with pytest.raises(EbblineError):
        enter(clinic, patient, kind, side=side, **values)
    assert not PersonFact.objects.exists()


def test_another_persons_eye_is_refused(clinic: Clinic) -> None:
    mine, other = clinic.enrol(), clinic.enrol()
    values = {"day": TODAY, "agent": "brolucizumab"}
    with pytest.raises(PartRefused):
        fact_record(
            patient=mine, kind="inflammation", values=values, eye=eye_of(other), **clinic.who()
        )


def test_the_same_fact_twice_is_stored_once_and_in_the_ledger(clinic: Clinic) -> None:
    patient = clinic.enrol()
    first, again = (enter(clinic, patient, "pregnancy") for _ in range(2))
    assert first == again
    assert PersonFact.objects.count() == 1
    entry = Entry.objects.get(action="person fact")
    assert entry.chain.name == f"patient:{patient.code}"
    assert list(entry.payload["rows"]) == [f"PersonFact:{first.pk}"]


def test_the_database_refuses_to_change_or_remove_a_fact(clinic: Clinic) -> None:
    fact = enter(clinic, clinic.enrol(), "pregnancy")
    rows = PersonFact.objects.filter(pk=fact.pk)
    with pytest.raises(IntegrityError), transaction.atomic():
        rows.update(kind="stroke")
    with pytest.raises(IntegrityError), transaction.atomic():
        rows._raw_delete(rows.db)
    assert PersonFact.objects.get().kind == "pregnancy"


def test_a_fact_is_followed_in_order_and_taken_back_with_a_reason(clinic: Clinic) -> None:
    fact = enter(clinic, clinic.enrol(), "pregnancy", weeks_ago(4))
    with pytest.raises(PartRefused):
        follow(clinic, fact, "forgotten")
    with pytest.raises(PartRefused):
        follow(clinic, fact, "still", weeks_ago(5))
    with pytest.raises(PartRefused):
        follow(clinic, fact, "withdrawn", reason=" ")
    follow(clinic, fact, "still", weeks_ago(2), ask_again_by=TOMORROW)
    with pytest.raises(PartRefused):
        follow(clinic, fact, "ended", weeks_ago(3))
    follow(clinic, fact, "ended", weeks_ago(1))
    with pytest.raises(PartRefused):
        follow(clinic, fact, "still")
    follow(clinic, fact, "withdrawn", reason="another card")
    with pytest.raises(PartRefused):
        follow(clinic, fact, "withdrawn", reason="another card")
    assert [row.change for row in PersonFact.objects.order_by("seq")] == [
        "entry",
        "still",
        "ended",
        "withdrawn",
    ]


def test_a_reading_is_only_ever_taken_back(clinic: Clinic) -> None:
    fact = enter(clinic, clinic.enrol(), "total_protein", weeks_ago(4), protein_tenths=71)
    for change in ("still", "ended"):
        with pytest.raises(PartRefused):
            follow(clinic, fact, change)
    assert follow(clinic, fact, "withdrawn", reason="in g/L").about == fact


def test_none_of_these_is_refused_while_something_stands(clinic: Clinic) -> None:
    patient = clinic.enrol()
    fact = enter(clinic, patient, "pregnancy", weeks_ago(4))
    with pytest.raises(PartRefused):
        enter(clinic, patient, "asked_none")
    follow(clinic, fact, "ended", weeks_ago(1))
    assert enter(clinic, patient, "asked_none").seq == 3


def visited(clinic: Clinic, *weeks: int) -> Patient:
    """Return a person with both eyes scanned so many weeks ago."""
    patient = clinic.enrol()
    for one in weeks:
        clinic.save("measured", patient, weeks_ago(one), R=clinic.scan(400), L=clinic.scan(300))
    return patient


def columns(patient: Patient, name: str, side: str = "R") -> list[int]:
    """Return a column of one eye, oldest first."""
    v = adapters.load([patient]).visits
    return v.columns[name][v.side == "RL".index(side)].tolist()


def test_a_fact_is_in_force_from_its_day_until_it_ended(clinic: Clinic) -> None:
    patient = visited(clinic, 8, 6, 4, 2)
    fact = enter(clinic, patient, "pregnancy", weeks_ago(6))
    follow(clinic, fact, "ended", weeks_ago(2))
    pregnant = context.bit("pregnancy")
    for side in "RL":
        assert columns(patient, "context", side) == [-1, pregnant, pregnant, 0]


def test_a_fact_taken_back_was_never_in_force(clinic: Clinic) -> None:
    patient = visited(clinic, 4, 2)
    fact = enter(clinic, patient, "pregnancy", weeks_ago(6))
    follow(clinic, fact, "withdrawn", reason="another card")
    assert columns(patient, "context") == [-1, -1]


def test_asked_and_none_counts_until_the_day_to_ask_again(clinic: Clinic) -> None:
    patient = visited(clinic, 8, 6, 4, 2)
    fact = enter(clinic, patient, "asked_none", weeks_ago(8), ask_again_by=weeks_ago(5))
    assert columns(patient, "context") == [0, 0, -1, -1]
    follow(clinic, fact, "still", weeks_ago(3))
    assert columns(patient, "context") == [0, 0, -1, 0]


def test_an_inflammation_is_of_its_own_eye(clinic: Clinic) -> None:
    patient = visited(clinic, 2)
    enter(clinic, patient, "inflammation", weeks_ago(3), side="R", agent="brolucizumab")
    assert columns(patient, "context", "R") == [context.inflammation_bit("brolucizumab")]
    assert columns(patient, "context", "L") == [0]


def test_the_last_day_of_a_stroke_is_told_and_an_undated_one_leaves_it_open(
    clinic: Clinic,
) -> None:
    patient = visited(clinic, 6, 4, 2)
    enter(clinic, patient, "stroke", weeks_ago(6), happened_on=weeks_ago(30))
    enter(clinic, patient, "stroke", weeks_ago(4), happened_on=weeks_ago(5))
    enter(clinic, patient, "stroke", weeks_ago(2))
    days = [day_number(weeks_ago(30)), day_number(weeks_ago(5)), MISSING]
    assert columns(patient, "stroke_day") == days
    assert columns(patient, "heart_attack_day") == [MISSING] * 3


def test_a_reading_speaks_for_its_day_or_until_it_is_to_be_taken_again(clinic: Clinic) -> None:
    patient = visited(clinic, 6, 4, 2)
    pressure = {"systolic_mmhg": 142, "diastolic_mmhg": 88}
    enter(clinic, patient, "blood_pressure", weeks_ago(6), **pressure)
    enter(
        clinic, patient, "total_protein", weeks_ago(5), protein_tenths=71, ask_again_by=weeks_ago(3)
    )
    assert columns(patient, "systolic_mmhg") == [142, MISSING, MISSING]
    assert columns(patient, "diastolic_mmhg") == [88, MISSING, MISSING]
    assert columns(patient, "protein_tenths") == [MISSING, 71, MISSING]
    # A reading alone says nothing of pregnancy, stroke or allergy.
    assert columns(patient, "context") == [-1, -1, -1]


def test_glitazones_and_kidneys_bear_on_no_treatment(clinic: Clinic) -> None:
    patient = visited(clinic, 2)
    for kind in ("glitazone", "kidney"):
        enter(clinic, patient, kind, weeks_ago(4))
    assert columns(patient, "context") == [-1]


def test_what_was_planned_at_the_visit_before_is_planned(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    steps = [{"planned_agent": "faricimab"}, {"check_only": True}, {"due_weeks": 4}, {}]
    for week, ahead in zip((8, 6, 4, 2), steps, strict=True):
        clinic.save("measured", patient, weeks_ago(week), R=clinic.scan(400))
        if ahead:
            clinic.save("next", patient, weeks_ago(week), R=ahead)
    assert columns(patient, "treatment_planned") == [-1, 1, 0, -1]
    clinic.save("treated", patient, weeks_ago(4), R={"outcome": "given", "agent": "aflibercept"})
    clinic.save("treated", patient, weeks_ago(2), R={"outcome": "given", "laser": "grid"})
    assert columns(patient, "treatment_planned") == [-1, 1, 1, -1]


def test_the_lots_of_a_day_are_joined_and_nothing_given_has_none(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    second = {"more_treatments": [{"agent": "triamcinolone", "lot": "T9"}]}
    given = {"outcome": "given", "agent": "aflibercept", "lot": "A12"}
    clinic.save("treated", patient, weeks_ago(4), R=EyePart(given, children=second))
    clinic.save("treated", patient, weeks_ago(2), R={"outcome": "given", "agent": "aflibercept"})
    clinic.save("treated", patient, weeks_ago(1), R={"outcome": "nothing"})
    visits = adapters.load([patient]).visits
    assert [visits.text("lots", row) for row in range(3)] == ["A12+T9", "", ""]


def test_a_digest_keeps_lots_apart_whoever_else_is_loaded(clinic: Clinic) -> None:
    people = [clinic.enrol("R") for _ in range(2)]
    for patient, lot in zip(people, ("B2", "A1"), strict=True):
        given = {"outcome": "given", "agent": "aflibercept", "lot": lot}
        clinic.save("treated", patient, weeks_ago(1), R=given)
    together = adapters.load(people)
    both = dict(zip([p.patient_id for p in together.places], together.digests, strict=True))
    alone = {patient.pk: adapters.load([patient]).digests[0] for patient in people}
    assert both == alone
    assert len(set(alone.values())) == 2


def test_a_pregnancy_told_later_raises_where_a_treatment_is_planned(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, weeks_ago(6), R=clinic.scan(400))
    clinic.save("next", patient, weeks_ago(6), R={"planned_agent": "faricimab"})
    clinic.save("measured", patient, weeks_ago(2), R=clinic.scan(400))
    assert "treatment_context" not in raised_rules(eye_of(patient))
    fact = enter(clinic, patient, "pregnancy", weeks_ago(3))
    assert "treatment_context" in raised_rules(eye_of(patient))
    assert Review.objects.order_by("-pk")[0].why == "person fact"
    follow(clinic, fact, "withdrawn", reason="another card")
    assert "treatment_context" not in raised_rules(eye_of(patient))


def test_one_lot_in_both_eyes_is_raised_on_both(clinic: Clinic) -> None:
    patient = clinic.enrol()
    given = {"outcome": "given", "agent": "faricimab"}
    right, left = {**given, "lot": "F311"}, {**given, "lot": "f311"}
    clinic.save("treated", patient, weeks_ago(1), R=right, L=left)
    newest = {review.eye.side: review for review in Review.objects.order_by("seq")}
    for side in "RL":
        raised = {row["rule"] for row in newest[side].raised if row["outcome"] == "raised"}
        assert "same_lot_both_eyes" in raised


def test_eyes_of_a_file_without_a_common_calendar_are_not_compared_by_day(clinic: Clinic) -> None:
    stamp = {"by": clinic.user, "at": AT}
    counts = {"rows": 2, "visits_stored": 1, "cells_refused": 0}
    file = IntakeFile.objects.create(
        site=clinic.site, sha256="0" * 64, assumed=[OWN_CALENDAR], **counts, **stamp
    )
    patient = clinic.enrol()
    Visit.objects.create(
        patient=patient, day=weeks_ago(4), kind="planned", from_intake=file, **stamp
    )
    for week in (4, 2):
        clinic.save("measured", patient, weeks_ago(week), R=clinic.scan(312), L=clinic.scan(312))
    assert columns(patient, "own_calendar") == [1, 0]
    newest = {(one.visit.day, one.eye.side): one for one in Review.objects.order_by("seq")}
    raised = {
        key for key, one in newest.items() if "same_in_both_eyes" in {r["rule"] for r in one.raised}
    }
    assert raised == {(weeks_ago(2), "R"), (weeks_ago(2), "L")}


# The screens.


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def patient(desk: Desk) -> Patient:
    return desk.enrol()


def sent(desk: Desk, patient: Patient, screen: str, **typed: object) -> HttpResponse:
    """Open a screen as a recorder, type into it and send it."""
    client, at = signed_in(desk.recorder), f"/s/harbour/p/{patient.code}/{screen}"
    form = own_form(client.get(at))
    return client.post(at, form.typed(**typed))


def page(desk: Desk, patient: Patient, who: str = "recorder") -> str:
    return words_of(signed_in(getattr(desk, who)).get(f"/s/harbour/p/{patient.code}/"))


@pytest.mark.parametrize("role", ["recorder", "clinician", "steward", "reader"])
def test_recorder_and_clinician_enter_and_follow_facts(
    desk: Desk, patient: Patient, role: str
) -> None:
    with travel(NOW, tick=False):
        sent(desk, patient, "fact/pregnancy/", day=TODAY.isoformat())
        client = signed_in(getattr(desk, role))
        wanted = 200 if role in ("recorder", "clinician") else 403
        for screen in ("fact/stroke/", "facts/1/"):
            assert client.get(f"/s/harbour/p/{patient.code}/{screen}").status_code == wanted
        shown = page(desk, patient, role)
        assert "Pregnancy" in shown
        assert ("takes a glitazone" in shown) is (wanted == 200)


def test_a_fact_is_entered_shown_asked_again_and_taken_back(desk: Desk, patient: Patient) -> None:
    with travel(NOW, tick=False):
        assert "Never asked." in page(desk, patient)
        told = {"happened_on": "2026-02-20", "day": "2026-03-01", "ask_again_by": "2026-03-09"}
        assert sent(desk, patient, "fact/stroke/", **told).status_code == 302
        shown = page(desk, patient)
        assert "Stroke, on 20 Feb 2026" in shown
        assert "9 Mar 2026: ask again" in shown
        still = {"change": "still", "day": "2026-03-10", "ask_again_by": "2026-06-10"}
        assert sent(desk, patient, "facts/1/", **still).status_code == 302
        shown = page(desk, patient)
        assert "10 Jun 2026" in shown and "10 Jun 2026: ask again" not in shown
        mistake = {"change": "withdrawn", "day": "2026-03-10"}
        answer = sent(desk, patient, "facts/1/", **mistake)
        assert answer.status_code == 422 and "A fact is being taken back." in words_of(answer)
        assert sent(desk, patient, "facts/1/", **mistake, reason="typed wrong").status_code == 302
        assert "Never asked." in page(desk, patient)


@pytest.mark.parametrize(
    "screen,typed,sentence",
    [
        ("fact/total_protein/", {"protein_tenths": "70"}, "it looks like g/L: divide by 10"),
        (
            "fact/blood_pressure/",
            {"systolic_mmhg": "80", "diastolic_mmhg": "120"},
            "The two may be swapped",
        ),
        ("fact/inflammation/", {"eye": "L"}, "This field is required"),
        ("fact/pregnancy/", {"day": "2026-03-11"}, "It has not happened yet"),
    ],
)
def test_an_impossible_fact_is_told_and_what_was_typed_stays(
    desk: Desk, patient: Patient, screen: str, typed: dict[str, str], sentence: str
) -> None:
    with travel(NOW, tick=False):
        answer = sent(desk, patient, screen, **typed)
    assert answer.status_code == 422
    assert sentence in words_of(answer)
    for name, value in typed.items():
        assert own_form(answer).values[name] == [value]
    assert not PersonFact.objects.exists()


def test_each_kind_asks_for_its_own_fields_only(desk: Desk, patient: Patient) -> None:
    client = signed_in(desk.recorder)
    wanted = {
        "pregnancy": set(),
        "heart_attack": {"happened_on"},
        "allergy_drug": {"agent"},
        "inflammation": {"eye", "agent"},
        "blood_pressure": {"systolic_mmhg", "diastolic_mmhg"},
        "total_protein": {"protein_tenths"},
    }
    for kind, own in wanted.items():
        form = own_form(client.get(f"/s/harbour/p/{patient.code}/fact/{kind}/"))
        names = set(form.values) - {"csrfmiddlewaretoken"}
        assert names == own | {"day", "ask_again_by"}, kind


def test_an_unknown_kind_or_number_is_not_there(desk: Desk, patient: Patient) -> None:
    client = signed_in(desk.recorder)
    for screen in ("fact/mood/", "facts/1/"):
        assert client.get(f"/s/harbour/p/{patient.code}/{screen}").status_code == 404
