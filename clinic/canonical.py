"""Canonical text of values, for digests: the same content gives the same bytes, always."""

import datetime as dt
import json
import unicodedata
from typing import Any


def canonical(value: Any) -> Any:
    """Return a value as it is digested: ISO dates, UTC seconds, integers, NFC text."""
    if isinstance(value, dt.datetime):
        return value.astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, str):
        return unicodedata.normalize("NFC", value)
    if isinstance(value, dict):
        return {str(key): canonical(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [canonical(inner) for inner in value]
    if value is None or isinstance(value, bool | int):
        return value
    return str(value)


def canonical_text(value: Any) -> str:
    """Return canonical JSON: sorted keys, no spaces, no ASCII escapes."""
    return json.dumps(canonical(value), sort_keys=True, separators=(",", ":"), ensure_ascii=False)
