"""Making a copy: SQLite by its own online backup, PostgreSQL by a dump of one snapshot."""

import contextlib
import datetime as dt
import json
import os
import sqlite3
import subprocess
from collections.abc import Mapping
from pathlib import Path

from django.db import connection, transaction

from clinic.exchange.backups.digests import (
    FORM,
    Counted,
    counted,
    file_digest,
    integrity,
    list_of,
    refused,
    server_tables,
    sqlite_tables,
)
from clinic.exchange.backups.tools import run_tool
from clinic.models import Seal


def backup(folder: Path, *, at: dt.datetime) -> Path:
    """Write a checked copy and its list into a folder (0700); returns the copy's path.

    Written under another name first, so that a process killed midway leaves no half copy under the
    real name. Raises ``BackupRefused``.
    """
    made = f"ebbline-{at.astimezone(dt.UTC):%Y%m%dT%H%M%SZ}"
    suffix = ".sqlite3" if connection.vendor == "sqlite" else ".dump"
    copy = folder / f"{made}{suffix}"
    if copy.exists():
        raise refused(
            "backup", copy.name, "a name that isn't taken", "a copy is never overwritten", "Wait."
        )
    half = copy.with_name(copy.name + ".part")
    try:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        tables = _copy_sqlite(half) if connection.vendor == "sqlite" else _dump_server(half)
        listed = _write_list(copy, half, tables, at)
    except (OSError, sqlite3.Error, subprocess.CalledProcessError) as error:
        with contextlib.suppress(OSError):
            half.unlink(missing_ok=True)
        raise refused(
            "backup",
            str(folder),
            "a folder with room for the whole database",
            f"the copy couldn't be written: {error}",
            "Nothing was changed. Make room or choose another folder.",
        ) from error
    half.replace(copy)
    listed.replace(list_of(copy))
    return copy


def _private(path: Path) -> None:
    with contextlib.suppress(FileNotFoundError):
        path.unlink()
    os.close(os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600))


def _copy_sqlite(half: Path) -> dict[str, Counted]:
    """Copy the running database; SQLite hands over one consistent state while others write."""
    _private(half)
    connection.ensure_connection()
    with contextlib.closing(sqlite3.connect(half)) as target:
        connection.connection.backup(target)
        target.execute("PRAGMA journal_mode = DELETE")
        problems = integrity(target)
        if problems:
            raise sqlite3.DatabaseError("; ".join(problems))
        cursor = target.cursor()
        return counted(cursor, sqlite_tables(cursor), server=False)


def _dump_server(half: Path) -> dict[str, Counted]:
    """Dump the database in the snapshot in which its tables are digested."""
    _private(half)
    with transaction.atomic(), connection.cursor() as cursor:
        cursor.execute("SET TRANSACTION ISOLATION LEVEL REPEATABLE READ, READ ONLY")
        cursor.execute("SELECT pg_export_snapshot()")
        snapshot = cursor.fetchone()[0]
        tables = counted(cursor, server_tables(cursor), server=True)
        run_tool("pg_dump", ["-Fc", "--no-owner", f"--snapshot={snapshot}", "-f", str(half)])
    return tables


def _write_list(copy: Path, half: Path, tables: Mapping[str, Counted], at: dt.datetime) -> Path:
    seal = Seal.objects.order_by("-day").first()
    listed = {
        "form": FORM,
        "made": f"{at.astimezone(dt.UTC):%Y-%m-%dT%H:%M:%SZ}",
        "copy": copy.name,
        "sha256": file_digest(half),
        "seal": {"day": seal.day.isoformat(), "digest": seal.digest} if seal else None,
        "tables": {name: {"rows": one.rows, "sha256": one.sha256} for name, one in tables.items()},
    }
    path = list_of(copy).with_name(list_of(copy).name + ".part")
    _private(path)
    path.write_text(json.dumps(listed, indent=1, sort_keys=True) + "\n", encoding="utf-8")
    return path
