"""The canonical text of a limit set, and short texts that build on a shipped one.

A shipped set may hold only what it changes: ``builds_on = "general"`` takes every rule of that set,
and of its regimens those the text names, entry by entry. What is stored and adopted is always the
whole text, so a later change of the shipped base moves no adopted number.
"""

import json
import tomllib
from collections.abc import Mapping
from typing import Any

HEAD = ("name", "version", "title", "causes")
BASE = "builds_on"


def base_of(text: str) -> str | None:
    """Return the name of the set a text builds on, or None for a whole text."""
    found = tomllib.loads(text).get(BASE)
    return str(found) if found is not None else None


def whole(text: str, base: str) -> str:
    """Return the whole text of a set that builds on another; ``base`` is the other's whole text."""
    own, under = tomllib.loads(text), tomllib.loads(base)
    return render(
        {
            **{name: own.get(name, under.get(name)) for name in HEAD},
            "rules": _joined(under.get("rules", {}), own.get("rules", {})),
            "regimens": {
                name: {**under.get("regimens", {}).get(name, {}), **changed}
                for name, changed in own.get("regimens", {}).items()
            },
        }
    )


def _joined(under: Mapping[str, Any], own: Mapping[str, Any]) -> dict[str, Any]:
    names = dict.fromkeys((*under, *own))
    return {name: {**under.get(name, {}), **own.get(name, {})} for name in names}


def render(data: Mapping[str, Any]) -> str:
    """Return a set's data as TOML text: head, rules, regimens; one line an entry."""
    lines = [f"{name} = {_value(data[name])}" for name in HEAD]
    for group in ("rules", "regimens"):
        for table, entries in data.get(group, {}).items():
            lines += ["", f"[{group}.{table}]"]
            lines += [f"{name} = {_entry(entry)}" for name, entry in entries.items()]
    return "\n".join(lines) + "\n"


def _entry(entry: Mapping[str, Any]) -> str:
    return "{ " + ", ".join(f"{name} = {_value(value)}" for name, value in entry.items()) + " }"


def _value(value: Any) -> str:
    """Return a word, number, truth or list; JSON writes them as TOML reads them."""
    return json.dumps(value, ensure_ascii=False)
