"""Limits: rights first, then proposing, confirming and what the pages say."""

import pytest
from time_machine import travel

from clinic.models import Adoption, AdoptionConfirmed, User
from clinic.selectors.access import site_for
from clinic.selectors.limit_page import LimitPage, limit_page
from clinic.services.limit_sets import from_memory, limit_set_seed
from tests.clinic.at_the_desk import NOW, Desk, days_ago, open_rules, signed_in
from tests.clinic.filled_forms import form_to, forms_in, own_form, words_of
from trends.limits import shipped

pytestmark = pytest.mark.django_db
LIMITS, ADOPT = "/s/harbour/limits/", "/s/harbour/limits/adopt/"
PROPOSE = "/s/harbour/limits/propose/"


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


@pytest.fixture
def desk() -> Desk:
    limit_set_seed(at=NOW)
    return Desk(adopt=False)


def propose(desk: Desk) -> None:
    client = signed_in(desk.steward)
    form = form_to(client.get(LIMITS), "/propose/")
    assert client.post(form.action, form.values).status_code == 302


@pytest.mark.parametrize(
    "role,status", [("steward", 302), ("clinician", 403), ("recorder", 403), ("reader", 403)]
)
def test_only_a_steward_may_propose(desk: Desk, role: str, status: int) -> None:
    digest = shipped("general").digest
    answer = signed_in(getattr(desk, role)).post(PROPOSE, {"digest": digest})
    assert answer.status_code == status
    assert Adoption.objects.exists() is (status == 302)


@pytest.mark.parametrize(
    "role,status", [("clinician", 200), ("steward", 403), ("recorder", 403), ("reader", 403)]
)
def test_only_a_clinician_may_confirm(desk: Desk, role: str, status: int) -> None:
    propose(desk)
    assert signed_in(getattr(desk, role)).get(ADOPT).status_code == status
    if status == 403:
        sent = {"ticked": from_memory(shipped("general"))}
        assert signed_in(getattr(desk, role)).post(ADOPT, sent).status_code == 403
        assert not AdoptionConfirmed.objects.exists()


def test_another_clinics_proposal_is_not_found(desk: Desk) -> None:
    away = Desk("moorland", adopt=False)
    propose(desk)
    stranger = signed_in(away.clinician)
    assert stranger.get(ADOPT).status_code == 404
    assert stranger.get("/s/moorland/limits/adopt/").status_code == 404
    assert "Proposed:" not in words_of(stranger.get("/s/moorland/limits/"))


def test_every_role_reads_every_entry_with_its_source(desk: Desk) -> None:
    for role in ("recorder", "clinician", "steward", "reader"):
        answer = signed_in(getattr(desk, role)).get(LIMITS)
        page = words_of(answer)
        assert "No limit set adopted: only the floor rules run" in page
        assert "From memory, check the original" in page
        assert "Crim" in page or "NCT00442156" in page
        proposing = [form for form in forms_in(answer) if form.action == PROPOSE]
        assert bool(proposing) is (role == "steward")


def test_a_set_nobody_stored_cannot_be_proposed(desk: Desk) -> None:
    assert signed_in(desk.steward).post(PROPOSE, {"digest": "0" * 64}).status_code == 404


def test_without_a_proposal_there_is_nothing_to_confirm(desk: Desk) -> None:
    assert signed_in(desk.clinician).get(ADOPT).status_code == 404


def test_a_proposal_is_not_in_force_until_a_clinician_ticked_every_value_from_memory(
    desk: Desk,
) -> None:
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400))
    desk.save(patient, "measured", days_ago(1), R=desk.scan(450))
    propose(desk)
    client = signed_in(desk.clinician)
    assert "not in force until a clinician confirms it" in words_of(client.get(LIMITS))
    assert open_rules(patient) == []
    form = own_form(client.get(ADOPT))
    boxes = form.boxes["ticked"]
    assert sorted(boxes) == sorted(from_memory(shipped("general")))

    lacking = client.post(ADOPT, {**form.values, "ticked": boxes[1:]})
    assert lacking.status_code == 422
    assert "A number from memory may be wrong" in words_of(lacking)
    assert boxes[0] in words_of(lacking)
    # What was ticked is still ticked; only the missing one isn't.
    assert own_form(lacking).boxes["ticked"] == [boxes[0]]
    assert not AdoptionConfirmed.objects.exists()

    done = client.post(ADOPT, {**form.values, "ticked": boxes}, follow=True)
    assert "Adopted" in words_of(done)
    assert "In force: limit set general 1" in words_of(done)
    assert f"confirmed by {desk.clinician}" in words_of(done)
    assert "thickening" in open_rules(patient)


def test_confirming_twice_finds_nothing_left_to_confirm(desk: Desk) -> None:
    propose(desk)
    client = signed_in(desk.clinician)
    sent = {"ticked": from_memory(shipped("general"))}
    assert client.post(ADOPT, sent).status_code == 302
    assert client.post(ADOPT, sent).status_code == 404
    assert AdoptionConfirmed.objects.count() == 1


def test_one_person_holding_both_roles_may_do_both(desk: Desk) -> None:
    from clinic.models import Membership

    Membership.objects.create(user=desk.steward, site=desk.site, role="clinician")
    propose(desk)
    sent = {"ticked": from_memory(shipped("general"))}
    assert signed_in(desk.steward).post(ADOPT, sent).status_code == 302


def test_the_set_in_force_stands_first_and_others_show_what_they_change(desk: Desk) -> None:
    limit_page = page_of(Desk("moorland").clinician, "moorland")
    first, *others = limit_page.sets
    assert first.in_force and first.row.name == "general" and not first.against
    assert not any(one.in_force for one in others)
    early = next(one for one in others if one.row.name == "protocol_i")
    # Protocol I changes the as-needed numbers only, and leaves the other regimens out.
    assert [table.name for table in early.differing] == ["as_needed_stability"]
    assert "Treat and extend" in early.absent and "Fixed interval" in early.absent
    assert {table.name for table in early.alike} >= {"thickening", "letters_lost", "pressure"}


def page_of(user: User, slug: str) -> LimitPage:
    return limit_page(site_for(user, slug))
