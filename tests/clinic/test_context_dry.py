"""The longest dry interval so far: dry at, what contradicts it, and what can't be told."""

import pytest

from clinic.content import ContextRow
from clinic.selectors.context_dry import dry_rows
from clinic.selectors.eye_log import eye_logs
from tests.clinic.at_the_desk import GIVEN, Desk, days_ago

pytestmark = pytest.mark.django_db
NOTHING = {"outcome": "nothing"}


class Course:
    """One person's right eye, graded and treated some days ago."""

    def __init__(self) -> None:
        self.desk = Desk()
        self.patient = self.desk.enrol("R")

    def graded(self, ago: int, irf: str, srf: str, **more: object) -> None:
        scan = self.desk.scan(300, irf=irf, srf=srf, **more)
        self.desk.save(self.patient, "measured", days_ago(ago), R=scan)

    def treated(self, ago: int, **how: object) -> None:
        self.desk.save(self.patient, "treated", days_ago(ago), R=how or GIVEN)

    def row(self) -> ContextRow | None:
        (log,) = eye_logs(self.patient)
        rows = dry_rows(log)
        return rows[0] if rows else None


@pytest.fixture
def course() -> Course:
    return Course()


def told(row: ContextRow | None) -> ContextRow:
    assert row is not None
    return row


def test_the_longest_of_two_dry_intervals_is_told_as_history(course: Course) -> None:
    """Treated 200 and 150 days ago; dry 50 days (7 weeks) and 70 days (10 weeks) after."""
    course.treated(200)
    course.graded(150, "no", "no")
    course.treated(150)
    course.graded(80, "no", "no")
    row = told(course.row())
    assert row.amount == "10 weeks"
    assert "dry at 10 weeks" in row.note and "history, not advice" in row.note
    assert "varies" not in row.note


def test_fluid_seen_after_a_shorter_time_is_said_beside_it(course: Course) -> None:
    """Dry 70 days after one treatment, fluid 35 days (5 weeks) after the next."""
    course.treated(200)
    course.graded(130, "no", "no")
    course.treated(130)
    course.graded(95, "no", "yes")
    row = told(course.row())
    assert row.amount == "10 weeks"
    assert "varies between cycles: fluid at 5 weeks" in row.note


def test_fluid_seen_only_later_contradicts_nothing(course: Course) -> None:
    course.treated(200)
    course.graded(130, "no", "no")
    course.treated(130)
    course.graded(32, "yes", "no")
    assert "varies" not in told(course.row()).note


def test_a_visit_between_without_a_record_of_treatment_leaves_the_interval_out(
    course: Course,
) -> None:
    course.treated(200)
    course.graded(100, "unsure", "no")
    course.graded(10, "no", "no")
    assert told(course.row()).amount == "couldn't tell"
    course.treated(100, **NOTHING)
    assert told(course.row()).amount == "27 weeks"  # 190 days


def test_a_surer_shorter_interval_stands_and_says_what_was_left_out(course: Course) -> None:
    course.treated(200)
    course.graded(165, "no", "no")
    course.graded(10, "no", "no")
    row = told(course.row())
    assert row.amount == "5 weeks" and "left out" in row.note


@pytest.mark.parametrize(
    "irf,srf,quality", [("no", "not_graded", ""), ("no", "unsure", ""), ("no", "no", "poor")]
)
def test_what_is_not_graded_unsure_or_on_a_poor_scan_is_not_dry(
    course: Course, irf: str, srf: str, quality: str
) -> None:
    course.treated(100)
    course.graded(50, irf, srf, scan_quality=quality)
    assert course.row() is None


def test_nothing_is_told_before_a_treatment_is_recorded(course: Course) -> None:
    course.graded(50, "no", "no")
    assert course.row() is None
