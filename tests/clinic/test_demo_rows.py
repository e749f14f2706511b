"""The invented clinic as rows: what must be in it, and that a seed repeats it."""

import datetime as dt
from collections import Counter

import pytest

from clinic.exchange.demo.generate import SITES, demo_rows
from clinic.exchange.demo.rows import DemoRows, PersonRow, Readings

# A Saturday: the clinics must be populated at a weekend, too.
TODAY = dt.date(2026, 3, 7)


@pytest.fixture(scope="module")
def rows() -> DemoRows:
    return demo_rows(TODAY)


def person(rows: DemoRows, story: str) -> PersonRow:
    return next(one for one in rows.people if story in one.stories)


def measured(one: PersonRow, place: int, side: str) -> Readings:
    eye = one.visits[place].eye(side)
    assert eye is not None and eye.measured is not None
    return eye.measured


def booked(rows: DemoRows, site: str, day: dt.date) -> list[PersonRow]:
    """Return the people whose newest plan of some eye is booked that day."""
    found = []
    for one in rows.people:
        newest = {plan.side: plan for plan in one.plans}
        if one.site == site and any(plan.booked_day == day for plan in newest.values()):
            found.append(one)
    return found


def test_the_same_seed_and_day_give_the_same_rows(rows: DemoRows) -> None:
    assert demo_rows(TODAY) == rows


def test_another_seed_gives_other_rows(rows: DemoRows) -> None:
    assert demo_rows(TODAY, seed=1) != rows


def test_another_day_moves_every_date_and_changes_no_reading(rows: DemoRows) -> None:
    later = demo_rows(TODAY + dt.timedelta(days=400))
    for before, after in zip(rows.people, later.people, strict=True):
        gaps = {b.day - a.day for a, b in zip(before.visits, after.visits, strict=True)}
        assert gaps == {dt.timedelta(days=400)}
        side = before.eyes[0].side
        first_before, first_after = before.visits[0].eye(side), after.visits[0].eye(side)
        assert first_before and first_after
        assert first_before.measured == first_after.measured


def test_there_are_two_sites_and_sixty_to_eighty_people(rows: DemoRows) -> None:
    assert len(rows.sites) == 2
    assert 60 <= len(rows.people) <= 80
    assert {one.site for one in rows.people} == {site.slug for site in rows.sites}


def test_three_scanners_are_of_three_classes() -> None:
    scanners = [scanner for site in SITES for scanner in site.scanners]
    assert len(scanners) == 3
    assert len({oct_class for _, oct_class in scanners}) == 3


def test_all_five_causes_occur_and_diabetic_leads(rows: DemoRows) -> None:
    causes = Counter(eye.cause for one in rows.people for eye in one.eyes)
    assert set(causes) == {"diabetic", "branch_vein", "central_vein", "uveitic", "after_surgery"}
    assert causes.most_common(1)[0][0] == "diabetic"


def test_an_eye_has_three_to_forty_visits(rows: DemoRows) -> None:
    counts = {one.key: len(one.visits) for one in rows.people}
    assert min(counts.values()) == 3
    assert max(counts.values()) == 40


def test_some_people_are_followed_for_both_eyes(rows: DemoRows) -> None:
    assert sum(len(one.eyes) == 2 for one in rows.people) >= 10


def test_eyes_arrive_new_with_history_and_without_it(rows: DemoRows) -> None:
    arrivals = Counter(eye.arrival for one in rows.people for eye in one.eyes)
    assert arrivals["new"] > arrivals["history"] >= 5
    assert arrivals["history_missing"] >= 2
    for one in rows.people:
        for eye in one.eyes:
            assert (eye.history is not None) == (eye.arrival == "history")


def test_all_three_regimens_and_eyes_without_one_occur(rows: DemoRows) -> None:
    regimens = {eye.regimen for one in rows.people for eye in one.eyes}
    assert regimens == {"treat_and_extend", "as_needed_stability", "fixed_interval", ""}


@pytest.mark.parametrize("site", ["harbour", "moorland"])
@pytest.mark.parametrize("days", [0, 1])
def test_todays_and_tomorrows_clinics_are_populated(rows: DemoRows, site: str, days: int) -> None:
    day = TODAY + dt.timedelta(days=days)
    people = booked(rows, site, day)
    assert 5 <= len(people) <= 15
    times = [next(p.booked_time for p in one.plans if p.booked_day == day) for one in people]
    assert None not in times
    assert len(set(times)) == len(times)


def test_nobody_was_seen_in_the_future(rows: DemoRows) -> None:
    for one in rows.people:
        assert all(visit.day <= TODAY for visit in one.visits)
        days = [visit.day for visit in one.visits]
        assert days == sorted(days)
        assert len({(visit.day, visit.kind) for visit in one.visits}) == len(days)


def test_two_people_were_measured_this_morning_and_not_decided(rows: DemoRows) -> None:
    early = [one for one in rows.people if one.visits[-1].day == TODAY]
    assert len(early) == 2
    for one in early:
        assert all(eye.decided is None and eye.treated is None for eye in one.visits[-1].eyes)


def test_the_swapped_eye_reads_like_its_fellow(rows: DemoRows) -> None:
    one = person(rows, "swapped_eye")
    right_before, left_before = measured(one, -2, "R"), measured(one, -2, "L")
    right, left = measured(one, -1, "R"), measured(one, -1, "L")
    assert right_before.cst_um and left_before.cst_um and right.cst_um and left.cst_um
    assert left_before.cst_um > 1.15 * right_before.cst_um
    assert right.cst_um > 1.15 * left.cst_um


def test_a_steroid_is_followed_by_a_pressure_rise_of_ten_or_more(rows: DemoRows) -> None:
    one = person(rows, "steroid_pressure")
    side = one.eyes[0].side
    first, last = measured(one, 0, side), measured(one, -1, side)
    treated = one.visits[0].eye(side)
    assert treated and treated.treated and treated.treated.agent == "dexamethasone"
    assert first.iop_tenths and last.iop_tenths
    assert last.iop_tenths - first.iop_tenths >= 100
    assert 250 <= last.iop_tenths < 350


def test_a_scanner_change_ends_one_course(rows: DemoRows) -> None:
    one = person(rows, "scanner_change")
    side = one.eyes[0].side
    assert measured(one, -2, side).scanner != measured(one, -1, side).scanner


def test_an_eye_leaves_the_chart_and_sinks_to_hand_movements(rows: DemoRows) -> None:
    one = person(rows, "off_chart")
    side = one.eyes[0].side
    assert measured(one, 0, side).notation == "etdrs_letters"
    assert measured(one, -2, side).acuity == "CF"
    assert measured(one, -1, side).acuity == "HM"


def test_a_call_on_day_four_brings_alarm_symptoms(rows: DemoRows) -> None:
    one = person(rows, "alarm_call")
    call = one.contacts[0]
    last = one.visits[-1].eye(call.side)
    assert (call.day - one.visits[-1].day).days == 4
    assert last and last.treated and last.treated.outcome == "given"
    assert set(call.symptoms.split("+")) == {"pain", "redness", "blurred"}


def test_one_virtual_visit_waits_for_a_decision(rows: DemoRows) -> None:
    waiting = [
        one
        for one in rows.people
        if one.visits[-1].kind == "virtual"
        and all(eye.measured and not eye.decided for eye in one.visits[-1].eyes)
    ]
    assert [one.key for one in waiting] == [person(rows, "undecided_virtual").key]
    assert waiting[0].visits[-1].day < TODAY


def test_late_eyes_are_of_every_length(rows: DemoRows) -> None:
    late = sorted(
        (TODAY - plan.due_day).days
        for one in rows.people
        for plan in one.plans
        if plan.attendance == "did_not_come" and plan.due_day
    )
    assert late[0] > 14
    assert any(days > 100 for days in late)
    assert any(days > 183 for days in late)


def test_rebooking_keeps_the_due_day(rows: DemoRows) -> None:
    rebooked = [
        one
        for one in rows.people
        if any(plan.attendance in {"moved", "cancelled_by_patient"} for plan in one.plans)
    ]
    assert len(rebooked) == 2
    for one in rebooked:
        assert len({plan.due_day for plan in one.plans}) == 1
        assert one.plans[-1].booked_day and one.plans[-1].booked_day > TODAY


def test_stopped_moved_and_dead_people_are_there(rows: DemoRows) -> None:
    reasons = {eye.stop_reason for one in rows.people for eye in one.eyes if eye.stop_reason}
    assert reasons == {"dry", "no_benefit", "patients_choice"}
    assert {one.standing for one in rows.people} == {"active", "moved", "died"}
    assert any(eye.status == "care_elsewhere" for one in rows.people for eye in one.eyes)


def test_every_booking_of_a_gone_eye_is_absent(rows: DemoRows) -> None:
    for one in rows.people:
        if one.standing != "active" or one.eyes[0].status in {"stopped", "care_elsewhere"}:
            assert one.plans == ()


def test_other_charts_kinds_and_events_occur(rows: DemoRows) -> None:
    visits = [visit for one in rows.people for visit in one.visits]
    notations = {eye.measured.notation for v in visits for eye in v.eyes if eye.measured}
    assert {"etdrs_letters", "snellen_ft", "decimal", "off_chart"} <= notations
    kinds = {visit.kind for visit in visits}
    assert {"planned", "virtual", "treatment_only", "unscheduled", "after_surgery"} <= kinds
    events = {kind for one in rows.people for eye in one.eyes for kind, _ in eye.events}
    assert {"lens_surgery", "laser"} <= events


def test_every_value_lies_within_what_the_tables_allow(rows: DemoRows) -> None:
    for one in rows.people:
        assert one.birth_year is None or 1930 < one.birth_year < TODAY.year - 18
        for visit in one.visits:
            for eye in visit.eyes:
                if eye.measured is None:
                    continue
                assert eye.measured.cst_um is None or 50 <= eye.measured.cst_um <= 1500
                assert eye.measured.iop_tenths is None or 0 <= eye.measured.iop_tenths <= 800
