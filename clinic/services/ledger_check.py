"""Whether the ledger still ties together, and whether the log still is what was recorded.

Reads only. A chain can't see that its newest entries were cut off together with its head; the seal
of the day, printed on reports and backups, can. Rows taken in by file are recorded by one digest a
person and aren't compared row by row.
"""

import itertools
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

from django.apps import apps
from django.db import models

from clinic.models import APPEND_ONLY, Chain, Entry
from clinic.services import ledger

ROWS_AT_ONCE = 500


@dataclass(frozen=True)
class Broken:
    """One place where the ledger doesn't hold: which chain, which entry, what is wrong."""

    chain: str
    seq: int
    what: str

    def __str__(self) -> str:
        return f"{self.chain}, entry {self.seq}: {self.what}"


@dataclass
class State:
    """What a check found: counts, and the first broken place of each chain."""

    chains: int = 0
    entries: int = 0
    rows: int = 0
    broken: list[Broken] = field(default_factory=list)


def _first_break(head: Chain, entries: Iterator[Entry]) -> tuple[int, Broken | None]:
    """Walk one chain from its start; return how many entries held and the first that doesn't."""
    previous, seq = "", 0
    for entry in entries:
        if entry.seq != seq + 1:
            return seq, Broken(head.name, seq + 1, f"missing; entry {entry.seq} comes next")
        if entry.previous != previous:
            return seq, Broken(head.name, entry.seq, "doesn't continue the entry before it")
        if entry.key_id != ledger.key_id():
            return seq, Broken(head.name, entry.seq, f"made with another key ({entry.key_id})")
        if ledger.link(previous, ledger.entry_body(entry, head.name)) != entry.digest:
            return seq, Broken(head.name, entry.seq, "was altered: its digest doesn't fit")
        previous, seq = entry.digest, entry.seq
    if (seq, previous) != (head.seq, head.digest):
        return seq, Broken(head.name, seq + 1, f"missing; the head says {head.seq} entries")
    return seq, None


def links(state: State, *, told: Callable[[str], None] = lambda _words: None) -> None:
    """Walk every chain and note the first break of each."""
    heads = Chain.objects.in_bulk()
    entries = Entry.objects.order_by("chain_id", "seq").iterator(chunk_size=2000)
    seen = set()
    for chain_id, mine in itertools.groupby(entries, key=lambda entry: entry.chain_id):
        head = heads[chain_id]
        seen.add(chain_id)
        held, broken = _first_break(head, mine)
        state.chains += 1
        state.entries += held
        if broken is not None:
            state.broken.append(broken)
            told(str(broken))
    for chain_id, head in heads.items():
        if chain_id not in seen and head.seq:
            state.broken.append(Broken(head.name, 1, f"missing; the head says {head.seq} entries"))


GROWS = {model.__name__ for model in APPEND_ONLY}
"""Rows of these never change, so that each must still have the digest it was recorded with."""


def recorded_rows() -> dict[str, dict[int, tuple[str, str, int]]]:
    """Return by model and key the newest recorded digest, with the chain and entry it stands in."""
    found: dict[str, dict[int, tuple[str, str, int]]] = {}
    entries = Entry.objects.select_related("chain").order_by("pk")
    for entry in entries.iterator(chunk_size=2000):
        for name, digest in (entry.payload or {}).get("rows", {}).items():
            model, _, key = name.partition(":")
            found.setdefault(model, {})[int(key)] = (digest, entry.chain.name, entry.seq)
    return found


def rows(state: State) -> None:
    """Compare every recorded row with the log as it is now."""
    for name, recorded in sorted(recorded_rows().items()):
        model = apps.get_model("clinic", name)
        keys = sorted(recorded)
        for start in range(0, len(keys), ROWS_AT_ONCE):
            some = keys[start : start + ROWS_AT_ONCE]
            _compare(state, model, {key: recorded[key] for key in some})


def _compare(
    state: State, model: type[models.Model], recorded: dict[int, tuple[str, str, int]]
) -> None:
    present = model._default_manager.in_bulk(list(recorded))
    for key, (digest, chain, seq) in recorded.items():
        state.rows += 1
        row = present.get(key)
        what = f"{model.__name__} {key}"
        if row is None:
            state.broken.append(Broken(chain, seq, f"{what} was removed from the log"))
        elif model.__name__ in GROWS and ledger.row_digest(row) != digest:
            state.broken.append(Broken(chain, seq, f"{what} was altered in the log"))


def check() -> State:
    """Return what a whole check found."""
    state = State()
    links(state)
    rows(state)
    return state
