"""``manage.py trend_report``: several codes in one PDF, clear words for a wrong one."""

import io
from pathlib import Path

import pytest
from django.core.management import CommandError, call_command
from pypdf import PdfReader

from clinic import codes
from clinic.models import Entry
from tests.clinic.a_person import Person, a_history, a_site, a_user, adopted

pytestmark = pytest.mark.django_db


@pytest.fixture
def people() -> list[Person]:
    site = a_site()
    user = a_user(site, "clinician")
    adopted(site, user)
    return [a_history(site, user), a_history(site, user)]


def run(*args: str) -> str:
    out = io.StringIO()
    call_command("trend_report", *args, stdout=out)
    return out.getvalue()


def test_several_codes_make_one_pdf_with_a_bookmark_each(
    people: list[Person], tmp_path: Path
) -> None:
    wanted = [person.patient.code for person in people]
    said = run(*wanted, "--out", str(tmp_path / "session.pdf"))
    read = PdfReader(tmp_path / "session.pdf")
    assert [mark.title for mark in read.outline if not isinstance(mark, list)] == wanted
    assert "2 reports" in said


def test_a_code_may_be_typed_in_small_letters_and_with_spaces(
    people: list[Person], tmp_path: Path
) -> None:
    code = people[0].patient.code
    run(f"{code[:5].lower()} {code[5:]}", "--out", str(tmp_path / "one.pdf"))
    assert f"Trend report {code}" in PdfReader(tmp_path / "one.pdf").pages[0].extract_text()


def test_each_print_is_in_the_ledger_of_its_person(people: list[Person], tmp_path: Path) -> None:
    run(*(person.patient.code for person in people), "--out", str(tmp_path / "session.pdf"))
    printed = Entry.objects.filter(action="report.printed").values_list("chain__name", flat=True)
    assert sorted(printed) == sorted(f"patient:{person.patient.code}" for person in people)


def test_a_mistyped_code_is_named_and_nothing_is_written(
    people: list[Person], tmp_path: Path
) -> None:
    code = people[0].patient.code
    wrong = code[:-1] + ("0" if code[-1] != "0" else "1")
    with pytest.raises(CommandError, match="check characters do not fit") as caught:
        run(code, wrong, "--out", str(tmp_path / "no.pdf"))
    assert caught.value.returncode == 2
    assert not (tmp_path / "no.pdf").exists()
    assert not Entry.objects.filter(action="report.printed").exists()


def test_a_code_nobody_is_enrolled_under_is_said(people: list[Person], tmp_path: Path) -> None:
    with pytest.raises(CommandError, match="nobody is enrolled under it here") as caught:
        run(codes.fresh(), "--out", str(tmp_path / "no.pdf"))
    assert caught.value.returncode == 2


def test_a_missing_folder_is_said_before_anything_is_printed(
    people: list[Person], tmp_path: Path
) -> None:
    with pytest.raises(CommandError, match="does not exist"):
        run(people[0].patient.code, "--out", str(tmp_path / "none" / "no.pdf"))
    assert not Entry.objects.filter(action="report.printed").exists()


def test_the_paper_is_the_sites_own_unless_another_is_asked_for(tmp_path: Path) -> None:
    """Letter is 612 by 792 points, A4 595 by 842."""
    site = a_site(paper="Letter")
    person = a_history(site, a_user(site, "clinician"))
    run(person.patient.code, "--out", str(tmp_path / "letter.pdf"))
    run(person.patient.code, "--out", str(tmp_path / "a4.pdf"), "--paper", "A4")
    sizes = [
        round(PdfReader(tmp_path / name).pages[0].mediabox.height)
        for name in ("letter.pdf", "a4.pdf")
    ]
    assert sizes == [792, 842]
