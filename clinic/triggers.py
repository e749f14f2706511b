"""Database triggers that keep the log append-only on both databases.

Django drops SQLite triggers when it rebuilds a table, so they are re-made after each migration
(``post_migrate``) and a system check fails when one is missing.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from django.db import connections
from django.db.backends.base.base import BaseDatabaseWrapper

from clinic import models

# A note's text may be emptied by redaction, so it is guarded apart: never deleted.
DELETE_ONLY = (models.Note, models.Patient, models.Eye, models.Chain)


def wanted() -> list[tuple[str, str, str]]:
    """Return (trigger name, table, event) of every trigger that must exist."""
    rows = [
        (f"{model._meta.db_table}_no_{event.lower()}", model._meta.db_table, event)
        for model in models.APPEND_ONLY
        for event in ("UPDATE", "DELETE")
    ]
    rows += [
        (f"{model._meta.db_table}_no_delete", model._meta.db_table, "DELETE")
        for model in DELETE_ONLY
    ]
    return rows


def present(connection: BaseDatabaseWrapper) -> set[str]:
    """Return the names of the triggers that are there."""
    if connection.vendor == "sqlite":
        sql = "SELECT name FROM sqlite_master WHERE type = 'trigger'"
    else:
        sql = "SELECT tgname FROM pg_trigger WHERE NOT tgisinternal AND tgenabled <> 'D'"
    with connection.cursor() as cursor:
        cursor.execute(sql)
        return {row[0] for row in cursor.fetchall()}


def missing(connection: BaseDatabaseWrapper) -> list[str]:
    """Return the names of the triggers that are not there, of tables that are."""
    tables = set(connection.introspection.table_names())
    have = present(connection)
    return [name for name, table, _ in wanted() if table in tables and name not in have]


def _create_sqlite(cursor: Any, name: str, table: str, event: str) -> None:
    cursor.execute(
        f"CREATE TRIGGER IF NOT EXISTS {name} BEFORE {event} ON {table} BEGIN "
        f"SELECT RAISE(ABORT, '{table} only grows: {event} refused'); END"
    )


def _create_postgres(cursor: Any, name: str, table: str, event: str) -> None:
    cursor.execute(f"DROP TRIGGER IF EXISTS {name} ON {table}")
    cursor.execute(
        f"CREATE TRIGGER {name} BEFORE {event} ON {table} "
        "FOR EACH ROW EXECUTE FUNCTION ebbline_only_grows()"
    )
    if event == "DELETE":
        cursor.execute(f"DROP TRIGGER IF EXISTS {name}_all ON {table}")
        cursor.execute(
            f"CREATE TRIGGER {name}_all BEFORE TRUNCATE ON {table} "
            "FOR EACH STATEMENT EXECUTE FUNCTION ebbline_only_grows()"
        )


def install(connection: BaseDatabaseWrapper) -> None:
    """Make every trigger whose table exists. Both databases answer with an integrity error."""
    tables = set(connection.introspection.table_names())
    create = _create_sqlite if connection.vendor == "sqlite" else _create_postgres
    with connection.cursor() as cursor:
        if connection.vendor != "sqlite":
            cursor.execute(
                "CREATE OR REPLACE FUNCTION ebbline_only_grows() RETURNS trigger AS $$ BEGIN "
                "RAISE EXCEPTION '% only grows: % refused', TG_TABLE_NAME, TG_OP "
                "USING ERRCODE = 'integrity_constraint_violation'; END $$ LANGUAGE plpgsql"
            )
        for name, table, event in wanted():
            if table in tables:
                create(cursor, name, table, event)


def remove(connection: BaseDatabaseWrapper) -> None:
    """Drop every trigger. Only for tests' teardown and for migrations that rebuild tables."""
    with connection.cursor() as cursor:
        for name, table, _event in wanted():
            if connection.vendor == "sqlite":
                cursor.execute(f"DROP TRIGGER IF EXISTS {name}")
            else:
                cursor.execute(f"DROP TRIGGER IF EXISTS {name} ON {table}")
                cursor.execute(f"DROP TRIGGER IF EXISTS {name}_all ON {table}")


@contextmanager
def lifted(alias: str = "default") -> Iterator[None]:
    """Lift the triggers for a moment: for a test's teardown, never for the app."""
    remove(connections[alias])
    try:
        yield
    finally:
        install(connections[alias])


def after_migrate(*, using: str, **_: Any) -> None:
    """Re-make the triggers after a migration."""
    install(connections[using])
