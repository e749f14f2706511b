"""The bench's own arithmetic; times are printed, never tested."""

import pytest

from clinic.management.bench.figures import Figure, shown
from clinic.management.bench.many_visits import day_after, many_visits
from clinic.management.bench.plain_loop import thickening_by_loop
from clinic.management.bench.server import heavy_imports
from trends.limits import shipped
from trends.review import review
from trends.verdict import RAISED


@pytest.mark.parametrize(
    ("figure", "met"),
    [
        (Figure("list page", 149.0, "ms", 150), True),
        (Figure("list page", 151.0, "ms", 150), False),
        (Figure("ratio", 60.0, "times", 50, at_least=True), True),
        (Figure("ratio", 40.0, "times", 50, at_least=True), False),
        (Figure("packages", 0, "", 0), True),
        (Figure("without a goal", 3.0, "s"), None),
    ],
)
def test_a_figure_says_whether_its_goal_is_met(figure: Figure, met: bool | None) -> None:
    assert figure.met() is met
    assert ("NOT MET" in figure.line()) == (met is False)


def test_a_figure_is_printed_beside_its_goal_with_the_share() -> None:
    line = Figure("list page", 75.0, "ms", 150).line()
    assert "75 ms" in line and "goal <= 150 ms (0.50 of it): met" in line
    assert shown(1234.5) == "1,234" and shown(0.01234) == "0.0123"


def test_start_up_imports_no_heavy_package() -> None:
    assert heavy_imports() == []


def test_the_plain_loop_asks_the_same_question_as_the_engine() -> None:
    visits, general = many_visits(40, 12), shipped("general")
    table = general.rule("thickening")
    assert table is not None
    judged = review(visits, general, day_after(12), only={"thickening"}).outcome["thickening"]
    raised = int((judged == RAISED).sum())
    assert raised > 0
    assert thickening_by_loop(visits, table, 40) == raised
