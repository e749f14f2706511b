"""The sources of a verdict: those of its rule, and of the numbers that had a part in it."""

from collections.abc import Iterable
from typing import Any

from trends import words
from trends.citations import citation
from trends.limits import Table
from trends.visits import Visits

CLASSES = (*words.OCT_CLASSES, "assumed")
"""What an entry that is for one kind of scan has in its name."""


def class_of(v: Visits, row: int) -> str:
    """Return the kind of scan that entries are looked up by at a row; nothing where none is."""
    code = int(v.oct_class[row])
    return words.OCT_CLASSES[code] if code >= 0 else CLASSES[-1] * int(v.scanner_assumed[row] > 0)


def sources(keys: Iterable[str], table: Table | None, klass: str = "") -> list[dict[str, Any]]:
    """Return the sources of a rule, with whether a number of it is from memory.

    At a scan of class ``klass`` numbers for other classes, and sources of nothing else, are left
    out: they had no part in the verdict.
    """
    held = table.entries if table is not None else {}
    others = set(CLASSES) - {klass} if klass else set()
    entries = [entry for name, entry in held.items() if not others & set(name.split("_"))]
    from_memory = {entry.cite for entry in entries if entry.memory}
    unused = {entry.cite for entry in held.values()} - {entry.cite for entry in entries}
    used = dict.fromkeys(key for key in (*keys, *(e.cite for e in entries)) if key not in unused)
    return [
        {
            "key": key,
            "text": citation(key).text,
            "population": citation(key).population,
            "strength": citation(key).strength,
            "memory": key in from_memory,
        }
        for key in used
    ]
