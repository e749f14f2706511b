"""Revisions of a record: what changed against the one before, and what that makes of it."""

import secrets
from collections.abc import Mapping, Sequence
from hashlib import sha256
from typing import Any

from django.db import models

from clinic.models import EyeRecord, MoreAcuity, MorePressure, MoreTreatment, Note, Revision

BOOKKEEPING = {"id", "visit_id", "eye_id", "rev", "change", "reason", "at", "by_id", "note_id"}
CHILDREN: dict[str, tuple[type[models.Model], str]] = {
    "more_acuities": (MoreAcuity, "measured"),
    "more_pressures": (MorePressure, "measured"),
    "more_treatments": (MoreTreatment, "treated"),
}
Children = Mapping[str, Sequence[Mapping[str, Any]]]


def columns(row: EyeRecord) -> dict[str, Any]:
    """Return the clinical columns of a record."""
    return {
        column.attname: getattr(row, column.attname)
        for column in row._meta.concrete_fields
        if column.attname not in BOOKKEEPING
    }


def is_blank(value: Any) -> bool:
    """Say whether a column holds nothing; 0 is a value."""
    return value is None or value is False or value == ""


def child_columns(name: str) -> list[str]:
    """Return the clinical columns of one kind of child row."""
    model, parent = CHILDREN[name]
    mine = {"id", f"{parent}_id"}
    return [one.attname for one in model._meta.concrete_fields if one.attname not in mine]


def children_of(row: EyeRecord) -> dict[str, list[dict[str, Any]]]:
    """Return a record's children as mappings, by name; only those that exist."""
    found: dict[str, list[dict[str, Any]]] = {}
    for name, (model, parent) in CHILDREN.items():
        if not hasattr(row, name):
            continue
        rows = model._default_manager.filter(**{parent: row}).order_by("pk")
        if kept := [dict(one) for one in rows.values(*child_columns(name))]:
            found[name] = kept
    return found


def as_children(typed: Children) -> dict[str, list[dict[str, Any]]]:
    """Return typed children as they read when stored: with every column, blanks filled."""
    found: dict[str, list[dict[str, Any]]] = {}
    for name, rows in typed.items():
        model, _parent = CHILDREN[name]
        full = [model(**one) for one in rows]
        if full:
            found[name] = [{c: getattr(one, c) for c in child_columns(name)} for one in full]
    return found


def kind_of_change(before: EyeRecord | None, after: EyeRecord, typed: Children) -> str:
    """Return entry, addition, correction, or nothing when nothing differs."""
    if before is None or before.change == Revision.Change.WITHDRAWN:
        return Revision.Change.ENTRY
    old, new = columns(before), columns(after)
    differing = [name for name in new if new[name] != old[name]]
    old_children, new_children = children_of(before), as_children(typed)
    if not differing and old_children == new_children:
        return ""
    only_blanks = all(is_blank(old[name]) for name in differing)
    kept = all(
        rows == new_children.get(name, [])[: len(rows)] for name, rows in old_children.items()
    )
    return Revision.Change.ADDITION if only_blanks and kept else Revision.Change.CORRECTION


def repeats(last: models.Model, values: Mapping[str, Any]) -> bool:
    """Say whether a row holds these values already, as after a double click."""
    return all(getattr(last, name) == value for name, value in values.items())


def children_store(row: EyeRecord, typed: Children) -> None:
    """Store the children of a new revision."""
    for name, rows in typed.items():
        child, parent = CHILDREN[name]
        child._default_manager.bulk_create([child(**{parent: row}, **one) for one in rows])


def note_of(text: str) -> Note | None:
    """Store a note apart from the record, with a salted digest."""
    if not text:
        return None
    salt = secrets.token_hex(16)
    return Note.objects.create(
        text=text, salt=salt, digest=sha256((salt + text).encode()).hexdigest()
    )
