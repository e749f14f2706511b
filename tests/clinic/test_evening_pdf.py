"""The evening-before list, read back."""

import dataclasses
import datetime as dt
import io
import re

from pypdf import PdfReader

from clinic.content import EveningBlock, EveningEye, EveningList
from clinic.notice import NOTICE
from clinic.reports import evening

EYE = EveningEye(
    "Right eye",
    "diabetic · treat-and-extend, extended to 10 weeks · 9 weeks since treatment",
    "CST 360 µm (+38 since 8 Sep 2025) · 61 letters (−6) · IOP 14.0 mmHg",
    "Regimen: shorten to 8 weeks (visit of 13 Oct 2025)",
    ("Weigh today, from visit of 13 Oct 2025: CST rose 38 µm (322 to 360, +11.8 %)",),
    "2 more kept in mind; 1 couldn't tell; limits not reached by 9 rules",
)
LEFT = dataclasses.replace(EYE, side_words="Left eye")


def content(count: int) -> EveningList:
    return EveningList(
        "Harbour eye clinic",
        dt.date(2026, 3, 5),
        dt.datetime(2026, 3, 4, 18, 0),
        "Demo Recorder",
        "0.2.0",
        NOTICE,
        ("Planned: ranibizumab 0.5 mg 7, aflibercept 2 mg 4. 3 people for both eyes.",),
        tuple(
            EveningBlock(
                f"K{n:02}X3M9TAB", "born 1957 · female", "09:10", "Weigh today", (EYE, LEFT)
            )
            for n in range(count)
        ),
        "5f2a 91c0 7be4",
        "Ring extension 5.",
    )


def pages(made: bytes) -> list[str]:
    read = PdfReader(io.BytesIO(made)).pages
    return [re.sub(r"\s+", " ", page.extract_text()) for page in read]


def test_each_person_of_the_day_is_on_it_with_the_notice_on_every_page() -> None:
    read = pages(evening.render(content(30)))
    text = " ".join(read)
    assert all(f"K{n:02}X3M9TAB" in text for n in range(30))
    assert all(NOTICE in page and f"of {len(read)}" in page for page in read)
    assert "Clinic list 5 Mar 2026" in read[0]
    assert "Ring extension 5." in read[0]


def test_a_person_is_not_divided_over_two_pages() -> None:
    read = pages(evening.render(content(30)))
    assert len(read) > 1
    for page in read:
        people = len(re.findall(r"K\d\dX3M9TAB", page))
        assert page.count("Right eye ·") == page.count("Left eye ·") == people
        assert page.count("limits not reached by 9 rules") == 2 * people


def test_an_empty_day_says_so() -> None:
    assert "Nobody is due or booked on this day." in pages(evening.render(content(0)))[0]


def test_the_same_list_gives_the_same_bytes() -> None:
    assert evening.render(content(3)) == evening.render(content(3))
