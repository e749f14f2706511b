"""A copy holds every row, is checked before it counts, and never overwrites anything."""

import datetime as dt
import json
import os
import signal
import sqlite3
import subprocess
import sys
import threading
from contextlib import closing
from pathlib import Path

import pytest
from django.conf import settings
from django.core.management import CommandError, call_command
from django.db import connection, connections, transaction

from clinic.exchange.backups import BackupRefused, backup, check, list_of, restore_into
from clinic.models import Entry, Eye, User
from clinic.services import ledger
from tests.clinic.at_the_desk import NOW, Desk

pytestmark = pytest.mark.django_db(transaction=True)
ON_SQLITE = settings.DATABASES["default"]["ENGINE"].endswith("sqlite3")


@pytest.fixture
def desk() -> Desk:
    desk = Desk()
    desk.enrol("R", "L")
    write_one(0)
    return desk


def entries(listed: dict[str, dict[str, dict[str, int]]]) -> int:
    return listed["tables"]["clinic_entry"]["rows"]


def write_one(number: int, by: User | None = None) -> None:
    with transaction.atomic():
        ledger.record(chain="system", action=f"note {number}", by=by, at=NOW)


def test_a_copy_checks_and_counts_every_row(desk: Desk, tmp_path: Path) -> None:
    copy = backup(tmp_path / "copies", at=NOW)
    listed = check(copy)
    assert entries(listed) == Entry.objects.count() > 0
    assert listed["tables"]["clinic_eye"]["rows"] == Eye.objects.count() == 2
    assert (tmp_path / "copies").stat().st_mode & 0o777 == 0o700
    assert {path.stat().st_mode & 0o777 for path in (tmp_path / "copies").iterdir()} == {0o600}


def test_two_copies_of_the_same_rows_have_the_same_digests(desk: Desk, tmp_path: Path) -> None:
    first = check(backup(tmp_path, at=NOW))
    second = check(backup(tmp_path, at=NOW + dt.timedelta(minutes=1)))
    assert first["tables"] == second["tables"]
    write_one(1)
    third = check(backup(tmp_path, at=NOW + dt.timedelta(minutes=2)))
    changed = {name for name, one in third["tables"].items() if one != second["tables"][name]}
    assert {"clinic_entry", "clinic_chain"} <= changed
    assert "clinic_patient" not in changed


def test_the_newest_seal_stands_in_the_list(desk: Desk, tmp_path: Path) -> None:
    write_one(1)
    assert check(backup(tmp_path, at=NOW))["seal"]["digest"]


def test_a_changed_copy_is_refused(desk: Desk, tmp_path: Path) -> None:
    copy = backup(tmp_path, at=NOW)
    raw = bytearray(copy.read_bytes())
    raw[len(raw) // 2] ^= 1
    copy.write_bytes(bytes(raw))
    with pytest.raises(BackupRefused, match="the file was changed"):
        check(copy)


def test_a_copy_without_its_list_is_refused(desk: Desk, tmp_path: Path) -> None:
    copy = backup(tmp_path, at=NOW)
    list_of(copy).unlink()
    with pytest.raises(BackupRefused, match="keep both files together"):
        check(copy)


def test_a_copy_is_never_overwritten(desk: Desk, tmp_path: Path) -> None:
    backup(tmp_path, at=NOW)
    with pytest.raises(BackupRefused, match="never overwritten"):
        backup(tmp_path, at=NOW)


def test_a_folder_that_can_t_be_written_is_said_and_leaves_nothing(
    desk: Desk, tmp_path: Path
) -> None:
    blocked = tmp_path / "file"
    blocked.write_text("")
    with pytest.raises(CommandError, match="a folder with room for the whole database"):
        call_command("backup", to=blocked / "copies")
    assert list(tmp_path.iterdir()) == [blocked]


def test_others_write_while_the_copy_is_made_and_it_holds_one_moment(
    desk: Desk, tmp_path: Path
) -> None:
    stop, written = threading.Event(), []

    def writer() -> None:
        try:
            while not stop.is_set():
                write_one(len(written))
                written.append(1)
        finally:
            connections.close_all()

    thread = threading.Thread(target=writer)
    thread.start()
    try:
        copies = [backup(tmp_path, at=NOW + dt.timedelta(seconds=n)) for n in range(3)]
    finally:
        stop.set()
        thread.join()
    assert written
    counts = [entries(check(copy)) for copy in copies]
    assert counts == sorted(counts)
    assert Entry.objects.count() >= counts[-1]


KILLED = """
import os, time, datetime as dt
from pathlib import Path
import django
django.setup()
from django.conf import settings
settings.DATABASES["default"]["NAME"] = os.environ["COPIED"]
from django.db import connections
connections["default"].settings_dict["NAME"] = os.environ["COPIED"]
from clinic.exchange.backups import making
def pause(*_):
    print("half", flush=True)
    time.sleep(60)
making._write_list = pause
making.backup(Path(os.environ["FOLDER"]), at=dt.datetime.now(dt.UTC))
"""


def test_a_process_killed_midway_leaves_no_copy_that_looks_whole(
    desk: Desk, tmp_path: Path
) -> None:
    env = {
        **os.environ,
        "DJANGO_SETTINGS_MODULE": "tests.settings",
        "COPIED": str(connection.settings_dict["NAME"]),
        "FOLDER": str(tmp_path),
    }
    process = subprocess.Popen(
        [sys.executable, "-c", KILLED],
        env=env,
        cwd=settings.BASE_DIR,
        stdout=subprocess.PIPE,
        text=True,
    )
    assert process.stdout is not None
    with process.stdout as told:
        assert told.readline() == "half\n"
        process.send_signal(signal.SIGKILL)
        process.wait()
    assert {path.suffix for path in tmp_path.iterdir()} == {".part"}
    assert check(backup(tmp_path, at=NOW))


if ON_SQLITE:

    def test_a_row_altered_in_the_copy_names_its_table(desk: Desk, tmp_path: Path) -> None:
        from clinic.exchange.backups.digests import file_digest

        copy = backup(tmp_path, at=NOW)
        with closing(sqlite3.connect(copy)) as database:
            database.execute("UPDATE clinic_site SET label = 'Other clinic'")
            database.commit()
        listed = json.loads(list_of(copy).read_text())
        list_of(copy).write_text(json.dumps({**listed, "sha256": file_digest(copy)}))
        with pytest.raises(BackupRefused, match="table clinic_site differs"):
            check(copy)

    def test_a_restored_copy_holds_the_same_rows_and_still_only_grows(
        desk: Desk, tmp_path: Path
    ) -> None:
        copy, target = backup(tmp_path, at=NOW), tmp_path / "back.sqlite3"
        restore_into(copy, target)
        with closing(sqlite3.connect(target)) as database:
            assert database.execute("SELECT count(*) FROM clinic_entry").fetchone() == (
                Entry.objects.count(),
            )
            with pytest.raises(sqlite3.IntegrityError, match="only grows"):
                database.execute("UPDATE clinic_entry SET action = 'x'")
        assert target.stat().st_mode & 0o777 == 0o600
        with pytest.raises(BackupRefused, match="a path where nothing is"):
            restore_into(copy, target)

else:

    def test_a_dump_is_not_put_into_a_file(desk: Desk, tmp_path: Path) -> None:
        copy = backup(tmp_path, at=NOW)
        with pytest.raises(BackupRefused, match="pg_restore"):
            restore_into(copy, tmp_path / "back.sqlite3")


def test_the_commands_say_what_they_did(
    desk: Desk, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    call_command("backup", to=tmp_path)
    said = capsys.readouterr().out
    assert "rows in" in said and "SHA-256" in said and "restore --check" in said
    (copy,) = (path for path in tmp_path.iterdir() if path.suffix != ".json")
    call_command("restore", str(copy), check=True)
    assert "is sound" in capsys.readouterr().out
    list_of(copy).unlink()
    with pytest.raises(CommandError, match="keep both files together"):
        call_command("restore", str(copy), check=True)
