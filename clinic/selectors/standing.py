"""Standing verdicts (late, away, no plan, undecided ...): computed when read, never stored.

The same functions of ``trends`` that judge a tidy file judge one row an eye, made from ``EyeNow``.
"""

import datetime as dt
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from clinic.clinic_days import exceptions, last_ended_day, next_clinic_day
from clinic.models import EyeNow, Site
from clinic.selectors.adopted import adopted_for, of_cause
from trends import words
from trends.limits import LimitSet
from trends.review import review
from trends.rules import registry
from trends.verdict import RAISED, RANK_WORDS
from trends.visits import COLUMNS, MISSING, Visits, day_number, sorted_visits
from trends.wording import rule_rows

RULES = tuple(module.INFO.id for module in registry.STANDING_RULES)


def _cells(now: EyeNow, site: Site, said: Any, ahead: dict[dt.date, int]) -> dict[str, int]:
    """Return one eye as one row: its last attended visit, and the plan after it."""
    last = now.last_visit_day
    if last is None:
        return {
            "kind": words.KINDS.index("contact"),
            "due_day": _day(now.due_day),
            "unanswered_day": _day(now.unanswered_since),
        }
    if last not in ahead:
        found = next_clinic_day(site, last, said)
        ahead[last] = day_number(found) if found else MISSING
    return {
        "kind": words.KINDS.index("planned"),
        "due_day": _day(now.due_day),
        "booked_day": _day(now.booked_day),
        "next_clinic_day": ahead[last],
        "status": words.STATUSES.index(now.status) if now.status else words.NOT_RECORDED,
        "cause": words.CAUSES.index(now.cause) if now.cause else words.NOT_RECORDED,
        # The projection keeps whether the last visit awaits a decision; any measured value says so.
        "iop_tenths": 0 if now.undecided_since == last else MISSING,
        "decided": int(now.undecided_since != last),
        # 0: the whole log was read and holds none.
        "steroid_day": day_number(now.steroid_day) if now.steroid_day else 0,
        "lasting_steroid": int(now.lasting_steroid),
        "iop_day": _day(now.last_iop_day),
        "unanswered_day": _day(now.unanswered_since),
    }


def _day(day: dt.date | None) -> int:
    return day_number(day) if day is not None else MISSING


def eyes_as_visits(
    rows: Sequence[EyeNow], site: Site, today: dt.date, said: Mapping[dt.date, str]
) -> Visits:
    """Return one row an eye; the eye's key stands for the person so that order is kept."""
    ahead: dict[dt.date, int] = {}
    cells = [_cells(now, site, said, ahead) for now in rows]
    columns = {
        name: np.array([one.get(name, absent) for one in cells], dtype=np.int32)
        for name, absent in COLUMNS.items()
    }
    return sorted_visits(
        [f"{now.eye_id:012d}" for now in rows],
        np.array([words.SIDES.index(now.eye.side) for now in rows], dtype=np.int64),
        np.array([day_number(now.last_visit_day or today) for now in rows], dtype=np.int64),
        columns,
        {"agents": ("none",), "scanner": (), "regimen": words.REGIMENS},
    )


def standing_items(
    rows: Iterable[EyeNow], site: Site, today: dt.date
) -> dict[int, list[dict[str, Any]]]:
    """Return what standing rules raise as of the last ended day, by eye: rule, rank, sentence."""
    said = exceptions(site)
    as_of = last_ended_day(today, said)
    adopted = adopted_for(site)
    groups: dict[str, tuple[LimitSet | None, list[EyeNow]]] = {}
    for now in rows:
        found = of_cause(adopted, now.cause)
        limits = found.limits if found else None
        groups.setdefault(limits.digest if limits else "", (limits, []))[1].append(now)
    out: dict[int, list[dict[str, Any]]] = defaultdict(list)
    for limits, members in groups.values():
        if limits is not None:
            visits = eyes_as_visits(members, site, as_of, said)
            _judge(visits, as_of, limits, out)
    return out


def _judge(
    visits: Visits, today: dt.date, limits: LimitSet, out: dict[int, list[dict[str, Any]]]
) -> None:
    reviewed = review(visits, limits, today, only=RULES)
    for rule in RULES:
        if rule not in reviewed.judged:
            continue
        judged = reviewed.judged[rule]
        raised = np.flatnonzero(judged.outcome == RAISED)
        for eye, one in zip(raised.tolist(), rule_rows(reviewed, rule, raised), strict=True):
            out[int(visits.persons[eye])].append(
                {
                    "rule": rule,
                    "rank": RANK_WORDS[int(judged.rank[eye])],
                    "sentence": one.sentence,
                    "working": one.working,
                }
            )
