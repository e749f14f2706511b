"""The visit sheet without scripts: rights first, then what is refused, asked, kept and shown."""

import json
from typing import Any

import pytest
from django.http import HttpResponse
from django.test import Client
from time_machine import travel

from clinic.models import (
    Decided,
    Draft,
    Entry,
    Measured,
    MoreAcuity,
    MorePressure,
    MoreTreatment,
    NextStep,
    Patient,
    Plan,
    Review,
    Scanner,
    Treated,
    Visit,
)
from clinic.notice import NOTICE
from tests.clinic.at_the_desk import NOW, SEEN, TODAY, Desk, days_ago, open_rules, signed_in
from tests.clinic.filled_forms import PageForm, form_to, forms_in, words_of

pytestmark = pytest.mark.django_db
SCRIPT = {"HTTP_X_REQUESTED_WITH": "ebbline"}


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def patient(desk: Desk) -> Patient:
    return desk.enrol()


@pytest.fixture
def client(desk: Desk) -> Client:
    return signed_in(desk.recorder)


def at(patient: Patient, more: str = "", kind: str = "planned") -> str:
    return f"/s/harbour/p/{patient.code}/visit/{TODAY.isoformat()}/{kind}/{more}"


def part(client: Client, patient: Patient, name: str) -> PageForm:
    """Return the form of one part as the sheet shows it."""
    return form_to(client.get(at(patient)), f"/{name}/")


def saved(client: Client, patient: Patient, name: str, **typed: Any) -> HttpResponse:
    """Type into a part and save it."""
    form = part(client, patient, name)
    return client.post(form.action, form.typed(**typed))


@pytest.mark.parametrize("name", ["measured", "treated", "next"])
@pytest.mark.parametrize("role,may", [("recorder", True), ("clinician", True), ("reader", False)])
def test_recorders_and_clinicians_may_save_what_was_done(
    desk: Desk, patient: Patient, role: str, may: bool, name: str
) -> None:
    answer = signed_in(getattr(desk, role)).post(at(patient, f"{name}/"))
    assert (answer.status_code == 403) is not may


def test_only_a_clinician_may_save_a_decision(desk: Desk, patient: Patient) -> None:
    for role in ("recorder", "steward", "reader"):
        reply = signed_in(getattr(desk, role)).post(at(patient, "decided/"), {"R-choice": "treat"})
        assert reply.status_code == 403
    page = words_of(signed_in(desk.recorder).get(at(patient)))
    assert "Decisions are recorded by a clinician" in page
    reply = saved(signed_in(desk.clinician), patient, "decided", R_choice="treat")
    assert reply.status_code == 302
    assert Decided.objects.get().choice == "treat"


def test_a_reader_sees_what_is_stored_and_no_form_of_a_part(desk: Desk, patient: Patient) -> None:
    desk.save(patient, "measured", TODAY, R=desk.scan(431))
    answer = signed_in(desk.reader).get(at(patient))
    assert "431" in words_of(answer)
    assert [one for one in forms_in(answer) if one.action.startswith(at(patient))] == []


@pytest.mark.parametrize("more", ["", "measured/", "compare/", "draft/"])
def test_another_clinics_person_finds_no_sheet(desk: Desk, patient: Patient, more: str) -> None:
    stranger = signed_in(Desk("moorland").clinician)
    for url in (at(patient, more), at(patient, more).replace("harbour", "moorland")):
        reply = stranger.post(url) if more else stranger.get(url)
        assert reply.status_code == 404


def test_an_unknown_kind_or_part_and_a_contact_have_no_sheet(
    client: Client, patient: Patient
) -> None:
    assert client.get(at(patient, kind="walk")).status_code == 404
    assert client.get(at(patient, kind="contact")).status_code == 404
    assert client.post(at(patient, "guessed/")).status_code == 404


def test_opening_a_sheet_stores_nothing(client: Client, patient: Patient) -> None:
    page = words_of(client.get(at(patient)))
    assert NOTICE in page
    assert not Visit.objects.exists()


def test_a_measured_part_of_both_eyes_is_stored_as_typed(
    desk: Desk, client: Client, patient: Patient
) -> None:
    reply = saved(
        client,
        patient,
        "measured",
        R_cst="412",
        R_scanner=str(desk.scanner.pk),
        R_scan_quality="good",
        R_irf="yes",
        R_srf="not_graded",
        R_grader="technician",
        R_acuity="20/40",
        R_acuity_notation="snellen_ft",
        R_acuity_chart="snellen",
        R_acuity_correction="pinhole",
        R_iop="15,5",
        R_iop_method="rebound",
        R_acuity2="0.2",
        R_acuity2_notation="logmar",
        R_iop2="16",
        R_iop2_method="applanation",
        R_lens="artificial",
        R_symptoms_now=["floaters"],
        R_symptoms_gone=["pain"],
        R_symptoms_onset="2026-03-08",
        L_acuity="HM 0.3 m",
        L_acuity_notation="off_chart",
    )
    assert reply.status_code == 302
    right, left = (Measured.objects.get(eye__side=side) for side in "RL")
    assert (right.cst_um, right.scanner_label, right.oct_class) == (412, "Room 1", "SD-BM")
    assert (right.scan_quality, right.irf, right.srf) == ("good", "yes", "not_graded")
    # 20/40 is logMAR 0.30; 85 - 50 * 0.30 = 70 letters.
    assert (right.acuity, right.logmar_e4, right.letters) == ("20/40", 3000, 70)
    assert (right.iop_tenths, right.iop_method) == (155, "rebound")
    assert right.symptoms == "floaters+pain:gone"
    # logMAR 0.20 is 85 - 10 = 75 letters.
    assert MoreAcuity.objects.get().letters == 75
    assert MorePressure.objects.get().iop_tenths == 160
    assert (left.acuity, left.letters, left.logmar_e4) == ("HM 0.3 m", None, None)
    page = words_of(client.get(reply["Location"].split("#")[0]))
    assert "Measured saved: right eye (entry), left eye (entry)" in page


IMPOSSIBLE = [
    ("measured", {"R_cst": "0.412", "L_cst": "398"}, "50 to 1500"),
    ("measured", {"R_cst": "1501"}, "50 to 1500"),
    ("measured", {"R_cst": "thick"}, "50 to 1500"),
    ("measured", {"R_iop": "81"}, "0 to 80 mmHg"),
    ("measured", {"R_iop": "-3"}, "0 to 80 mmHg"),
    ("measured", {"R_iop": "15.55"}, "no finer than a tenth"),
    ("measured", {"R_acuity": "0.5"}, "20/40 as decimal and 20/63 as logMAR"),
    ("measured", {"R_acuity": "101", "R_acuity_notation": "etdrs_letters"}, "0 to 100"),
    ("measured", {"R_acuity": "20/0", "R_acuity_notation": "snellen_ft"}, "above 0"),
    ("measured", {"R_acuity": "1.8", "R_acuity_notation": "logmar"}, "-0.30 to 1.70"),
    ("measured", {"R_acuity": "0.001", "R_acuity_notation": "decimal"}, "0.01 to 2.0"),
    ("measured", {"R_acuity": "fingers", "R_acuity_notation": "off_chart"}, "CF, HM, LP or NLP"),
    ("measured", {"R_acuity2": "0.5"}, "20/63 as logMAR"),
    ("measured", {"R_iop2": "99"}, "0 to 80 mmHg"),
    ("measured", {"R_symptoms_onset": "8.3.2026"}, "2026-03-04"),
    ("measured", {"R_symptoms_none": "on", "R_symptoms_now": "pain"}, "not both"),
    ("measured", {"R_symptoms_now": "pain", "R_symptoms_gone": "pain"}, "Both now and passed"),
    ("treated", {"R_agent": "faricimab"}, "Say whether something was given"),
    ("treated", {"R_outcome": "given"}, "choose the agent, or the laser"),
    ("treated", {"R_outcome": "nothing", "R_agent": "faricimab"}, "Nothing given, but"),
    ("treated", {"R_outcome": "not_given"}, "say why"),
    (
        "treated",
        {"R_outcome": "given", "R_agent": "faricimab", "R_dose": "26"},
        "0.001 to 25 mg",
    ),
    ("treated", {"R_outcome": "given", "R_laser": "grid", "R_iop_after": "90"}, "0 to 80 mmHg"),
    ("next", {"R_due_weeks": "0"}, "1 to 104"),
    ("next", {"R_due_weeks": "105"}, "1 to 104"),
    ("next", {"R_due_day": "2026-03-10"}, "not after this visit"),
    ("next", {"R_due_day": "soon"}, "2026-03-04"),
    ("next", {"R_booked_day": "2025-04-01"}, "A plan looks ahead"),
    ("next", {"R_booked_day": "2026-04-01", "R_booked_time": "9"}, "09:30"),
    ("next", {"R_planned_agent": "faricimab", "R_planned_dose": "x"}, "0.001 to 25 mg"),
    ("next", {"R_check_only": "on", "R_planned_agent": "faricimab"}, "not both"),
]


@pytest.mark.parametrize("name,typed,sentence", IMPOSSIBLE)
def test_an_impossible_value_is_told_and_everything_typed_is_kept(
    client: Client, patient: Patient, name: str, typed: dict[str, str], sentence: str
) -> None:
    reply = saved(client, patient, name, L_note="blinks", **typed)
    assert reply.status_code == 422
    assert sentence in words_of(reply)
    form = form_to(reply, f"/{name}/")
    assert form.values["L-note"] == ["blinks"]
    for key, value in typed.items():
        assert form.values[key.replace("_", "-", 1)] == [value]
    assert not Visit.objects.exists()
    assert not Entry.objects.exclude(action="enrolled").exists()


@pytest.mark.parametrize(
    "typed,sentence",
    [
        ({"R-choice": "pray"}, "pray is not one of the available choices"),
        ({"R-choice": "", "R-interval_weeks": "8"}, "Choose what was decided"),
        ({"R-choice": "interval", "R-interval_weeks": "200"}, "1 to 104"),
    ],
)
def test_an_impossible_decision_is_told(
    desk: Desk, patient: Patient, typed: dict[str, str], sentence: str
) -> None:
    clinician = signed_in(desk.clinician)
    form = part(clinician, patient, "decided")
    reply = clinician.post(form.action, {**form.values, **typed})
    assert reply.status_code == 422
    assert sentence in words_of(reply)
    assert not Visit.objects.exists()


def test_an_unknown_notation_is_told(client: Client, patient: Patient) -> None:
    form = part(client, patient, "measured")
    sent = {**form.values, "R-acuity": "12", "R-acuity_notation": "jaeger"}
    reply = client.post(form.action, sent)
    assert reply.status_code == 422
    assert "jaeger is not one of the available choices" in words_of(reply)
    assert form_to(reply, "/measured/").values["R-acuity"] == ["12"]


def test_another_clinics_scanner_cannot_be_chosen(
    desk: Desk, client: Client, patient: Patient
) -> None:
    theirs = Scanner.objects.create(site=Desk("moorland").site, label="Theirs", oct_class="SS")
    form = part(client, patient, "measured")
    reply = client.post(form.action, {**form.values, "R-cst": "400", "R-scanner": str(theirs.pk)})
    assert reply.status_code == 422
    assert not Measured.objects.exists()


def test_a_sheet_of_tomorrow_is_refused_and_kept(client: Client, patient: Patient) -> None:
    form = part(client, patient, "measured")
    ahead = form.action.replace("2026-03-10", "2026-03-11")
    reply = client.post(ahead, form.typed(R_iop="15"))
    assert reply.status_code == 422
    assert "It has not happened yet" in words_of(reply)
    assert form_to(reply, "/measured/").values["R-iop"] == ["15"]
    assert not Visit.objects.exists()


def test_a_sheet_with_nothing_typed_makes_no_visit(client: Client, patient: Patient) -> None:
    reply = saved(client, patient, "measured")
    assert "othing was typed" in words_of(reply)
    assert not Visit.objects.exists()


@pytest.mark.parametrize(
    "typed,question",
    [
        ({"R_cst": "119"}, "a digit may be lost or added"),
        ({"R_cst": "1101"}, "a digit may be lost or added"),
        ({"R_iop": "4"}, "below 5 or above 30 mmHg is rare"),
        ({"R_iop": "31"}, "below 5 or above 30 mmHg is rare"),
        ({"R_acuity": "6/12", "R_acuity_notation": "snellen_ft"}, "metres, perhaps?"),
        ({"R_acuity": "20/40", "R_acuity_notation": "snellen_m"}, "feet, perhaps?"),
    ],
)
def test_an_unlikely_value_is_asked_once_and_kept_when_it_is_meant(
    desk: Desk, client: Client, patient: Patient, typed: dict[str, str], question: str
) -> None:
    first = saved(client, patient, "measured", R_scanner=str(desk.scanner.pk), **typed)
    assert first.status_code == 422
    assert question in words_of(first)
    assert not Measured.objects.exists()
    form = form_to(first, "/measured/")
    for key, value in typed.items():
        assert form.values[key.replace("_", "-", 1)] == [value]
    assert client.post(form.action, form.values).status_code == 422
    assert not Measured.objects.exists()
    assert client.post(form.action, {**form.values, **form.ticked("-keep")}).status_code == 302
    assert Measured.objects.count() == 1


def test_a_scan_without_a_scanner_is_asked_about(client: Client, patient: Patient) -> None:
    reply = saved(client, patient, "measured", R_cst="400")
    assert reply.status_code == 422
    assert "can be compared with none" in words_of(reply)


@pytest.mark.parametrize("typed", [{"R_cst": "120"}, {"R_iop": "5"}, {"R_iop": "30"}])
def test_a_value_at_the_edge_of_the_likely_is_not_asked_about(
    desk: Desk, client: Client, patient: Patient, typed: dict[str, str]
) -> None:
    reply = saved(client, patient, "measured", R_scanner=str(desk.scanner.pk), **typed)
    assert reply.status_code == 302


def test_only_facts_of_the_station_carry_over_to_the_next_person(
    desk: Desk, client: Client, patient: Patient
) -> None:
    saved(
        client,
        patient,
        "measured",
        R_cst="412",
        R_scanner=str(desk.scanner.pk),
        R_scan_quality="good",
        R_irf="yes",
        R_srf="no",
        R_grader="technician",
        R_acuity="72",
        R_acuity_notation="etdrs_letters",
        R_acuity_chart="etdrs",
        R_acuity_correction="glasses",
        R_iop="15",
        R_iop_method="rebound",
        R_lens="cataract",
        R_symptoms_none="on",
    )
    form = part(client, desk.enrol(), "measured")
    carried = {
        name: value[0]
        for name, value in form.values.items()
        if value != [""] and name[:2] in ("R-", "L-") and not name.endswith("base_rev")
    }
    station = {
        "scanner": str(desk.scanner.pk),
        "acuity_notation": "etdrs_letters",
        "acuity_chart": "etdrs",
        "iop_method": "rebound",
    }
    assert carried == {f"{side}-{name}": value for side in "RL" for name, value in station.items()}
    # And another person's station has facts of its own.
    other = part(signed_in(desk.clinician), desk.enrol(), "measured")
    assert other.values["R-scanner"] == [""]


def test_the_last_comparable_values_stand_beside_the_fields(
    desk: Desk, client: Client, patient: Patient
) -> None:
    desk.save(patient, "measured", days_ago(28), R=desk.scan(412, iop_tenths=155, **SEEN))
    page = words_of(client.get(at(patient)))
    for last in ("412 µm", "10 Feb 2026", "15.5 mmHg", "70"):
        assert last in page


def test_a_correction_starts_from_what_stands_and_needs_a_reason(
    desk: Desk, client: Client, patient: Patient
) -> None:
    saved(client, patient, "measured", R_iop="15", R_lens="cataract")
    form = part(client, patient, "measured")
    assert (form.values["R-iop"], form.values["R-lens"]) == (["15"], ["cataract"])
    reply = client.post(form.action, form.typed(R_iop="16"))
    assert reply.status_code == 422
    assert "A stored value is being changed" in words_of(reply)
    form = form_to(reply, "/measured/")
    assert form.values["R-iop"] == ["16"]
    assert client.post(form.action, form.typed(reason="typed wrong")).status_code == 302
    rows = Measured.objects.order_by("rev").values_list("iop_tenths", "reason", "lens")
    assert list(rows) == [(150, "", "cataract"), (160, "typed wrong", "cataract")]


def test_saving_one_eye_leaves_the_other_without_a_record(client: Client, patient: Patient) -> None:
    saved(client, patient, "measured", L_iop="15")
    assert list(Measured.objects.values_list("eye__side", flat=True)) == ["L"]


def test_a_double_click_is_answered_like_the_first(client: Client, patient: Patient) -> None:
    form = part(client, patient, "measured")
    first, second = (client.post(form.action, form.typed(R_iop="15")) for _ in range(2))
    assert first["Location"] == second["Location"]
    assert Measured.objects.count() == 1
    assert "nothing was stored twice" in words_of(client.get(at(patient)))


def test_two_versions_are_shown_and_mine_can_be_stored_on_top(
    desk: Desk, client: Client, patient: Patient
) -> None:
    mine = part(client, patient, "measured")
    desk.save(patient, "measured", TODAY, R=desk.scan(400, iop_tenths=150), by=desk.clinician)
    reply = client.post(mine.action, mine.typed(R_iop="17", R_lens="cataract", L_iop="14"))
    assert reply.status_code == 409
    page = words_of(reply)
    for shown in ("Two versions", "nothing is lost", str(desk.clinician), "15", "17", "cataract"):
        assert shown in page
    assert Measured.objects.count() == 1
    form = form_to(reply, "/measured/")
    lacking = client.post(form.action, form.values)
    assert lacking.status_code == 422
    assert form_to(lacking, "/measured/").values["R-iop"] == ["17"]
    done = client.post(form.action, form.typed(reason="read again together"))
    assert done.status_code == 302
    right = Measured.objects.filter(eye__side="R").latest("rev")
    assert (right.rev, right.iop_tenths, right.lens) == (2, 170, "cataract")
    assert Measured.objects.get(eye__side="L").iop_tenths == 140


def test_two_versions_can_be_left_as_stored(desk: Desk, client: Client, patient: Patient) -> None:
    mine = part(client, patient, "measured")
    desk.save(patient, "measured", TODAY, R={"iop_tenths": 150}, by=desk.clinician)
    client.post(mine.action, mine.typed(R_iop="17"))
    assert part(client, patient, "measured").values["R-base_rev"] == ["1"]
    assert Measured.objects.get().iop_tenths == 150


def draft(client: Client, patient: Patient, **typed: Any) -> HttpResponse:
    payload = json.dumps({f"R-{name}": [value] for name, value in typed.items()})
    return client.post(at(patient, "draft/"), {"part": "measured", "payload": payload}, **SCRIPT)


def test_a_draft_is_put_back_for_its_own_author_and_is_no_record(
    desk: Desk, client: Client, patient: Patient
) -> None:
    assert draft(client, patient, cst="431", irf="yes").json() == {"kept": True}
    form = part(client, patient, "measured")
    assert (form.values["R-cst"], form.values["R-irf"]) == (["431"], ["yes"])
    assert part(signed_in(desk.clinician), patient, "measured").values["R-cst"] == [""]
    assert not Visit.objects.exists()
    assert not Entry.objects.exclude(action="enrolled").exists()


def test_a_draft_goes_when_the_part_is_saved_or_it_is_thrown_away(
    client: Client, patient: Patient
) -> None:
    draft(client, patient, iop="15")
    form = part(client, patient, "measured")
    assert client.post(form.action, form.values).status_code == 302
    assert not Draft.objects.exists()
    draft(client, patient, iop="16")
    client.post(at(patient, "draft/"), {"part": "measured", "drop": "yes"})
    assert not Draft.objects.exists()
    assert part(client, patient, "measured").values["R-iop"] == ["15"]


def test_a_draft_is_gone_after_a_day(client: Client, patient: Patient) -> None:
    draft(client, patient, iop="15")
    Draft.objects.update(at=NOW.replace(day=9, hour=9))
    assert part(client, patient, "measured").values["R-iop"] == [""]


@pytest.mark.parametrize("payload", ["", "[1]", "{", '{"R-cst": 5}', '{"R-cst": [5]}'])
def test_a_draft_of_another_shape_is_refused(
    client: Client, patient: Patient, payload: str
) -> None:
    sent = {"part": "measured", "payload": payload}
    assert client.post(at(patient, "draft/"), sent).status_code == 400
    assert not Draft.objects.exists()


def compared(client: Client, patient: Patient, **typed: Any) -> dict[str, Any]:
    form = part(client, patient, "measured")
    sent = {**form.typed(**typed), "number": "7"}
    return dict(client.post(at(patient, "compare/"), sent, **SCRIPT).json())


def test_the_live_comparison_says_changes_and_what_would_be_raised_and_stores_nothing(
    desk: Desk, client: Client, patient: Patient
) -> None:
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400, **SEEN))
    before = Visit.objects.count(), Review.objects.count(), Entry.objects.count()
    said = compared(
        client,
        patient,
        R_cst="450",
        R_scanner=str(desk.scanner.pk),
        R_acuity="60",
        R_acuity_notation="etdrs_letters",
        R_acuity_chart="etdrs",
        R_acuity_correction="glasses",
    )
    assert said["number"] == "7"
    assert set(said["eyes"]) == {"R"}
    text = json.dumps(said["eyes"]["R"], ensure_ascii=False)
    # 450 less 400 µm; 60 less 70 letters.
    assert "CST +50 µm" in text
    assert "\u221210 letters" in text
    ranks = {row["rank"] for row in said["eyes"]["R"]["raised"]}
    assert {"raise_first", "weigh_today"} <= ranks
    # 85 - 60 letters are 25 letters, logMAR 0.50.
    assert "0.50 logMAR" in json.dumps(said["implied"]["R"])
    assert (Visit.objects.count(), Review.objects.count(), Entry.objects.count()) == before


def test_the_live_comparison_agrees_with_the_review_of_what_is_then_saved(
    desk: Desk, client: Client, patient: Patient
) -> None:
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400, **SEEN))
    typed = {"R_cst": "450", "R_scanner": str(desk.scanner.pk), "R_iop": "26"}
    said = compared(client, patient, **typed)["eyes"]["R"]["raised"]
    assert saved(client, patient, "measured", **typed).status_code == 302
    review = Review.objects.get(visit__day=TODAY, eye__side="R")
    stored = [row["sentence"] for row in review.raised if row["outcome"] == "raised"]
    assert [row["sentence"] for row in said] == stored


def test_an_alarm_typed_comes_with_the_clinics_emergency_text(
    desk: Desk, client: Client, patient: Patient
) -> None:
    said = compared(client, patient, R_symptoms_now=["pain"])
    assert any(row["alarm"] for row in said["eyes"]["R"]["raised"])
    assert desk.site.emergency_text in words_of(client.get(at(patient)))
    assert open_rules(patient) == []


def test_the_live_comparison_of_something_impossible_says_nothing_and_does_not_break(
    client: Client, patient: Patient
) -> None:
    said = compared(client, patient, R_cst="0.412", R_acuity="0.5")
    assert said["eyes"] == {}


def test_what_was_given_and_a_second_agent_are_stored(client: Client, patient: Patient) -> None:
    reply = saved(
        client,
        patient,
        "treated",
        R_outcome="given",
        R_agent="aflibercept",
        R_dose="2",
        R_agent2="triamcinolone",
        R_dose2="4,0",
        R_lot="A-17",
        R_perception_after="fingers",
        R_iop_after="22",
        L_outcome="nothing",
    )
    assert reply.status_code == 302
    right = Treated.objects.get(eye__side="R")
    assert (right.agent, right.dose_ug, right.iop_after_tenths) == ("aflibercept", 2000, 220)
    assert MoreTreatment.objects.get().dose_ug == 4000
    assert Treated.objects.get(eye__side="L").outcome == "nothing"


def test_a_second_dose_without_its_agent_is_not_lost_in_silence(
    client: Client, patient: Patient
) -> None:
    reply = saved(client, patient, "treated", R_outcome="given", R_agent="aflibercept", R_dose2="4")
    assert reply.status_code == 422
    assert form_to(reply, "/treated/").values["R-dose2"] == ["4"]


def test_weeks_make_the_due_day_and_a_booking_can_follow_later(
    client: Client, patient: Patient
) -> None:
    saved(client, patient, "next", R_due_weeks="6", R_planned_agent="faricimab")
    # Six weeks after 10 March are 21 April.
    assert NextStep.objects.get().due_day.isoformat() == "2026-04-21"
    reply = saved(client, patient, "next", R_booked_day="2026-04-23", R_booked_time="09:30")
    assert reply.status_code == 302
    plan = Plan.objects.latest("seq")
    assert plan.booked_day is not None
    assert (plan.due_day.isoformat(), plan.booked_day.isoformat()) == ("2026-04-21", "2026-04-23")
