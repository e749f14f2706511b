"""Every address, as nobody, as each role, and as another site's person."""

import datetime as dt
import re
from collections.abc import Iterator

import pytest
from django.apps import apps
from django.test import Client
from django.urls import URLPattern, URLResolver, get_resolver

from clinic.models import Eye, Membership, Patient, PersonFact, Site, User, Visit

pytestmark = pytest.mark.django_db
AT = dt.datetime(2026, 3, 4, 9, 30, tzinfo=dt.UTC)
OPEN_TO_NOBODY = {"sign_in", "health"}
NOT_OF_A_SITE = {"home", "sign_in", "sign_out", "health"}
EXAMPLES = {
    "slug": "harbour",
    "day": "2026-03-04",
    "kind": "planned",
    "side": "right",
    "part": "measured",
    "rule": "thickening",
    "what": "stroke",
    "seq": "1",
}


def walk(patterns: list[URLPattern | URLResolver], before: str = "") -> Iterator[tuple[str, str]]:
    """Yield (name, route) of every address."""
    for one in patterns:
        here = before + str(one.pattern)
        if isinstance(one, URLResolver):
            yield from walk(one.url_patterns, here)
        else:
            yield one.name or here, here


def filled(route: str, code: str) -> str:
    """Return an address with an example for each of its places."""

    def example(match: re.Match[str]) -> str:
        name = match.group(1).split(":")[-1]
        return {**EXAMPLES, "code": code}[name]

    return "/" + re.sub(r"<([^>]+)>", example, route)


ADDRESSES = sorted(set(walk(get_resolver().url_patterns)))


@pytest.fixture
def code() -> str:
    from clinic import codes

    return codes.fresh()


@pytest.fixture
def harbour(code: str) -> Site:
    site = Site.objects.create(slug="harbour", label="Harbour", emergency_text="Ring the desk")
    owner = User.objects.create_user("owner")
    patient = Patient.objects.create(code=code, site=site, enrolled_at=AT, enrolled_by=owner)
    for side in ("R", "L"):
        Eye.objects.create(patient=patient, side=side)
    Visit.objects.create(patient=patient, day=AT.date(), kind="planned", at=AT, by=owner)
    PersonFact.objects.create(patient=patient, seq=1, kind="stroke", day=AT.date(), at=AT, by=owner)
    return site


def person(name: str, site: Site, *roles: str) -> Client:
    user = User.objects.create_user(name)
    for role in roles:
        Membership.objects.create(user=user, site=site, role=role)
    client = Client(raise_request_exception=True)
    client.force_login(user, backend="django.contrib.auth.backends.ModelBackend")
    return client


def counts() -> dict[str, int]:
    """Return how many rows every table of ours holds."""
    return {
        m.__name__: m._default_manager.count() for m in apps.get_app_config("clinic").get_models()
    }


@pytest.mark.parametrize("name,route", ADDRESSES)
def test_nobody_is_sent_to_the_sign_in(name: str, route: str, harbour: Site, code: str) -> None:
    if name in OPEN_TO_NOBODY:
        assert Client().get(filled(route, code)).status_code == 200
        return
    for method in ("get", "post"):
        answer = getattr(Client(), method)(filled(route, code))
        assert answer.status_code == 302, (method, name)
        assert answer["Location"].startswith("/sign-in/"), (method, name)


@pytest.mark.parametrize("name,route", ADDRESSES)
def test_another_sites_person_gets_the_answer_of_a_site_that_is_not_there(
    name: str, route: str, harbour: Site, code: str
) -> None:
    if name in NOT_OF_A_SITE:
        return
    away = Site.objects.create(slug="away", label="Away", emergency_text="Ring")
    stranger = person("stranger", away, "recorder", "clinician", "steward", "reader")
    there = filled(route, code)
    nowhere = there.replace("/s/harbour/", "/s/nowhere/")
    for method in ("get", "post"):
        answer = getattr(stranger, method)(there)
        # 405 says only that an address takes no such method, whatever the site.
        assert answer.status_code in {404, 405}, (method, name)
        assert answer.status_code == getattr(stranger, method)(nowhere).status_code, (method, name)
    assert 404 in {stranger.get(there).status_code, stranger.post(there).status_code}, name


@pytest.mark.parametrize("name,route", ADDRESSES)
def test_a_person_of_two_sites_finds_nothing_of_the_one_under_the_other(
    name: str, route: str, harbour: Site, code: str
) -> None:
    if "<code>" not in route:
        return
    away = Site.objects.create(slug="away", label="Away", emergency_text="Ring")
    both = person("both", away, "recorder", "clinician")
    there = filled(route, code).replace("/s/harbour/", "/s/away/")
    assert {both.get(there).status_code, both.post(there).status_code} <= {404, 405}, name


@pytest.mark.parametrize("role", ["recorder", "clinician", "steward", "reader"])
@pytest.mark.parametrize("name,route", ADDRESSES)
def test_no_role_breaks_an_address(
    role: str, name: str, route: str, harbour: Site, code: str
) -> None:
    client = person(role, harbour, role)
    for method in ("get", "post"):
        answer = getattr(client, method)(filled(route, code))
        assert answer.status_code in {200, 302, 400, 403, 404, 405, 409, 422}, (method, name)
        assert "no-store" in answer["Cache-Control"]


@pytest.mark.parametrize("name,route", ADDRESSES)
def test_a_reader_changes_nothing_anywhere(name: str, route: str, harbour: Site, code: str) -> None:
    if name in NOT_OF_A_SITE:
        return
    reader = person("reader", harbour, "reader")
    before = counts()
    answer = reader.post(filled(route, code))
    assert answer.status_code in {403, 405}, (name, answer.status_code)
    assert counts() == before
