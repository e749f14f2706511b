"""Digests of a database's tables, the same function for both databases and for a copy."""

import hashlib
import json
import sqlite3
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from trends.errors import EbblineError

ROWS_AT_ONCE = 2000
FORM = 1
Cursor = Any


class BackupRefused(EbblineError):
    """A copy that can't be made or doesn't check; nothing was changed."""


@dataclass(frozen=True)
class Counted:
    """One table: how many rows, and the SHA-256 over them in the order of their key."""

    rows: int
    sha256: str


def refused(what: str, value: Any, allowed: str, why: str, then: str) -> BackupRefused:
    """Return the error of a copy."""
    return BackupRefused(what, value, allowed, why, then)


def digest_of(cursor: Cursor, table: str, key: str, *, server: bool) -> Counted:
    """Return the count and digest of a table's rows.

    PostgreSQL writes each row as text itself, so that two drivers can't read a value differently;
    its session must be in UTC.
    """
    whole, rows = hashlib.sha256(), 0
    columns = "one::text" if server else "*"
    cursor.execute(f'SELECT {columns} FROM "{table}" one ORDER BY "{key}"')  # noqa: S608  our names
    while some := cursor.fetchmany(ROWS_AT_ONCE):
        for row in some:
            text = json.dumps(list(row), default=str, ensure_ascii=False, sort_keys=True)
            whole.update(text.encode() + b"\n")
            rows += 1
    return Counted(rows, whole.hexdigest())


def sqlite_tables(cursor: Cursor) -> dict[str, str]:
    """Return the tables of an SQLite file and the column each is ordered by."""
    cursor.execute(
        "SELECT name FROM sqlite_master WHERE type = 'table' AND name NOT LIKE 'sqlite_%'"
    )
    names = sorted(row[0] for row in cursor.fetchall())
    found = {}
    for name in names:
        cursor.execute(f'PRAGMA table_info("{name}")')
        columns = cursor.fetchall()
        keys = [column[1] for column in columns if column[5]]
        found[name] = keys[0] if keys else columns[0][1]
    return found


def server_tables(cursor: Cursor) -> dict[str, str]:
    """Return the tables of the PostgreSQL database and the column each is ordered by."""
    cursor.execute(
        "SELECT c.relname, a.attname FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace "
        "JOIN pg_index i ON i.indrelid = c.oid AND i.indisprimary "
        "JOIN pg_attribute a ON a.attrelid = c.oid AND a.attnum = i.indkey[0] "
        "WHERE n.nspname = 'public' AND c.relkind = 'r' ORDER BY c.relname"
    )
    return dict(cursor.fetchall())


def counted(cursor: Cursor, tables: Mapping[str, str], *, server: bool) -> dict[str, Counted]:
    """Return the count and digest of each table; ``server`` where it is PostgreSQL's."""
    return {name: digest_of(cursor, name, key, server=server) for name, key in tables.items()}


def list_of(copy: Path) -> Path:
    """Return the path of a copy's list."""
    return copy.with_name(copy.name + ".json")


def file_digest(path: Path) -> str:
    """Return the SHA-256 of a file's bytes."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def integrity(database: sqlite3.Connection) -> list[str]:
    """Return what SQLite finds wrong with a file, and foreign keys that lead nowhere."""
    found = [str(row[0]) for row in database.execute("PRAGMA integrity_check") if row[0] != "ok"]
    loose = database.execute("PRAGMA foreign_key_check").fetchall()
    return found + ([f"{len(loose)} rows point to rows that aren't there"] if loose else [])
