"""The half-widths of the chart's bars, as published."""

import pytest

from trends.measures.repeatability import repeatability


@pytest.mark.parametrize(
    ("what", "method", "half_width", "source"),
    [
        ("letters", "etdrs", 9.0, "Rosser"),  # plus and minus 0.18 logMAR, 0.02 a letter
        ("letters", "electronic_etdrs", 10.0, "Beck"),  # "10 letters is unlikely to be variability"
        ("iop", "applanation", 2.6, "Tonnu"),  # two observers, 95 % limits of agreement
        ("iop", "non_contact", 3.2, "Tonnu"),  # repeated in one session
    ],
)
def test_each_half_width_is_the_published_one(
    what: str, method: str, half_width: float, source: str
) -> None:
    found = repeatability(what, method)
    assert found is not None
    assert found.tenths / 10 == half_width
    assert source in found.source
    assert found.unit == ("letters" if what == "letters" else "mmHg")


def test_a_method_without_a_published_number_has_none() -> None:
    assert repeatability("iop", "rebound") is None
    assert repeatability("letters", "snellen") is None
