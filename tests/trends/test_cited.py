"""A verdict cites what had a part in it: its rule's sources and the numbers of its own scan."""

import datetime as dt

import pytest

from tests.trends.test_said_of_blanks import last
from trends.frames import read_rows
from trends.limits import shipped
from trends.review import review
from trends.wording import regimen_rows


def keys(rule: str, **scan: str) -> tuple[set[str], set[str]]:
    """Return the sources cited, and those of a number from memory."""
    one = last(rule, {"cst_um": "280", **scan}, {"cst_um": "340", **scan})
    assert one.working is not None
    cited = one.working["source"]
    return {s["key"] for s in cited}, {s["key"] for s in cited if s["memory"]}


@pytest.mark.parametrize(
    "klass,cited,memory",
    [
        ("TD", {"krzystolik-2007", "site-choice"}, {"krzystolik-2007"}),
        ("SD-RPE", {"nct00442156", "crr-2019", "site-choice"}, set()),
        ("SD-BM", {"nct00442156", "crr-2019", "site-choice"}, set()),
    ],
)
def test_a_rise_cites_the_repeatability_of_its_own_class(
    klass: str, cited: set[str], memory: set[str]
) -> None:
    assert keys("thickening", oct_class=klass) == (cited, memory)


def test_a_limit_crossed_cites_the_limit_of_its_own_class() -> None:
    cited, memory = keys("crossed_limit", oct_class="SD-BM", sex="f")
    assert {"chalam-2012", "crr-2019"} <= cited and not memory
    assert "ss-oct-chinese" not in cited
    # The limits of this class are from memory.
    assert keys("crossed_limit", oct_class="SD-RPE", sex="f")[1] == {"nct01909791"}


def test_a_scan_without_a_class_shows_every_source() -> None:
    assert {"krzystolik-2007", "crr-2019"} <= keys("thickening")[0]


def test_a_regimen_cites_the_limits_of_the_scans_class() -> None:
    letters = {"acuity": "70", "acuity_notation": "etdrs_letters", "acuity_chart": "etdrs"}
    row = {"person": "a", "eye": "R", "date": "2026-01-01", "cause": "diabetic", "cst_um": "400"}
    course = {"oct_class": "SS", "regimen": "as_needed_stability", "agent": "aflibercept"}
    v = read_rows([{**row, **course, **letters}])
    (one,) = regimen_rows(review(v, shipped("general"), dt.date(2026, 6, 1)), "as_needed_stability")
    assert one.working is not None
    cited = {source["key"] for source in one.working["source"]}
    assert "ss-oct-chinese" in cited and "chalam-2012" not in cited
