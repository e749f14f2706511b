"""The guard on free text: identifiers are caught, clinical strings pass."""

import datetime as dt

import pytest
from django.http import QueryDict

from clinic.forms.sheet import DecidedForm
from clinic.identifiers import found
from clinic.models import Site

BLOCKED = [
    "write to ida.holm@example.org",
    "see https://example.org/x",
    "phone 555 123 4567",
    "MRN: 88A123",
    "hospital no 44512",
    "seen on 03/02/2025",
    "born 1958-03-04",
    "since 3rd March 2025",
    "May 2024 first injection",
    "told Dr Holm",
    "Mrs. O'Brien called",
]
ASKED = [
    "DOB not known",
    "on 6/12/24",
    "wife Ida will drive",
    "name: Holm",
    "94 year old",
    "12 Harbour Road",
    "lot AB12345",
]
# Strings a retina clinic writes; none may be stopped.
CLINICAL = [
    "20/40-2",
    "6/12 6/9",
    "16/18",
    "BP 148/92",
    "CST 412 -> 380",
    "512x128",
    "8.42 mm3",
    "lid infection, back in 2 weeks",
    "2 mg aflibercept, 0.05 ml",
    "IOP 31 after, 24 at 30 min",
    "HbA1c 7.4 %",
    "patient away until spring",
    "VA 0.3 with pinhole",
    "logMAR 0.30 to 0.48",
    "epiretinal membrane, 1+ cells",
    "wk 24, loading 5 of 6",
]


@pytest.mark.parametrize("text", BLOCKED)
def test_an_identifier_is_blocked_with_what_it_is(text: str) -> None:
    matches = found(text)
    assert matches and matches[0].blocks and matches[0].words and matches[0].text in text


@pytest.mark.parametrize("text", ASKED)
def test_what_may_be_one_is_asked_about(text: str) -> None:
    matches = found(text)
    assert matches and not any(match.blocks for match in matches)


@pytest.mark.parametrize("text", CLINICAL)
def test_clinical_strings_pass(text: str) -> None:
    assert found(text) == []


def form_of(**typed: str) -> DecidedForm:
    data = QueryDict(mutable=True)
    data.update({f"R-{name}": value for name, value in typed.items()})
    return DecidedForm(data, prefix="R", site=Site(slug="a"), day=dt.date(2026, 3, 4))


def test_a_note_with_an_identifier_is_refused_and_shown() -> None:
    form = form_of(choice="treat", note="told Dr Holm")
    assert not form.is_valid()
    assert "'Dr Holm' looks like a title with a name" in form.errors["note"][0]


def test_what_may_be_one_is_asked_once_and_can_be_kept() -> None:
    form = form_of(choice="treat", departs_because="wife Ida drives")
    assert form.is_valid() and "wife Ida" in form.asked["departs_because"][0]
    question = form.asked["departs_because"][0]
    kept = form_of(choice="treat", departs_because="wife Ida drives", keep=question)
    assert kept.is_valid() and not kept.asked
