"""Digests of what the rules were told, so that a review is written only where it would differ."""

import hashlib
from collections.abc import Mapping
from typing import Any

import numpy as np

from clinic.canonical import canonical_text
from trends.visits import Visits

OPEN = ("agents", "scanner", "grader", "lots")
"""Columns whose codes stand for texts."""


def _text(values: Mapping[str, Any]) -> str:
    """Return values as one text, the same for the same content."""
    return canonical_text(dict(values))


def digests(visits: Visits) -> list[str]:
    """Return for each row a digest of all this person's inputs up to that day."""
    names = sorted(visits.columns)
    table = np.stack(
        [visits.columns[name] for name in names] or [np.zeros(0, dtype=np.int32)], axis=1
    )
    histories = [_text(visits.histories.get(eye, {})) for eye in range(visits.offsets.size - 1)]
    course_texts = {key: _text(says) for key, says in visits.courses.items()}
    out = [""] * len(visits)
    order = np.lexsort((visits.side, visits.day, visits.person))
    running: Any = None
    last_person, last_day = -1, None
    pending: list[int] = []
    for row in order.tolist():
        person, day = int(visits.person[row]), int(visits.day[row])
        if person != last_person or day != last_day:
            for one in pending:
                out[one] = running.hexdigest()
            pending = []
        if person != last_person:
            running = hashlib.sha256()
        texts = [visits.text(name, row) for name in OPEN]
        texts.append(course_texts.get(int(visits.course[row]), ""))
        texts.append(histories[int(visits.eye[row])])
        line = [int(visits.side[row]), day, table[row].tolist(), texts]
        # Codes of open lists depend on who else was loaded, those of courses on the order in which
        # they were stored; their texts stand for them.
        for name in (*OPEN, "course"):
            line[2][names.index(name)] = 0
        running.update(repr(line).encode())
        pending.append(row)
        last_person, last_day = person, day
    for one in pending:
        out[one] = running.hexdigest()
    return out
