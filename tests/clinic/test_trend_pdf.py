"""The printed trend report, read back by two readers."""

import hashlib
import io
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pdfplumber
import pytest
from pypdf import PdfReader

from clinic.fluid_words import TITLE
from clinic.notice import NOTICE
from clinic.reports import trend
from clinic.reports.fonts import FILES, FOLDER
from tests.clinic.invented_report import report

ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def made() -> bytes:
    return trend.render([report()])


@pytest.fixture(scope="module")
def reader(made: bytes) -> PdfReader:
    return PdfReader(io.BytesIO(made))


def flat(text: str) -> str:
    return re.sub(r"\s+", " ", text)


def text_of(pdf: bytes) -> list[str]:
    return [flat(page.extract_text()) for page in PdfReader(io.BytesIO(pdf)).pages]


def walk(node: Any) -> list[Any]:
    found, kids = [node], node.get("/K", [])
    for kid in kids if isinstance(kids, list) else [kids]:
        kid = kid.get_object()
        if hasattr(kid, "get"):
            found += walk(kid)
    return found


def elements(reader: PdfReader) -> list[Any]:
    root = reader.trailer["/Root"]["/StructTreeRoot"]
    return [found for kid in root["/K"] for found in walk(kid.get_object())]


def test_it_says_whose_it_is_what_it_covers_who_printed_and_by_which_limits(made: bytes) -> None:
    first = text_of(made)[0]
    for words in (
        "Trend report K7QX3M9TAB",
        "Harbour eye clinic",
        "Covers 5 Feb 2024 to 13 Oct 2025",
        "printed 4 Mar 2026 16:05 by Demo Recorder",
        "Limit set general 1.0.0 (diabetic), adopted 1 Feb 2026 by Demo Clinician",
        "ledger seal 5f2a 91c0 7be4",
        "Ebbline 0.2.0",
    ):
        assert words in first


def test_the_notice_and_the_page_count_stand_on_every_page(made: bytes) -> None:
    pages = text_of(made)
    assert len(pages) > 1
    for number, page in enumerate(pages, start=1):
        assert NOTICE in page
        assert f"page {number} of {len(pages)}" in page
        assert "K7QX3M9TAB" in page


def test_a_raised_verdict_is_printed_with_its_nine_parts(made: bytes) -> None:
    text = " ".join(text_of(made))
    for part in (
        "Weigh today: Right eye: CST rose 38 µm (322 to 360, +11.8 %)",
        "CST 322 µm · 8 Sep 2025 · Scanner 2, SS · entered as 322 · one scanner per eye, assumed",
        "(360 − 322) ÷ 322 = 38 ÷ 322 = 11.8 % ≥ 10 %",
        "10 % and 20 µm, limit set general 1.0.0 · adopted 1 Feb 2026 by Demo Clinician",
        "Invented A and B, 2019, table 2",
        "Published repeatability ±20 µm; the change of 38 µm exceeds it.",
        "Fluid was not graded.",
        "no change, look again; repeat the scan; weigh a shorter interval",
        "eyes within 4 weeks of surgery; scans of another class",
    ):
        assert part in text


def test_an_alarm_shows_the_sites_emergency_text_and_nothing_to_weigh(made: bytes) -> None:
    text = " ".join(text_of(made))
    alarm = text[text.index("Raise first: Right eye") : text.index("Weigh today: Right eye")]
    assert "Ring the eye emergency room, 24 hours, extension 5." in alarm
    assert "May be weighed" not in alarm


def test_what_could_not_be_told_is_said_and_nothing_is_called_clear(made: bytes) -> None:
    text = " ".join(text_of(made))
    assert "couldn't tell whether fluid is back · missing: irf, srf" in text
    assert "limits not reached by 1 rule; 1 couldn't tell" in text
    without_notice = text.replace(NOTICE, "")
    assert not re.search(r"\b(all clear|clear|normal|OK)\b", without_notice)


def test_open_and_given_answers_and_corrections_are_printed(made: bytes) -> None:
    text = " ".join(text_of(made))
    assert "CST corrected from 450 µm: typing error" in text
    assert "13 Oct 2025 Thickening Weigh today open" in text


def test_what_moves_water_is_said_once_in_words_beside_the_context(made: bytes) -> None:
    text = " ".join(text_of(made))
    assert text.count(TITLE) == 1
    assert text.index("Context, not used by any rule") < text.index(TITLE)
    assert "hydrostatic pressure" in text and "oncotic pressure" in text and "pumps water" in text


def test_it_is_tagged_with_language_headings_tables_and_described_figures(
    reader: PdfReader,
) -> None:
    root = reader.trailer["/Root"]
    assert root["/MarkInfo"]["/Marked"] in (True, "true")
    assert root["/Lang"] == "en"
    every = elements(reader)
    tags = [str(one.get("/S")) for one in every]
    assert tags.count("/H1") == 1
    assert tags.count("/H2") == 3  # right eye, left eye, sources
    assert {"/Document", "/Sect", "/P", "/Table", "/TR", "/TH", "/TD", "/Figure"} <= set(tags)
    pictures = [one for one in every if one.get("/S") == "/Figure"]
    assert len(pictures) == 2
    assert all("readings from" in one["/Alt"] for one in pictures)
    headers = [one for one in every if one.get("/S") == "/TH"]
    assert all(one["/A"]["/Scope"] == "/Column" for one in headers)


def test_every_drawn_thing_is_inside_a_mark_or_an_artifact(reader: PdfReader) -> None:
    """Between BDC/BMC and EMC, or it is neither text nor line: nothing escapes the tags."""
    for page in reader.pages:
        depth = 0
        for line in page.get_contents().get_data().decode("latin-1").splitlines():
            depth += line.endswith(("BDC", "BMC"))
            depth -= line.strip() == "EMC"
            assert depth in (0, 1)
            if re.search(r"\bTj\b|\bS$|\bf$", line):
                assert depth == 1, line
        assert depth == 0


def test_words_of_two_lines_or_labels_are_not_run_together_in_the_tags(made: bytes) -> None:
    with pdfplumber.open(io.BytesIO(made)) as opened:
        page = opened.pages[0]
        by_mark: dict[int, str] = {}
        for char in page.chars:
            if char["mcid"] is not None:
                by_mark[char["mcid"]] = by_mark.get(char["mcid"], "") + char["text"]
    told = list(by_mark.values())
    assert "Cause, status diabetic · in treatment" in told
    assert any("5 weeks after the last injection" in text for text in told)


def test_only_our_two_fonts_are_in_it_and_both_are_embedded(reader: PdfReader) -> None:
    fonts = {}
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].get_object().values():
            fonts[font.get_object()["/BaseFont"]] = font.get_object()
    assert {name.split("+")[-1] for name in fonts} == {"DejaVuSans", "DejaVuSans-Bold"}
    for font in fonts.values():
        assert "/FontFile2" in font["/FontDescriptor"]


def test_the_vendored_fonts_have_the_signs_we_print_and_the_digests_we_wrote() -> None:
    from reportlab.pdfbase import pdfmetrics

    from clinic.reports.fonts import BOLD, REGULAR, register

    register()
    account = (FOLDER / "VENDOR.txt").read_text()
    for file in FILES.values():
        digest = hashlib.sha256((FOLDER / file).read_bytes()).hexdigest()
        assert f"{digest}  {file}" in account
    for name in (REGULAR, BOLD):
        drawn = pdfmetrics.getFont(name).face.charToGlyph
        assert not [
            sign for sign in "≥≤Δµμ−±×÷≈√²½…–“”·°ąěøßЖЯαΩ\u2610\u25a0" if ord(sign) not in drawn
        ]


def test_the_same_content_gives_the_same_bytes_in_another_process(made: bytes) -> None:
    code = (
        "import hashlib;from tests.clinic.invented_report import report;"
        "from clinic.reports import trend;"
        "print(hashlib.sha256(trend.render([report()])).hexdigest())"
    )
    told = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert told.stdout.strip() == hashlib.sha256(made).hexdigest()
    assert trend.render([report()]) == made


def test_another_moment_of_printing_gives_other_bytes(made: bytes) -> None:
    import dataclasses
    import datetime as dt

    later = dataclasses.replace(report(), printed_at=dt.datetime(2026, 3, 4, 16, 6))
    assert trend.render([later]) != made


def test_words_typed_by_people_are_printed_as_typed_and_never_read_as_markup() -> None:
    typed = '<img src="/etc/hostname"> <b>unclosed & <para> {{x}} \u0007 \u4e2d'
    text = " ".join(text_of(trend.render([report(note=typed)])))
    assert '<img src="/etc/hostname"> <b>unclosed & <para> {{x}}' in text
    assert "\u0007" not in text


def test_no_print_uses_the_markup_paragraphs_of_the_library() -> None:
    for file in (ROOT / "clinic").rglob("*.py"):
        text = file.read_text()
        assert "Paragraph(" not in text, file
        assert "platypus" not in text, file


def test_a_long_history_flows_over_pages_under_repeated_headers_and_nothing_is_lost() -> None:
    pdf = trend.render([report(visits=60)])
    pages = text_of(pdf)
    days = re.findall(r"\b\d{1,2} [A-Z][a-z]{2} \d{4} (?:planned|check only)", " ".join(pages))
    assert len(days) == 60 + 9
    assert sum("CST, scanner" in page for page in pages) >= 4


def test_nothing_is_drawn_outside_the_margins_of_the_paper() -> None:
    word = "W" * 300
    for paper in ("A4", "Letter"):
        pdf = trend.render([report(visits=40, note=word)], paper)
        with pdfplumber.open(io.BytesIO(pdf)) as opened:
            letters = 0
            for page in opened.pages:
                for char in (one for one in page.chars if one["text"].strip()):
                    assert 39 <= char["x0"] < char["x1"] <= page.width - 39
                    assert 20 <= char["top"] < char["bottom"] <= page.height - 10
                    letters += char["text"] == "W"
            assert letters >= 300


@pytest.mark.parametrize(("paper", "size"), [("A4", (595, 842)), ("Letter", (612, 792))])
def test_both_papers_have_their_size(paper: str, size: tuple[int, int]) -> None:
    """A4 is 210 by 297 mm, Letter 8.5 by 11 inches; a point is 1/72 inch."""
    box = PdfReader(io.BytesIO(trend.render([report()], paper))).pages[0].mediabox
    assert (round(box.width), round(box.height)) == size


def test_an_unknown_paper_and_an_empty_session_are_refused() -> None:
    with pytest.raises(ValueError, match="allowed: A4, Letter"):
        trend.render([report()], "A5")
    with pytest.raises(ValueError, match="no report"):
        trend.render([])


def test_a_session_is_one_pdf_with_a_bookmark_a_person_and_its_own_page_count() -> None:
    codes = [f"K{n:02}X3M9TAB" for n in range(5)]
    read = PdfReader(io.BytesIO(trend.render([report(code) for code in codes])))
    marks = [mark for mark in read.outline if not isinstance(mark, list)]
    assert [mark.title for mark in marks] == codes
    each = len(read.pages) // 5
    for n, mark in enumerate(marks):
        page = read.get_destination_page_number(mark)
        assert page == n * each
        text = flat(read.pages[page].extract_text())
        assert f"Trend report {codes[n]}" in text
        assert f"page 1 of {each}" in text


def test_no_tone_on_paper_is_a_colour_that_turns_faint_in_grey() -> None:
    """Relative luminance by WCAG 2.1; text at 4.5 to 1 against white, lines at 3 to 1."""
    from clinic.chart import styles
    from clinic.reports import paper

    def contrast(tone: str) -> float:
        parts = [int(tone[n : n + 2], 16) / 255 for n in (1, 3, 5)]
        linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]
        return 1.05 / (0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2] + 0.05)

    for tone in (paper.INK, paper.QUIET, paper.DEEP, styles.INK, styles.QUIET, styles.LIMIT):
        assert contrast(tone) >= 4.5
    assert all(contrast(style.tone) >= 3 for style in styles.EYE_STYLES.values())
    marks = {(style.marker, style.dash) for style in styles.EYE_STYLES.values()}
    assert len(marks) == 2


def test_laying_out_a_report_is_known_without_loading_the_pdf_library() -> None:
    """Start-up and every page stay light: the library is loaded when something is printed."""
    code = (
        "import sys, clinic.reports.trend, clinic.reports.evening;"
        "print([name for name in ('reportlab', 'plotly', 'pandas') if name in sys.modules])"
    )
    told = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert told.stdout.strip() == "[]"
