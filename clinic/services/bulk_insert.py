"""Many new rows in little time: prepared before the write lock, numbered and inserted inside it.

``bulk_create`` compiles SQL for each few dozen rows while it holds the lock; for the tens of
thousands of rows of an intake that is far too long. Here every value is prepared beforehand, and
only keys are filled in under the lock. Constraints and triggers of the database hold as always.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from django.db import connection, models


@dataclass
class Prepared:
    """New instances of one model with their column values; links to other new rows stay open.

    ``links`` holds (place of the column, the linked instance of each row or None).
    """

    model: type[models.Model]
    instances: list[models.Model]
    columns: list[str]
    values: list[list[Any]]
    links: list[tuple[int, list[models.Model | None]]]


def prepare(instances: Sequence[models.Model]) -> Prepared | None:
    """Return the instances, all of one model, ready to be inserted; None if there are none."""
    if not instances:
        return None
    model = type(instances[0])
    fields = list(model._meta.concrete_fields)
    links: list[tuple[int, list[models.Model | None]]] = []
    values = [
        [field.get_db_prep_save(field.pre_save(one, True), connection) for field in fields]
        for one in instances
    ]
    for place, field in enumerate(fields):
        if isinstance(field, models.ForeignKey):
            # A link set by its key alone has no instance in the cache; its value is final already.
            linked = [one._state.fields_cache.get(field.name) for one in instances]
            if any(other is not None for other in linked):
                links.append((place, linked))
    columns = [str(field.column) for field in fields]
    return Prepared(model, list(instances), columns, values, links)


def next_keys(model: type[models.Model], count: int) -> range | list[int]:
    """Return primary keys that nobody else will use, while this transaction holds the lock.

    SQLite has one writer at a time, so the keys after the highest one are ours; PostgreSQL hands
    them out from the table's sequence.
    """
    table = model._meta.db_table
    with connection.cursor() as cursor:
        if connection.vendor == "sqlite":
            cursor.execute("SELECT seq FROM sqlite_sequence WHERE name = %s", [table])
            row = cursor.fetchone()
            first = (row[0] if row else 0) + 1
            return range(first, first + count)
        cursor.execute(
            "SELECT nextval(pg_get_serial_sequence(%s, 'id')) FROM generate_series(1, %s)",
            [table, count],
        )
        return [row[0] for row in cursor.fetchall()]


def insert(prepared: Prepared | None) -> int:
    """Insert prepared rows in this transaction, set their primary keys, return how many."""
    if prepared is None:
        return 0
    key_place = prepared.columns.index(str(prepared.model._meta.pk.column))
    keys = next_keys(prepared.model, len(prepared.instances))
    for one, row, key in zip(prepared.instances, prepared.values, keys, strict=True):
        one.pk = key
        row[key_place] = key
    for place, linked in prepared.links:
        for row, other in zip(prepared.values, linked, strict=True):
            if other is not None:
                row[place] = other.pk
    _execute(prepared)
    return len(prepared.instances)


def _execute(prepared: Prepared) -> None:
    quote = connection.ops.quote_name
    columns = ", ".join(quote(column) for column in prepared.columns)
    marks = ", ".join(["%s"] * len(prepared.columns))
    # Table and column names come from the models; every value is a parameter.
    sql = f"INSERT INTO {quote(prepared.model._meta.db_table)} ({columns}) VALUES ({marks})"  # noqa: S608
    with connection.cursor() as cursor:
        cursor.executemany(sql, prepared.values)
