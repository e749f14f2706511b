"""Letters and thickness since the best and the first: only what may be compared, facts alone."""

import pytest

from clinic.content import ContextRow
from clinic.models import EyeEvent
from clinic.selectors.context_since import since_rows
from clinic.selectors.eye_log import eye_logs
from tests.clinic.at_the_desk import NOW, SEEN, Desk, days_ago, eye_of

pytestmark = pytest.mark.django_db
LETTERS = ("Letters since the best", "Letters since the first")
CST = ("CST since the lowest", "CST since the first")


class Course:
    """One person's right eye, measured some days ago."""

    def __init__(self) -> None:
        self.desk = Desk()
        self.patient = self.desk.enrol("R")

    def measured(self, ago: int, **values: object) -> None:
        self.desk.save(self.patient, "measured", days_ago(ago), R=values)

    def letters(self, ago: int, count: int, **more: object) -> None:
        self.measured(ago, **{**SEEN, "acuity": str(count), "letters": count, **more})

    def scan(self, ago: int, um: int, **more: object) -> None:
        self.measured(ago, **{**self.desk.scan(um), **more})

    def event(self, ago: int, kind: str) -> None:
        EyeEvent.objects.create(
            eye=eye_of(self.patient, "R"),
            day=days_ago(ago),
            kind=kind,
            at=NOW,
            by=self.desk.recorder,
        )

    def rows(self) -> dict[str, ContextRow]:
        (log,) = eye_logs(self.patient)
        return {row.what: row for row in since_rows(log)}

    def amounts(self, *names: str) -> list[str]:
        rows = self.rows()
        return [rows[name].amount for name in names]


@pytest.fixture
def course() -> Course:
    return Course()


def test_the_change_is_told_against_the_best_and_the_first(course: Course) -> None:
    """70 after 60 and 75: 5 below the best, 10 above the first. 320 after 450 and 300 µm."""
    for ago, count in ((90, 60), (60, 75), (30, 70)):
        course.letters(ago, count)
    assert course.amounts(*LETTERS) == ["−5 letters", "+10 letters"]
    note = course.rows()["Letters since the best"].note
    assert note == "75 on 9 Jan 2026, 70 on 8 Feb 2026; a fact only"


def test_thickness_is_told_against_the_lowest_and_the_first(course: Course) -> None:
    for ago, um in ((90, 450), (60, 300), (30, 320)):
        course.scan(ago, um)
    assert course.amounts(*CST) == ["+20 µm", "−130 µm"]


def test_scans_of_a_class_nobody_recorded_are_not_compared(course: Course) -> None:
    for ago, um in ((60, 400), (30, 300)):
        course.measured(ago, cst_um=um)
    assert course.amounts(*CST) == ["not compared", "not compared"]


def test_a_poor_scan_is_neither_first_nor_lowest_nor_told(course: Course) -> None:
    course.scan(90, 250, scan_quality="poor")
    course.scan(60, 400)
    course.scan(30, 380)
    assert course.amounts(*CST) == ["−20 µm", "−20 µm"]
    course.scan(10, 200, scan_quality="poor")
    assert course.amounts(*CST) == ["not compared", "not compared"]
    assert "the last scan is poor" in course.rows()["CST since the first"].note


@pytest.mark.parametrize(
    "kind,expected",
    [(EyeEvent.Kind.LENS, "not compared"), (EyeEvent.Kind.LASER, "+25 letters")],
)
def test_cataract_surgery_between_breaks_the_comparison_and_laser_does_not(
    course: Course, kind: str, expected: str
) -> None:
    course.letters(60, 50)
    course.event(45, kind)
    course.letters(30, 75)
    assert course.amounts(*LETTERS) == [expected, expected]


def test_another_correction_is_not_compared(course: Course) -> None:
    course.letters(60, 50, acuity_correction="none")
    course.letters(30, 75)
    assert course.amounts(*LETTERS) == ["not compared", "not compared"]


def test_letters_of_an_eye_now_off_the_chart_are_not_told_as_present(course: Course) -> None:
    course.letters(60, 60)
    course.letters(30, 65)
    course.measured(
        1, acuity="CF", acuity_notation="off_chart", acuity_correction="glasses", acuity_chart=""
    )
    assert course.amounts(*LETTERS) == ["not compared", "not compared"]
    assert "isn't in letters" in course.rows()["Letters since the best"].note


def test_one_value_alone_is_compared_with_nothing(course: Course) -> None:
    course.letters(30, 70)
    course.scan(20, 300)
    assert course.rows() == {}
