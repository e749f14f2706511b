"""Behind the app's back: what was altered, removed, inserted or reordered is named."""

from collections.abc import Iterator
from typing import Any

import pytest
from django.core.management import CommandError, call_command
from django.db import connection, transaction

from clinic.models import Chain, Entry, Measured, Patient
from clinic.services import ledger
from clinic.services.ledger_check import check
from clinic.triggers import lifted
from tests.clinic.at_the_desk import NOW, SEEN, TODAY, Desk

pytestmark = pytest.mark.django_db(transaction=True)


@pytest.fixture
def desk() -> Iterator[Desk]:
    desk = Desk()
    patient = desk.enrol("R")
    desk.save(patient, "measured", TODAY, R={**SEEN, "cst_um": 400})
    desk.save(patient, "decided", TODAY, R={"choice": "treat"})
    yield desk


def patient_chain() -> Chain:
    return Chain.objects.get(name=f"patient:{Patient.objects.get().code}")


def behind(sql: str, values: list[Any]) -> None:
    """Run a statement as somebody with the database in hand would."""
    with lifted(), connection.cursor() as cursor:
        cursor.execute(sql, values)


def found() -> list[str]:
    return [str(one) for one in check().broken]


def test_an_untouched_ledger_holds_and_its_rows_are_compared(desk: Desk) -> None:
    state = check()
    assert state.broken == []
    assert state.entries == Entry.objects.count()
    assert state.chains == Chain.objects.exclude(seq=0).count()
    recorded = {name.split(":")[0] for one in Entry.objects.all() for name in one.payload["rows"]}
    assert recorded >= {"Patient", "Eye", "Measured", "Decided"}
    assert state.rows == sum(len(one.payload["rows"]) for one in Entry.objects.all())


def test_an_altered_entry_is_named(desk: Desk) -> None:
    chain = patient_chain()
    behind("UPDATE clinic_entry SET action = 'other' WHERE chain_id = %s AND seq = 2", [chain.pk])
    (said,) = found()
    assert said == f"{chain.name}, entry 2: was altered: its digest doesn't fit"


def test_an_entry_removed_from_the_middle_is_named(desk: Desk) -> None:
    chain = patient_chain()
    behind("DELETE FROM clinic_entry WHERE chain_id = %s AND seq = 2", [chain.pk])
    assert f"{chain.name}, entry 2: missing; entry 3 comes next" in found()


def test_the_newest_entry_removed_without_its_head_is_named(desk: Desk) -> None:
    chain = patient_chain()
    behind("DELETE FROM clinic_entry WHERE chain_id = %s AND seq = %s", [chain.pk, chain.seq])
    assert f"{chain.name}, entry {chain.seq}: missing; the head says {chain.seq} entries" in found()


def test_a_whole_chain_removed_is_named(desk: Desk) -> None:
    chain = patient_chain()
    behind("DELETE FROM clinic_entry WHERE chain_id = %s", [chain.pk])
    assert f"{chain.name}, entry 1: missing; the head says {chain.seq} entries" in found()


def test_an_entry_inserted_by_hand_is_named(desk: Desk) -> None:
    chain = patient_chain()
    last = chain.entries.get(seq=chain.seq)
    behind(
        "INSERT INTO clinic_entry (chain_id, seq, at, action, subject, payload, key_id, previous,"
        " digest) VALUES (%s, %s, %s, 'slipped in', '', '{}', %s, %s, %s)",
        [chain.pk, chain.seq + 1, NOW, last.key_id, last.digest, "0" * 64],
    )
    behind(
        "UPDATE clinic_chain SET seq = %s, digest = %s WHERE id = %s",
        [chain.seq + 1, "0" * 64, chain.pk],
    )
    assert f"{chain.name}, entry {chain.seq + 1}: was altered: its digest doesn't fit" in found()


def test_two_entries_put_into_another_order_are_named(desk: Desk) -> None:
    chain = patient_chain()
    for was, now in ((1, 1001), (2, 1), (1001, 2)):
        behind(
            "UPDATE clinic_entry SET seq = %s WHERE chain_id = %s AND seq = %s",
            [now, chain.pk, was],
        )
    assert f"{chain.name}, entry 1: doesn't continue the entry before it" in found()


def test_a_measured_value_altered_in_the_log_is_named(desk: Desk) -> None:
    row = Measured.objects.get()
    behind("UPDATE clinic_measured SET cst_um = 300 WHERE id = %s", [row.pk])
    (said,) = found()
    assert said.startswith(patient_chain().name) and said.endswith(
        f"Measured {row.pk} was altered in the log"
    )


def test_a_record_removed_from_the_log_is_named(desk: Desk) -> None:
    row = Measured.objects.get()
    behind("DELETE FROM clinic_measured WHERE id = %s", [row.pk])
    (said,) = found()
    assert said.endswith(f"Measured {row.pk} was removed from the log")


def test_entries_made_with_another_key_are_said_to_be(desk: Desk, settings: Any) -> None:
    settings.LEDGER_KEY = "another key of at least fifty characters, made up here for this"
    said = found()
    assert said and all("made with another key" in one for one in said)


def test_a_chain_and_its_head_cut_short_together_is_what_it_cannot_see(
    desk: Desk, capsys: pytest.CaptureFixture[str]
) -> None:
    with transaction.atomic():
        ledger.record(chain="cut", action="kept", by=None, at=NOW)
        ledger.record(chain="cut", action="lost", by=None, at=NOW)
    chain = Chain.objects.get(name="cut")
    first = chain.entries.get(seq=1)
    behind("DELETE FROM clinic_entry WHERE chain_id = %s AND seq = 2", [chain.pk])
    behind("UPDATE clinic_chain SET seq = 1, digest = %s WHERE id = %s", [first.digest, chain.pk])
    assert found() == []
    call_command("ledger_check")
    assert "cut off together with its head" in capsys.readouterr().out


def test_the_command_names_what_broke_and_fails(
    desk: Desk, capsys: pytest.CaptureFixture[str]
) -> None:
    call_command("ledger_check")
    assert "entries hold" in capsys.readouterr().out
    behind("DELETE FROM clinic_entry WHERE seq = 2", [])
    with pytest.raises(CommandError, match="don't hold"):
        call_command("ledger_check")
    assert "BROKEN" in capsys.readouterr().out
