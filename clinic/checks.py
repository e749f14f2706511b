"""System checks: what must hold before Ebbline serves anybody."""

from collections.abc import Sequence
from typing import Any

from django.core import checks
from django.db import DatabaseError, connections

from clinic import triggers


def triggers_present(
    app_configs: Any, databases: Sequence[str] | None = None, **_: Any
) -> list[checks.CheckMessage]:
    """Fail when an append-only trigger is missing (run by ``check --database``)."""
    found: list[checks.CheckMessage] = []
    for alias in databases or []:
        try:
            gone = triggers.missing(connections[alias])
        except DatabaseError:
            continue
        if gone:
            found.append(
                checks.Error(
                    f"{len(gone)} append-only trigger(s) are missing: {', '.join(gone[:5])}.",
                    hint="Run python manage.py migrate: it makes them again.",
                    id="clinic.E001",
                )
            )
    return found


def register_all() -> None:
    """Register the checks once."""
    checks.register(triggers_present, checks.Tags.database)
