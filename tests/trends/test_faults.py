"""Doubts on invented eyes with faults put in: they notice what they promise and ask seldom.

What the doubts are held to (wanted of the product): at least 80 % of swaps of eyes that differ by
more than a tenth, at most one question in a hundred clean visits. On real files see the numbers
``python -m tests.faults`` prints.
"""

import random

import pandas as pd
import pytest

from tests import faults

EYES, VISITS = 120, 9


def invented() -> pd.DataFrame:
    """Two eyes a person; noise of published size, slow change, a pressure and letters."""
    draw, rows = random.Random(11), []
    for person in range(EYES // 2):
        for side in "RL":
            um, letters, iop = draw.uniform(250, 480), draw.uniform(45, 82), draw.uniform(11, 19)
            for visit in range(VISITS):
                um *= draw.gauss(1, 0.03)
                letters += draw.gauss(0, 1.5)
                # Scan noise 3.5 % of thickness, letters 2.5 (s.d.), pressure 1.5 mmHg.
                rows.append(
                    {
                        "person": f"P{person:03d}",
                        "eye": side,
                        "date": f"2025-{visit + 1:02d}-10",
                        "cst_um": f"{um * draw.gauss(1, 0.035):.0f}",
                        "oct_class": "SD-BM",
                        "acuity": f"{min(95, max(5, letters + draw.gauss(0, 2.5))):.0f}",
                        "acuity_notation": "etdrs_letters",
                        "acuity_chart": "etdrs",
                        "iop_mmhg": f"{max(5, iop + draw.gauss(0, 1.5)):.0f}",
                        "iop_method": "applanation",
                    }
                )
    return pd.DataFrame(rows)


@pytest.fixture(scope="module")
def results() -> dict[str, faults.Result]:
    return faults.detection(invented(), assumed=False, each=150, seed=1)


def test_clean_visits_are_asked_about_less_than_once_in_a_hundred() -> None:
    size, counts = faults.clean_questions(invented(), assumed=False)
    assert size == EYES * VISITS
    assert counts["any"] <= size / 100


def test_swapped_eyes_that_differ_are_noticed(results: dict[str, faults.Result]) -> None:
    one = results["eyes swapped"]
    assert one.differing > 50
    assert one.any_differing >= 0.8 * one.differing
    assert one.asked["looks_like_other_eye"] >= 0.95 * one.any_differing


def test_exchanged_fields_are_noticed_or_refused(results: dict[str, faults.Result]) -> None:
    assert results["mm for µm"].refused == results["mm for µm"].tried == 150
    assert results["CST and IOP exchanged"].refused == results["CST and IOP exchanged"].tried > 0
    letters = results["letters and IOP exchanged"]
    assert letters.any >= 0.8 * (letters.tried - letters.refused) > 0


def test_exchanged_digits_are_noticed_where_they_change_much(
    results: dict[str, faults.Result],
) -> None:
    # Simulated eyes with a forecast reached 73 % of those over a tenth. Without one fewer are told
    # from real change at the same rate of false questions; a third is what is promised.
    one = results["digits exchanged"]
    assert one.any_differing >= one.differing / 3 > 0


def test_a_centre_point_for_the_mean_is_not_noticed_and_not_promised(
    results: dict[str, faults.Result],
) -> None:
    one = results["centre point for mean"]
    assert one.any <= 0.05 * one.tried
