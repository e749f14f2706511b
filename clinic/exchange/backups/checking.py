"""Checking a copy: every table gives the digest its list names; and putting one into place."""

import contextlib
import json
import os
import re
import shutil
import sqlite3
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

from django.db import connection

from clinic import triggers
from clinic.exchange.backups.digests import (
    FORM,
    Counted,
    Cursor,
    counted,
    file_digest,
    integrity,
    list_of,
    refused,
    server_tables,
    sqlite_tables,
)
from clinic.exchange.backups.tools import run_tool


def check(copy: Path) -> dict[str, Any]:
    """Return a copy's list after every table gave the digest it names; raises ``BackupRefused``."""
    listed = _read_list(copy)
    if file_digest(copy) != listed["sha256"]:
        raise refused(
            "copy", copy.name, "the bytes its list names", "the file was changed", "Use another."
        )
    with opened(copy) as cursor:
        server = copy.suffix != ".sqlite3"
        names = server_tables(cursor) if server else sqlite_tables(cursor)
        found = counted(cursor, names, server=server)
        missing = [] if server else _missing_triggers(cursor)
    wrong = _differing(listed["tables"], found) + missing
    if wrong:
        raise refused(
            "copy", copy.name, "the rows its list names", "; ".join(wrong), "Use another."
        )
    return listed


def _read_list(copy: Path) -> dict[str, Any]:
    try:
        listed: dict[str, Any] = json.loads(list_of(copy).read_text(encoding="utf-8"))
        if not copy.is_file() or listed["form"] != FORM:
            raise KeyError(copy.name)
    except (OSError, ValueError, KeyError) as error:
        raise refused(
            "copy",
            copy.name,
            f"a copy with its list {list_of(copy).name} beside it",
            f"what it should hold can't be read ({type(error).__name__})",
            "Name the copy itself and keep both files together.",
        ) from error
    return listed


def _differing(listed: Mapping[str, Any], found: Mapping[str, Counted]) -> list[str]:
    names = sorted({*listed, *found})
    return [
        f"table {name} differs"
        for name in names
        if name not in listed
        or name not in found
        or (found[name].rows, found[name].sha256) != (listed[name]["rows"], listed[name]["sha256"])
    ]


def _missing_triggers(cursor: Cursor) -> list[str]:
    cursor.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'")
    have = {row[0] for row in cursor.fetchall()}
    gone = [name for name, _table, _event in triggers.wanted() if name not in have]
    return [f"{len(gone)} append-only triggers are missing"] if gone else []


@contextlib.contextmanager
def opened(copy: Path) -> Iterator[Cursor]:
    """Open a copy for reading: the SQLite file itself, or a dump in a database of its own."""
    if copy.suffix == ".sqlite3":
        with contextlib.closing(sqlite3.connect(f"file:{copy}?mode=ro", uri=True)) as database:
            problems = integrity(database)
            if problems:
                raise refused(
                    "copy", copy.name, "a sound file", "; ".join(problems), "Use another."
                )
            yield database.cursor()
        return
    with scratch_database(copy) as cursor:
        yield cursor


@contextlib.contextmanager
def scratch_database(copy: Path) -> Iterator[Cursor]:
    """Restore a dump into a database of its own on the same server, dropped afterwards."""
    import psycopg

    name = "ebbline_check_" + re.sub(r"[^a-z0-9]", "_", copy.stem.lower())
    run_tool("dropdb", ["--if-exists", name])
    run_tool("createdb", [name])
    try:
        run_tool("pg_restore", ["--no-owner", "--exit-on-error", "-d", name, str(copy)], name)
        settings = connection.settings_dict
        with psycopg.connect(
            host=settings["HOST"],
            port=settings["PORT"] or None,
            user=settings["USER"],
            password=settings["PASSWORD"] or None,
            dbname=name,
            options="-c TimeZone=UTC",
        ) as database:
            yield database.cursor()
    finally:
        run_tool("dropdb", ["--if-exists", name])


def restore_into(copy: Path, target: Path) -> dict[str, Any]:
    """Check a copy and put it at a path where nothing stands yet; SQLite only.

    A dump is put into an empty database with ``pg_restore``; nothing is ever overwritten here.
    """
    listed = check(copy)
    if copy.suffix != ".sqlite3":
        raise refused(
            "restore",
            copy.name,
            "a copy of an SQLite database",
            "a dump goes into an empty database of the server",
            "Run pg_restore --no-owner -d DATABASE on it, then set DATABASE_URL.",
        )
    if target.exists():
        raise refused(
            "restore", str(target), "a path where nothing is", "it would be lost", "Move it away."
        )
    half = target.with_name(target.name + ".part")
    with contextlib.suppress(FileNotFoundError):
        half.unlink()
    with os.fdopen(os.open(half, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600), "wb") as file:
        with copy.open("rb") as source:
            shutil.copyfileobj(source, file)
        file.flush()
        os.fsync(file.fileno())
    half.replace(target)
    return listed
