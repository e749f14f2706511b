"""Both eyes together: the sum by hand, and what keeps a pair from being told."""

import datetime as dt
import math

import pandas as pd
import pytest

from trends.limits import shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import rule_rows

WORDS = {1: "raised", 3: "limit_not_reached", 4: "could_not_tell", 5: "does_not_apply"}


def outcomes(*rows: tuple[str, str, str, str, str]) -> list[str]:
    """Person's rows as eye, date, CST, class, quality; the outcome of each right-eye row."""
    names = ("eye", "date", "cst_um", "oct_class", "scan_quality")
    frame = pd.DataFrame([{"person": "p", **dict(zip(names, row, strict=True))} for row in rows])
    v = Visits.from_frame(frame)
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1), only=["both_thickening"])
    judged = reviewed.judged["both_thickening"]
    return [WORDS[int(judged.outcome[row])] for row in range(len(v)) if int(v.side[row]) == 0]


def pair(day: str, right: str, left: str, klass: str = "SD-BM", quality: str = "") -> tuple:  # type: ignore[type-arg]
    return (("R", day, right, klass, quality), ("L", day, left, klass, ""))


def by_hand(right: tuple[int, int], left: tuple[int, int]) -> tuple[float, float, float]:
    z = [math.log(now / was) / (0.035 * math.sqrt(2)) for was, now in (right, left)]
    return sum(min(3, one) for one in z) / math.sqrt(2.2), z[0], z[1]


@pytest.mark.parametrize(
    "right,left",
    [
        ((300, 330), (350, 385)),
        ((300, 330), (350, 352)),
        ((300, 320), (350, 378)),
        ((300, 330), (350, 365)),
        ((300, 330), (350, 366)),
        ((300, 600), (350, 350)),
        ((300, 400), (350, 363)),
    ],
)
def test_a_pair_is_raised_exactly_where_the_sum_by_hand_says(
    right: tuple[int, int], left: tuple[int, int]
) -> None:
    total, one, two = by_hand(right, left)
    expected = total > 2.33 and one > 0.5 and two > 0.5
    first = pair("2026-01-01", str(right[0]), str(left[0]))
    second = pair("2026-02-01", str(right[1]), str(left[1]))
    assert outcomes(*first, *second)[1] == ("raised" if expected else "limit_not_reached")


def test_one_eye_alone_has_no_such_verdict() -> None:
    rows = [("R", "2026-01-01", "300", "SD-BM", ""), ("R", "2026-02-01", "400", "SD-BM", "")]
    assert outcomes(*rows) == ["does_not_apply", "does_not_apply"]


def test_another_class_or_a_poor_scan_within_the_limit_cannot_be_told() -> None:
    first = pair("2026-01-01", "300", "350")
    other = pair("2026-02-01", "300", "350", klass="TD")
    assert outcomes(*first, *other)[1] == "could_not_tell"
    assert (
        outcomes(*first, *pair("2026-02-01", "305", "352", quality="poor"))[1] == "could_not_tell"
    )
    assert outcomes(*first, *pair("2026-02-01", "340", "400", quality="poor"))[1] == "raised"


def test_a_raised_pair_says_what_a_negative_means_and_shows_the_person() -> None:
    rows = []
    for eye, day, um in (
        ("R", "2026-01-01", "300"),
        ("L", "2026-01-01", "350"),
        ("R", "2026-02-01", "340"),
        ("L", "2026-02-01", "400"),
    ):
        rows.append(
            {
                "person": "p",
                "eye": eye,
                "date": day,
                "cst_um": um,
                "oct_class": "SD-BM",
                "systolic_mmhg": "150",
                "diastolic_mmhg": "92",
            }
        )
    v = Visits.from_frame(pd.DataFrame(rows))
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1))
    one = next(rule_rows(reviewed, "both_thickening", [1]))
    assert one.outcome == "raised" and one.working
    assert any("means nothing" in line for line in one.working["unknowns"])
    # ln(340/300) = 0.12516 and ln(400/350) = 0.13353, each by 0.035 x 1.41421 = 0.049497:
    # 2.53 and 2.70; 5.2264 by the root of 2.2 (1.48324) is 3.52.
    assert one.working["arithmetic"] == [
        "ln(340 / 300) / (0.035 × √2) = +2.53",
        "ln(400 / 350) / (0.035 × √2) = +2.70",
        "(2.53 + 2.70) / √(2 × (1 + 0.1)) = +3.52",
    ]
    assert {x["value"] for x in one.working["values"]} >= {"300", "340", "350", "400"}
    assert ("blood pressure", "150/92") in [(x["what"], x["value"]) for x in one.working["values"]]


def test_a_change_beyond_three_is_cut_and_said_to_be() -> None:
    """ln(4/3) = 0.28768 by 0.049497 = 5.81, cut to 3; ln(363/350) = 0.036469 by it = 0.7368."""
    rows = [*pair("2026-01-01", "300", "350"), *pair("2026-02-01", "400", "363")]
    names = ("eye", "date", "cst_um", "oct_class", "scan_quality")
    frame = pd.DataFrame([{"person": "p", **dict(zip(names, row, strict=True))} for row in rows])
    v = Visits.from_frame(frame)
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1), only=["both_thickening"])
    one = next(rule_rows(reviewed, "both_thickening", [1]))
    assert one.outcome == "raised" and one.working
    # 3.7368 by 1.48324.
    assert one.working["arithmetic"] == [
        "ln(400 / 300) / (0.035 × √2) = +3.00, cut to ±3",
        "ln(363 / 350) / (0.035 × √2) = +0.74",
        "(3.00 + 0.74) / √(2 × (1 + 0.1)) = +2.52",
    ]
