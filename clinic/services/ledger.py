"""The ledger's choke point: every write records itself here, in its own transaction.

Chains are HMAC chains with a key outside the database. They are tamper-evident, not tamper-proof:
a chain by itself can't see that its newest entries were cut off, so the previous day is sealed in
the first write of a new day and the seal is printed on reports.
"""

import datetime as dt
import hashlib
import hmac
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from django.conf import settings
from django.db import models, transaction

from clinic.canonical import canonical, canonical_text
from clinic.models import Chain, Entry, Patient, Seal, Site, User

SYSTEM = "system"


@dataclass(frozen=True)
class Item:
    """One thing to record: on which chain, what was done, to which rows."""

    chain: "str | Patient | Site"
    action: str
    subject: str = ""
    rows: Sequence[models.Model] = field(default=())
    payload: dict[str, Any] | None = None


def chain_name(chain: "str | Patient | Site") -> str:
    """Return the name of the chain a thing is recorded on."""
    if isinstance(chain, Patient):
        return f"patient:{chain.code}"
    if isinstance(chain, Site):
        return f"site:{chain.slug}"
    return chain


def row_digest(row: models.Model) -> str:
    """Return the SHA-256 of a stored row's own columns."""
    columns = {column.attname: getattr(row, column.attname) for column in row._meta.concrete_fields}
    return hashlib.sha256(canonical_text(columns).encode()).hexdigest()


def key() -> bytes:
    """Return the ledger's secret."""
    return str(settings.LEDGER_KEY).encode()


def key_id() -> str:
    """Return a short public name of the key in use."""
    return hashlib.sha256(b"ebbline ledger key id:" + key()).hexdigest()[:12]


def link(previous: str, body: dict[str, Any]) -> str:
    """Return the HMAC-SHA-256 that ties an entry to the one before it."""
    message = previous + "\n" + canonical_text(body)
    return hmac.new(key(), message.encode(), hashlib.sha256).hexdigest()


def entry_body(entry: Entry, chain: str) -> dict[str, Any]:
    """Return what an entry's digest covers."""
    return {
        "chain": chain,
        "seq": entry.seq,
        "at": entry.at,
        "by": entry.by_id,
        "action": entry.action,
        "subject": entry.subject,
        "payload": entry.payload,
        "key_id": entry.key_id,
    }


def _lock_chains(names: Sequence[str]) -> dict[str, Chain]:
    """Return the chain heads, locked in name order so that two writers can't wait crosswise."""
    Chain.objects.bulk_create([Chain(name=name) for name in names], ignore_conflicts=True)
    heads: dict[str, Chain] = {}
    for start in range(0, len(names), 500):
        some = names[start : start + 500]
        found = Chain.objects.select_for_update().filter(name__in=some).order_by("name")
        heads.update({head.name: head for head in found})
    return heads


def _append(head: Chain, item: Item, by: User | None, at: dt.datetime) -> Entry:
    payload: dict[str, Any] = dict(item.payload or {})
    digests = {f"{type(row).__name__}:{row.pk}": row_digest(row) for row in item.rows}
    if digests:
        payload["rows"] = digests
    entry = Entry(
        chain=head,
        seq=head.seq + 1,
        at=at.replace(microsecond=0),
        by=by,
        action=item.action,
        subject=item.subject,
        payload=canonical(payload),
        key_id=key_id(),
        previous=head.digest,
    )
    entry.digest = link(head.digest, entry_body(entry, head.name))
    head.seq, head.digest = entry.seq, entry.digest
    return entry


def record_many(items: Iterable[Item], *, by: User | None, at: dt.datetime) -> list[Entry]:
    """Record several things at once; chains are locked in name order.

    Must run inside the transaction of the write it records; raises ``RuntimeError`` otherwise.
    """
    if not transaction.get_connection().in_atomic_block:
        raise RuntimeError("The ledger is written in the same transaction as what it records.")
    todo = list(items)
    seal_yesterday(at=at)
    heads = _lock_chains(sorted({chain_name(item.chain) for item in todo}))
    entries = [_append(heads[chain_name(item.chain)], item, by, at) for item in todo]
    Entry.objects.bulk_create(entries, batch_size=500)
    Chain.objects.bulk_update(heads.values(), ["seq", "digest"], batch_size=500)
    return entries


def record(
    *,
    chain: "str | Patient | Site",
    action: str,
    by: User | None,
    at: dt.datetime,
    subject: str = "",
    rows: Iterable[models.Model] = (),
    payload: dict[str, Any] | None = None,
) -> Entry:
    """Record one thing and return its entry."""
    item = Item(chain, action, subject, tuple(rows), payload)
    return record_many([item], by=by, at=at)[0]


def seal_yesterday(*, at: dt.datetime) -> Seal | None:
    """Seal all chain heads once a day, in the first write of the day; None if it is done."""
    day = at.astimezone(dt.UTC).date() - dt.timedelta(days=1)
    if Seal.objects.filter(day=day).exists():
        return None
    heads = list(Chain.objects.exclude(seq=0).order_by("name").values_list("name", "seq", "digest"))
    body = {"day": day, "heads": [list(head) for head in heads], "key_id": key_id()}
    previous = Seal.objects.filter(day__lt=day).order_by("-day").values_list("digest", flat=True)
    seal = Seal(
        day=day,
        heads=len(heads),
        key_id=key_id(),
        digest=link(previous[0] if previous else "", body),
        at=at.replace(microsecond=0),
    )
    # Two first writers of a day on PostgreSQL: the second one's seal is simply not needed.
    Seal.objects.bulk_create([seal], ignore_conflicts=True)
    return seal
