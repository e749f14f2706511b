"""The ledger's chains: every entry is tied to the one before, nothing is written alone."""

import datetime as dt
import hashlib
import hmac
import json

import pytest
from django.conf import settings
from django.db import IntegrityError, transaction

from clinic.canonical import canonical_text
from clinic.models import Chain, Entry, Seal, Site, User
from clinic.services import ledger

pytestmark = pytest.mark.django_db
AT = dt.datetime(2026, 3, 4, 9, 30, 15, 999, tzinfo=dt.UTC)


@pytest.fixture
def person() -> User:
    return User.objects.create_user("ida", password="not-used-here-1")


def write(action: str, person: User, at: dt.datetime = AT) -> Entry:
    with transaction.atomic():
        return ledger.record(chain="system", action=action, by=person, at=at)


def test_an_entry_carries_the_digest_of_the_one_before(person: User) -> None:
    first, second = write("one", person), write("two", person)
    assert (first.seq, second.seq) == (1, 2)
    assert first.previous == ""
    assert second.previous == first.digest
    assert Chain.objects.get(name="system").digest == second.digest


def test_the_digest_is_the_hmac_of_previous_and_canonical_json(person: User) -> None:
    # RFC 2104 HMAC over our canonical form, put together here by hand.
    entry = write("one", person)
    body = {
        "action": "one",
        "at": "2026-03-04T09:30:15Z",
        "by": person.pk,
        "chain": "system",
        "key_id": entry.key_id,
        "payload": {},
        "seq": 1,
        "subject": "",
    }
    text = "\n" + json.dumps(body, sort_keys=True, separators=(",", ":"))
    expected = hmac.new(settings.LEDGER_KEY.encode(), text.encode(), hashlib.sha256).hexdigest()
    assert entry.digest == expected


def test_a_stored_entry_digests_to_the_same_value_when_read_back(person: User) -> None:
    write("one", person)
    entry = Entry.objects.select_related("chain").get()
    assert ledger.link(entry.previous, ledger.entry_body(entry, entry.chain.name)) == entry.digest


@pytest.mark.django_db(transaction=True)
def test_the_ledger_refuses_to_be_written_outside_a_transaction(person: User) -> None:
    with pytest.raises(RuntimeError):
        ledger.record(chain="system", action="one", by=person, at=AT)
    assert Entry.objects.count() == 0


def test_the_first_write_of_a_day_seals_the_day_before_once(person: User) -> None:
    write("one", person)
    write("two", person, AT + dt.timedelta(days=1))
    write("three", person, AT + dt.timedelta(days=1, hours=1))
    sealed = list(Seal.objects.order_by("day").values_list("day", "heads"))
    assert sealed == [(dt.date(2026, 3, 3), 0), (dt.date(2026, 3, 4), 1)]


def test_rows_stand_in_the_payload_as_digests_never_as_values(person: User) -> None:
    site = Site.objects.create(slug="a", label="Harbour clinic", emergency_text="Ring the desk")
    with transaction.atomic():
        entry = ledger.record(chain=site, action="made", by=person, at=AT, rows=[site])
    assert list(entry.payload["rows"]) == [f"Site:{site.pk}"]
    assert "Harbour" not in json.dumps(entry.payload)


def test_text_in_two_unicode_forms_digests_alike() -> None:
    assert canonical_text("e\u0301") == canonical_text("\u00e9")


def test_two_entries_with_one_number_on_a_chain_are_refused(person: User) -> None:
    entry = write("one", person)
    with pytest.raises(IntegrityError), transaction.atomic():
        Entry.objects.create(chain=entry.chain, seq=1, at=AT, action="x", key_id="k", digest="d")
