"""The eye course: rights first, then what the page shows."""

import json
import re

import pytest
from django.test import Client
from django.urls import reverse

from clinic import codes
from clinic.fluid_words import FLUID, TITLE
from clinic.models import Entry
from clinic.notice import NOTICE
from tests.clinic.a_person import Person, a_history, a_site, a_user, adopted

pytestmark = pytest.mark.django_db


@pytest.fixture
def person() -> Person:
    site = a_site()
    user = a_user(site, "clinician")
    adopted(site, user)
    return a_history(site, user)


@pytest.fixture
def reader(person: Person) -> Client:
    return signed_in(a_user(person.site, "reader"))


@pytest.fixture
def clinician(person: Person) -> Client:
    return signed_in(person.by)


def signed_in(user: object) -> Client:
    client = Client()
    client.force_login(user, backend="django.contrib.auth.backends.ModelBackend")  # type: ignore[arg-type]
    return client


def address(person: Person, side: str = "right", slug: str = "harbour") -> str:
    return reverse("eye", args=[slug, person.patient.code, side])


def page(client: Client, person: Person, side: str = "right", query: str = "") -> str:
    answer = client.get(address(person, side) + query)
    assert answer.status_code == 200
    return re.sub(r"\s+", " ", answer.content.decode())


def test_nobody_is_sent_to_sign_in(person: Person) -> None:
    answer = Client().get(address(person))
    assert answer.status_code == 302
    assert "/sign-in/" in answer.headers["Location"]


def test_a_person_of_another_site_finds_nothing(person: Person) -> None:
    stranger = signed_in(a_user(a_site("moorland"), "clinician", name="stranger"))
    assert stranger.get(address(person)).status_code == 404
    assert stranger.get(address(person, slug="moorland")).status_code == 404
    for name in ("harbour", "moorland"):
        url = reverse("report", args=[name, person.patient.code])
        assert stranger.get(url).status_code == 404


def test_an_eye_that_is_not_followed_is_not_found(person: Person, reader: Client) -> None:
    alone = Person(person.site, person.by)
    alone.eye("R")
    assert reader.get(address(alone, "left")).status_code == 404


def test_a_code_nobody_has_is_not_found(person: Person, reader: Client) -> None:
    assert reader.get(reverse("eye", args=["harbour", codes.fresh(), "left"])).status_code == 404


def test_a_reader_sees_everything_but_no_answer_form(person: Person, reader: Client) -> None:
    html = page(reader, person)
    assert "CST rose 50 µm" in html
    assert 'class="answer"' not in html


def test_a_clinician_may_answer_what_is_raised(person: Person, clinician: Client) -> None:
    html = page(clinician, person)
    assert f'action="{reverse("answer", args=["harbour", person.patient.code, "right"])}"' in html
    form = html[html.index('<form class="answer"') :]
    assert 'name="rule" value="' in form
    assert 'name="day" value="2025-11-10"' in form
    assert 'name="kind" value="planned"' in form


def test_the_notice_and_the_counts_that_promise_nothing_are_on_the_page(
    person: Person, reader: Client
) -> None:
    html = page(reader, person)
    assert NOTICE in html
    assert re.search(r"limits not reached by \d+ rules?; \d+ couldn.{1,6}t tell", html)
    words = re.sub(r"<[^>]+>", " ", html).replace(NOTICE, "")
    assert not re.search(r"\b(all clear|normal|OK)\b", words)


def test_the_nine_parts_of_the_working_are_shown(person: Person, reader: Client) -> None:
    html = page(reader, person)
    working = html[html.index("CST rose 50 µm") :]
    working = working[: working.index("</article>")]
    for label in (
        "Values used",
        "Arithmetic",
        "Rule",
        "Measurement error",
        "May be weighed",
        "Not for",
        "Source",
    ):
        assert f"<dt>{label}</dt>" in working


def test_the_chart_has_a_role_a_text_and_the_same_numbers_in_a_table(
    person: Person, reader: Client
) -> None:
    html = page(reader, person)
    label = re.search(r'id="eye-chart" role="figure" aria-label="([^"]+)"', html)
    assert label
    assert "Right eye, CST: 3 readings from 400" in label[1]
    table = html[html.index("Numbers of the chart by date") :]
    for shown in ("400 µm", "380 µm", "430 µm", "70 letters", "15 mmHg", "ranibizumab"):
        assert shown in table


def test_the_figure_is_embedded_as_data_and_no_script_or_style_stands_in_the_page(
    person: Person, reader: Client
) -> None:
    html = page(reader, person)
    made = re.search(r'<script id="eye-figure" type="application/json">(.*?)</script>', html)
    assert made
    assert {trace["name"] for trace in json.loads(made[1])["data"]} >= {"Right eye"}
    assert not re.search(r"<script(?![^>]*(src=|application/json))", html)
    assert " style=" not in html
    assert "<style" not in html


def test_both_eyes_are_drawn_on_one_axis_when_asked(person: Person, reader: Client) -> None:
    one = page(reader, person, "left")
    assert "Show both eyes on one time axis" in one
    both = page(reader, person, "left", "?eyes=both")
    assert "Chart of the right eye and the left eye" in both
    assert "Show the left eye only" in both


def test_each_visit_leads_to_its_sheet_and_says_what_was_read(
    person: Person, reader: Client
) -> None:
    html = page(reader, person)
    assert reverse("sheet", args=["harbour", person.patient.code, "2025-09-01", "planned"]) in html
    assert "Regimen&#x27;s reading" in html or "Regimen's reading" in html


def test_a_note_typed_by_somebody_is_shown_as_typed(person: Person, reader: Client) -> None:
    from clinic.models import Note

    note = Note.objects.create(text="<script>x</script>", salt="s", digest="d")
    visit = person.visit(15)
    person.measured(visit, person.patient.eyes.get(side="R"), 400, note=note)
    assert "&lt;script&gt;x&lt;/script&gt;" in page(reader, person)


def test_the_report_is_a_pdf_named_by_the_code_and_noted_in_the_ledger(
    person: Person, reader: Client
) -> None:
    answer = reader.get(reverse("report", args=["harbour", person.patient.code]))
    assert answer.status_code == 200
    assert answer.headers["Content-Type"] == "application/pdf"
    assert answer.content.startswith(b"%PDF-")
    assert f"trend-{person.patient.code}.pdf" in answer.headers["Content-Disposition"]
    assert "no-store" in answer.headers["Cache-Control"]
    entry = Entry.objects.get(action="report.printed")
    assert entry.by is not None
    assert entry.by.username == "reader"


def test_the_evening_list_is_a_pdf_and_noted_for_the_site(person: Person, reader: Client) -> None:
    answer = reader.get(reverse("evening_list", args=["harbour", "2026-03-05"]))
    assert answer.status_code == 200
    assert answer.content.startswith(b"%PDF-")
    assert Entry.objects.get(action="list.printed").subject == "2026-03-05"


def test_what_moves_water_stands_in_words_beside_the_context(
    reader: Client, person: Person
) -> None:
    shown = page(reader, person)
    context = shown[shown.index("Context, not used by any rule") :]
    assert TITLE in context
    assert all(words in context for words in FLUID)
