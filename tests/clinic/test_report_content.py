"""From stored rows to the words of the trend report and the eye course."""

import datetime as dt
from zoneinfo import ZoneInfo

import pytest
from django.db import connection
from django.test.utils import CaptureQueriesContext

from clinic.content import EyeReport, PatientReport
from clinic.models import Answer, EyeNow, History, Measured, MorePressure, Note, Seal
from clinic.selectors.report_content import report_content
from tests.clinic.a_person import AT, FIRST, Person, a_history, a_site, a_user, adopted

pytestmark = pytest.mark.django_db
DAY = dt.timedelta(days=1)


@pytest.fixture
def person() -> Person:
    site = a_site()
    user = a_user(site, "clinician")
    adopted(site, user)
    return a_history(site, user)


def report(person: Person) -> PatientReport:
    return report_content(person.patient, printed_by="Somebody", at=AT)


def right(person: Person) -> EyeReport:
    return report(person).eyes[0]


def test_the_right_eye_comes_first_and_both_are_named_in_words(person: Person) -> None:
    assert [eye.side_words for eye in report(person).eyes] == ["Right eye", "Left eye"]


def test_the_report_covers_the_days_of_both_eyes_and_names_the_adopted_set(
    person: Person,
) -> None:
    made = report(person)
    assert (made.dates_from, made.dates_to) == (FIRST, FIRST + 70 * DAY)
    assert made.limit_sets == ("limit set general 1, adopted 4 Mar 2026, confirmed by clinician",)


def test_the_moment_of_printing_is_in_the_sites_own_time(person: Person) -> None:
    person.site.time_zone = "Asia/Tokyo"
    person.site.save()
    made = report(person)
    assert made.printed_at == AT.astimezone(ZoneInfo("Asia/Tokyo")).replace(tzinfo=None)


def test_a_rise_of_more_than_ten_per_cent_is_raised_with_its_working(person: Person) -> None:
    """380 to 430 µm on SD-BM: 50/380 = 13.2 %, and 50 µm is more than 20 µm."""
    raised = {one.rule: one for one in right(person).raised}
    one = raised["thickening"]
    assert one.sentence.startswith("Right eye: CST rose 50 µm (380 to 430, +13.2 %)")
    assert one.rank == "Weigh today"
    assert one.from_day == FIRST + 70 * DAY
    assert one.kind == "planned"
    assert one.answerable
    assert one.may_look_again
    assert len(one.options) >= 2
    assert one.sources
    assert one.adopted == "limit set general 1, adopted 4 Mar 2026, confirmed by clinician"
    assert {value.amount for value in one.values} == {"380 µm", "430 µm"}


def test_without_an_adopted_set_only_the_floor_rules_run_and_no_limit_is_drawn() -> None:
    site = a_site()
    made = report(a_history(site, a_user(site, "clinician")))
    assert made.limit_sets == ()
    assert not [one for one in made.eyes[0].raised if one.rule == "thickening"]
    assert made.eyes[0].chart.panel("cst").limits == ()


def test_the_limit_line_is_that_of_class_and_sex_and_only_for_diabetic_eyes(
    person: Person,
) -> None:
    """Chalam 2012, SD-BM: 305 µm for women, 320 µm for men."""
    eyes = report(person).eyes
    assert [line.at for line in eyes[0].chart.panel("cst").limits] == [305]
    assert eyes[1].chart.panel("cst").limits == ()


def test_bars_are_the_published_repeatability_and_the_notes_say_whose(person: Person) -> None:
    """20 µm pooled SD; chart ETDRS 9 letters (Rosser 2003); applanation 2.6 mmHg (Tonnu 2005)."""
    eye = right(person)
    half = {
        panel.key: {round((point.high or 0) - point.at, 6) for point in panel.series[0].points}
        for panel in eye.chart.panels
    }
    assert half == {"cst": {20}, "letters": {9}, "iop": {2.6}}
    assert "CST ±20 µm (SD-BM, limit set general 1)" in eye.chart_notes[0]
    assert "Rosser" in eye.chart_notes[0]
    assert "Tonnu" in eye.chart_notes[0]


def test_a_scan_of_another_class_is_never_joined_to_the_one_before(person: Person) -> None:
    visit = person.visit(15)
    person.measured(visit, person.patient.eyes.get(side="R"), 360, oct_class="SS")
    (series,) = right(person).chart.panel("cst").series
    assert [[point.at for point in segment] for segment in series.segments] == [
        [400, 380, 430],
        [360],
    ]


def test_eye_surgery_cuts_scan_and_letters_but_not_pressure(person: Person) -> None:
    person.event(person.patient.eyes.get(side="R"), 7)
    chart = right(person).chart
    pieces = {panel.key: len(panel.series[0].segments) for panel in chart.panels}
    assert pieces == {"cst": 2, "letters": 2, "iop": 1}
    assert [lane.words for lane in chart.lanes] == ["ranibizumab", "cataract surgery"]


def test_an_event_entered_by_mistake_and_withdrawn_is_not_drawn(person: Person) -> None:
    eye = person.patient.eyes.get(side="R")
    wrong = person.event(eye, 7)
    person.event(eye, 7, withdraws=wrong, reason="wrong eye")
    made = right(person)
    assert made.events == ()
    assert [lane.words for lane in made.chart.lanes] == ["ranibizumab"]


def test_a_correction_is_told_with_who_when_from_what_and_why(person: Person) -> None:
    first = Measured.objects.get(visit__day=FIRST, eye__side="R")
    person.measured(first.visit, first.eye, 410, rev=2, change="correction", reason="typing error")
    row = right(person).visits[0]
    assert row.cst == "410\N{NO-BREAK SPACE}µm"
    assert row.changes == (
        "Measured corrected by clinician on 4 Mar 2026 09:30: typing error (CST 400 µm to 410 µm)",
    )


def test_a_withdrawn_record_is_out_of_the_chart_and_its_withdrawal_is_told(
    person: Person,
) -> None:
    first = Measured.objects.get(visit__day=FIRST, eye__side="R")
    person.measured(first.visit, first.eye, 400, rev=2, change="withdrawn", reason="wrong person")
    made = right(person)
    (series,) = made.chart.panel("cst").series
    assert [point.at for point in series.points] == [380, 430]
    assert made.visits[0].cst == ""
    assert made.visits[0].changes == (
        "Measured withdrawn by clinician on 4 Mar 2026 09:30: wrong person",
    )


def test_a_visit_row_says_everything_that_was_recorded(person: Person) -> None:
    visit, eye = person.visit(15), person.patient.eyes.get(side="R")
    note = Note.objects.create(text="tired today", salt="s", digest="d")
    row = person.measured(
        visit, eye, 350, scan_quality="poor", irf="yes", symptoms="floaters+pain:gone", note=note
    )
    MorePressure.objects.create(measured=row, iop_tenths=175, iop_method="rebound")
    person.treated(visit, eye, iop_after_tenths=230, perception_after="counts_fingers")
    told = right(person).visits[-1]
    space = "\N{NO-BREAK SPACE}"
    assert told.cst == f"350{space}µm, poor scan"
    assert told.fluid == f"IRF{space}yes\nSRF{space}no"
    assert told.iop == f"15{space}mmHg applanation\n17.5{space}mmHg rebound"
    assert told.symptoms == "floaters, pain (gone)"
    assert told.treated == f"ranibizumab 0.5{space}mg\nafter: 23{space}mmHg, counts fingers"
    assert told.note == "tired today"
    assert told.acuity == f"70{space}letters\nETDRS, glasses"


def test_a_poor_scan_is_hollow_and_stands_beside_the_line(person: Person) -> None:
    person.measured(person.visit(15), person.patient.eyes.get(side="R"), 350, scan_quality="poor")
    (series,) = right(person).chart.panel("cst").series
    assert [(point.at, point.hollow) for point in series.loose] == [(350, True)]


def test_an_acuity_off_the_chart_goes_to_the_band(person: Person) -> None:
    person.measured(
        person.visit(15),
        person.patient.eyes.get(side="R"),
        acuity="HM",
        acuity_notation="off_chart",
        letters=None,
        logmar_e4=None,
    )
    panel = right(person).chart.panel("letters")
    assert panel.band is not None
    assert panel.series[0].points[-1].at == panel.band.rows[1].at


def test_each_past_visit_has_the_reading_of_its_regimen(person: Person) -> None:
    """treat_and_extend of the general set loads with 4: a new eye's first visit is 1 of 4."""
    eye = person.patient.eyes.get(side="R")
    History.objects.create(eye=eye, rev=1, new_eye=True, **person.stamp())
    readings = [row.reading for row in right(person).visits]
    assert readings == ["loading 1 of 4", "loading 2 of 4", "loading 3 of 4"]
    assert right(person).reading == readings[-1]


def test_an_unanswered_raise_is_listed_as_open(person: Person) -> None:
    open_rows = [row for row in right(person).answers if not row.answer]
    assert "Thicker than the last comparable scan" in [row.title for row in open_rows]


def test_an_answer_given_on_other_evidence_leaves_the_row_open_again(person: Person) -> None:
    visit = person.patient.visits.order_by("-day")[0]
    Answer.objects.create(
        visit=visit,
        eye=person.patient.eyes.get(side="R"),
        rule="thickening",
        seq=1,
        inputs_digest="of something else",
        answer="acting",
        **person.stamp(),
    )
    one = next(one for one in right(person).raised if one.rule == "thickening")
    assert one.answer == "open again; before the correction: seen, acting, clinician, 4 Mar 2026"


def test_an_alarm_shows_the_sites_emergency_text_and_can_not_be_put_off(person: Person) -> None:
    person.measured(person.visit(15), person.patient.eyes.get(side="R"), 430, symptoms="pain")
    first = right(person).raised[0]
    assert first.rule == "alarm_symptoms"
    assert first.rank == "Raise first"
    assert first.emergency_text == "Ring extension 5"
    assert first.options == ()
    assert not first.may_look_again


def test_an_earlier_alarm_stays_until_somebody_answers(person: Person) -> None:
    eye = person.patient.eyes.get(side="R")
    visit = person.visit(12)
    person.measured(visit, eye, 430, symptoms="pain")
    person.measured(person.visit(15), eye, 430)
    assert right(person).raised[0].rule == "alarm_symptoms"
    assert right(person).raised[0].from_day == visit.day


def test_history_not_entered_is_said_and_never_read_as_none(person: Person) -> None:
    assert right(person).history == "history not entered"


def test_context_counts_treatments_and_the_longest_dry_interval(person: Person) -> None:
    """Treated at weeks 0, 5 and 10, dry at 5 and 10: the longest dry interval is 5 weeks."""
    rows = {row.what: row.amount for row in right(person).context}
    assert rows["Treatments in 12 months"] == "3"
    assert rows["Longest dry interval so far"] == "5 weeks"
    assert rows["Since last ranibizumab"] == f"{(AT.date() - FIRST - 70 * DAY).days // 7} weeks"


def test_the_newest_seal_is_printed_short_in_groups(person: Person) -> None:
    Seal.objects.create(day=FIRST, heads=1, key_id="k", digest="0123456789abcdef" * 4, at=AT)
    assert report(person).ledger_seal == "0123 4567 89ab"


def test_the_place_in_the_regimen_comes_from_the_projection(person: Person) -> None:
    EyeNow.objects.create(eye=person.patient.eyes.get(side="R"), place="loading 3 of 4")
    assert right(person).place == "loading 3 of 4"


def test_a_long_history_takes_no_more_queries_than_a_short_one(person: Person) -> None:
    report(person)
    with CaptureQueriesContext(
        connection,
    ) as few:
        report(person)
    eye = person.patient.eyes.get(side="R")
    for weeks in range(15, 75, 5):
        visit = person.visit(weeks)
        person.measured(visit, eye, 400)
        person.treated(visit, eye)
    with CaptureQueriesContext(connection) as many:
        report(person)
    assert len(many) == len(few)


def test_a_person_without_any_visit_still_has_a_report() -> None:
    site = a_site()
    person = Person(site, a_user(site, "clinician"))
    person.eye("L")
    made = report(person)
    assert made.dates_from is None
    assert made.eyes[0].visits == ()
