"""Sources: open to every role of the site, each entry with numbers, citations and an example."""

import re
import time

import pytest
from django.test import Client

from clinic.selectors.source_page import contents, quiet_examples
from tests.clinic.at_the_desk import Desk, signed_in
from tests.clinic.filled_forms import words_of
from trends.sources import by_name

pytestmark = pytest.mark.django_db
SOURCES = "/s/harbour/sources/"


@pytest.fixture
def desk() -> Desk:
    return Desk(adopt=False)


@pytest.fixture
def client(desk: Desk) -> Client:
    return signed_in(desk.reader)


@pytest.mark.parametrize("role", ["recorder", "clinician", "steward", "reader"])
def test_every_role_of_the_site_may_read_them(desk: Desk, role: str) -> None:
    client = signed_in(getattr(desk, role))
    assert client.get(SOURCES).status_code == 200
    assert client.get(f"{SOURCES}pressure/").status_code == 200
    assert client.post(SOURCES).status_code == 405


def test_another_sites_person_and_an_unknown_entry_find_nothing(desk: Desk, client: Client) -> None:
    away = Desk("moorland", adopt=False)
    assert signed_in(away.reader).get(SOURCES).status_code == 404
    assert signed_in(away.reader).get(f"{SOURCES}pressure/").status_code == 404
    assert client.get(f"{SOURCES}thickness/").status_code == 404


def test_the_contents_link_every_entry_and_say_what_nothing_raised_means(client: Client) -> None:
    page = client.get(SOURCES)
    html = page.content.decode()
    assert re.findall(rf'href="{SOURCES}([^"/]+)/"', html) == list(by_name())
    assert html.count('aria-current="page"') == 1
    anchors = set(re.findall(r'href="#([^"]+)"', html)) - {"main"}
    assert anchors and anchors <= set(re.findall(r'id="([^"]+)"', html))
    shown = words_of(page)
    assert "Nothing raised. That isn't a finding that all is well" in shown
    assert "missing or not comparable: IOP" in shown


@pytest.mark.parametrize("name", by_name())
def test_every_entry_shows_its_words_each_number_and_each_citation(
    name: str, client: Client
) -> None:
    one, page = by_name()[name], client.get(f"{SOURCES}{name}/")
    assert page.status_code == 200
    shown = " ".join(words_of(page).split())
    assert one.title in shown and all(paragraph in shown for paragraph in one.paragraphs)
    for source in one.cites:
        assert " ".join(source.text.split()) in shown and source.strength in shown
    for limit in one.limits:
        assert limit.name.replace("_", " ") in shown
        assert not limit.place or limit.place in shown
    marks = sum(limit.memory for limit in (*one.limits, *one.elsewhere))
    assert shown.count("From memory, check the original.") == marks
    assert all(story.title in shown for story in one.stories)


def test_an_example_is_shown_with_nine_parts_and_computed_arithmetic(client: Client) -> None:
    shown = " ".join(words_of(client.get(f"{SOURCES}thickening/")).split())
    parts = ["1 Fact", "2 Values used", "3 Arithmetic", "4 Rule and limit", "5 Source"]
    parts += ["6 Measurement error", "7 Missing or assumed", "8 May be weighed"]
    places = [shown.index(part) for part in [*parts, "9 Doesn't apply to"]]
    assert places == sorted(places)
    # (483 - 439) / 439 = 10.02 %
    assert "(483 − 439) / 439 = +10.0 %" in shown and "raised, weigh today." in shown


def test_no_page_waits_for_the_examples_longer_than_a_moment(client: Client) -> None:
    contents.cache_clear()
    quiet_examples.cache_clear()
    started = time.perf_counter()
    assert client.get(SOURCES).status_code == 200
    # Two busy cores; the first page of a process works all of it out.
    assert time.perf_counter() - started < 5
