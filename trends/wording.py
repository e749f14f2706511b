"""Chosen rows into verdicts with their sentence and full working.

Nothing here decides: it words what ``review`` found. Sentences state facts, never orders.
"""

from collections.abc import Collection, Iterable, Iterator
from dataclasses import dataclass, replace
from typing import Any, NamedTuple

import numpy as np

from trends import ENGINE_VERSION, saying, words
from trends.cited import class_of, sources
from trends.limits import LimitSet, Table, table_for
from trends.regimens import registry as regimens
from trends.review import Reviewed
from trends.rules import registry
from trends.ruling import Description, Judged, columns_of
from trends.verdict import COULD_NOT_TELL, OUTCOME_WORDS, RAISED, RANK_WORDS, STILL
from trends.visits import Visits, day_date

WORKED = (RAISED, STILL, COULD_NOT_TELL)
FLOOR_NAME = "floor rules only"


@dataclass(frozen=True)
class VerdictRow:
    """One rule at one eye-visit; ``row`` of ``Visits`` is -1 on standing and fellow rows."""

    row: int
    person: str
    eye: str
    date: str
    rule: str
    rule_version: int
    outcome: str
    rank: str
    sentence: str
    missing: tuple[str, ...]
    reading: str
    limit_set: str
    limit_set_version: str
    working: dict[str, Any] | None


def set_names(limits: LimitSet | None) -> tuple[str, str]:
    """Return name and version of the set in force."""
    return (limits.name, limits.version) if limits is not None else (FLOOR_NAME, ENGINE_VERSION)


def assumptions(reviewed: Reviewed, row: int) -> list[str]:
    """Return what was assumed of a row, said in each working."""
    v = reviewed.visits
    out = []
    if row >= 0 and int(v.scanner_assumed[row]):
        out.append("one scanner per eye, assumed at intake")
    if row >= 0 and int(v.status[row]) < 0:
        out.append("status not recorded: assumed in treatment")
    if row >= 0 and "grader" not in v.lists:
        out.append("no eye event is known; all grades counted as one kind of grader")
    return out


def working(
    info: Any,
    said: Description,
    cited: list[dict[str, Any]],
    reviewed: Reviewed,
    facts: dict[str, Any],
) -> dict[str, Any]:
    """Return the nine parts of a shown verdict, JSON-able; ``cited`` as ``sources`` gives it."""
    name, version = set_names(reviewed.limits)
    unknowns = list(said.unknowns)
    unknowns += [f"not recorded or not comparable: {saying.column(c)}" for c in facts["missing"]]
    return {
        "fact": said.sentence,
        "values": said.values,
        "arithmetic": said.arithmetic,
        "rule": {
            "id": info.id,
            "version": info.version,
            "limit": said.limit,
            "limit_set": name,
            "limit_set_version": version,
        },
        "source": cited,
        "noise": said.noise,
        "unknowns": unknowns,
        "options": said.options,
        "emergency": said.emergency,
        "not_for": said.not_for,
        "leans": info.leans,
        "reference_date": facts["reference_date"],
        "reference_value": said.reference_value,
        "part": facts["part"],
        "assumed": assumptions(reviewed, facts["row"]),
        "since": facts["since"],
    }


def _iso(reviewed: Reviewed, row: int) -> str | None:
    return day_date(int(reviewed.visits.day[row])).isoformat() if row >= 0 else None


def rule_rows(
    reviewed: Reviewed, rule: str, chosen: Iterable[int], all_working: bool = False
) -> Iterator[VerdictRow]:
    """Yield the verdicts of one rule at chosen rows (eyes, for a standing rule)."""
    module = registry.by_id()[rule]
    table = table_for(reviewed.limits, rule, is_floor=module.INFO.floor)
    ruled = Ruled(module, table, reviewed.judged[rule], {})
    for row in chosen:
        yield _rule_row(reviewed, ruled, int(row), all_working)


class Ruled(NamedTuple):
    """One rule ready to be worded: its module, its entries, its outcomes, sources by class."""

    module: Any
    table: Table | None
    judged: Judged
    cited: dict[str, list[dict[str, Any]]]

    def sources_at(self, v: Visits, row: int) -> list[dict[str, Any]]:
        """Return the sources of a verdict at a row, worked out once a class of scan."""
        klass = "" if self.module.INFO.shape == "standing" else class_of(v, row)
        if klass not in self.cited:
            self.cited[klass] = sources(self.module.INFO.cites, self.table, klass)
        return self.cited[klass]


def _rule_row(reviewed: Reviewed, ruled: Ruled, row: int, all_working: bool) -> VerdictRow:
    module, table, judged, _cited = ruled
    v, info = reviewed.visits, module.INFO
    standing = info.shape == "standing"
    first = int(v.offsets[row]) if standing else row
    outcome = int(judged.outcome[row])
    missing = columns_of(int(judged.missing[row]))
    worked = outcome in WORKED or all_working
    said = module.describe(v, judged, row, table) if worked else Description("")
    part = int(judged.part[row])
    since = int(judged.since[row]) if judged.since is not None else -1
    facts: dict[str, Any] = {
        "row": -1 if standing else row,
        "missing": missing,
        "part": info.parts[part] if 0 <= part < len(info.parts) else "",
        "reference_date": _iso(reviewed, int(judged.ref[row])),
        "since": _iso(reviewed, since),
    }
    name, version = set_names(reviewed.limits)
    return VerdictRow(
        row=facts["row"],
        person=v.persons[int(v.person[first])],
        eye=words.SIDES[int(v.side[first])],
        date=reviewed.today.isoformat() if standing else day_date(int(v.day[row])).isoformat(),
        rule=info.id,
        rule_version=info.version,
        outcome=OUTCOME_WORDS[outcome],
        rank=RANK_WORDS[int(judged.rank[row])] if outcome == RAISED else "",
        sentence=sentence_of(said, outcome, missing),
        missing=missing,
        reading="",
        limit_set=name,
        limit_set_version=version,
        working=working(info, said, ruled.sources_at(v, first), reviewed, facts)
        if worked
        else None,
    )


def sentence_of(said: Description, outcome: int, missing: tuple[str, ...]) -> str:
    """Return the sentence; one that couldn't be told says what was missing."""
    if outcome != COULD_NOT_TELL or not said.sentence:
        return said.sentence
    return f"{said.sentence}. Couldn't tell: {missing_words(missing)}"


def missing_words(missing: Iterable[str]) -> str:
    """Return why a rule couldn't tell: what is missing or not comparable, or no earlier value."""
    named = ", ".join(map(saying.column, missing))
    return f"missing or not comparable: {named}" if named else "no earlier value"


def regimen_rows(
    reviewed: Reviewed, regimen: str, chosen: Collection[int] | None = None
) -> Iterator[VerdictRow]:
    """Yield the readings of one regimen at its own rows (all, or those chosen)."""
    spoken = reviewed.regimens[regimen]
    wanted = None if chosen is None else set(chosen)
    readings = spoken.readings()
    table = reviewed.limits.regimen(regimen) if reviewed.limits is not None else None
    cites = regimens.by_id()[regimen].INFO.cites
    cited = {
        klass: sources(cites, table, klass)
        for klass in {class_of(reviewed.visits, row) for row in spoken.rows.tolist()}
    }
    for place, row in enumerate(spoken.rows.tolist()):
        if wanted is None or row in wanted:
            at = class_of(reviewed.visits, row)
            yield _regimen_row(reviewed, regimen, place, readings[place], cited[at])


def _regimen_row(
    reviewed: Reviewed, regimen: str, place: int, reading: str, cited: list[dict[str, Any]]
) -> VerdictRow:
    v, spoken = reviewed.visits, reviewed.regimens[regimen]
    info, row = regimens.by_id()[regimen].INFO, int(spoken.rows[place])
    outcome = int(spoken.outcome[place])
    missing = columns_of(int(spoken.missing[place]))
    said = spoken.describe(row) if reading else Description("")
    facts: dict[str, Any] = {
        "row": row,
        "missing": missing,
        "part": "",
        "reference_date": _iso(reviewed, int(spoken.ref[place])),
        "since": None,
    }
    name, version = set_names(reviewed.limits)
    return VerdictRow(
        row=row,
        person=v.persons[int(v.person[row])],
        eye=words.SIDES[int(v.side[row])],
        date=day_date(int(v.day[row])).isoformat(),
        rule=regimen,
        rule_version=info.version,
        outcome=OUTCOME_WORDS.get(outcome, ""),
        rank="",
        sentence=said.sentence,
        missing=missing,
        reading=reading,
        limit_set=name,
        limit_set_version=version,
        working=working(info, said, cited, reviewed, facts) if reading else None,
    )


def fellow_rows(reviewed: Reviewed) -> list[VerdictRow]:
    """Return alarm rows of fellow eyes that have no row of their own on the day of the alarm."""
    judged = reviewed.judged.get("alarm_symptoms")
    if judged is None:
        return []
    return [_fellow_row(reviewed, alarm, eye) for alarm, eye in judged.extra.get("fellow_of", [])]


def _fellow_row(reviewed: Reviewed, alarm: int, eye: int) -> VerdictRow:
    one = next(rule_rows(reviewed, "alarm_symptoms", [alarm]))
    side = words.SIDES[int(reviewed.visits.side[reviewed.visits.offsets[eye]])]
    name = "Right eye" if side == "R" else "Left eye"
    sentence = f"{name}: treated on the same day as the fellow eye, which has symptoms now"
    facts = {**(one.working or {}), "fact": sentence, "part": "fellow eye"}
    return replace(one, row=-1, eye=side, sentence=sentence, working=facts)


def verdict_rows(
    reviewed: Reviewed,
    rows: Collection[int] | None = None,
    *,
    all_working: bool = False,
    standing: bool = True,
) -> list[VerdictRow]:
    """Return every rule at every row (or the chosen rows), in output order.

    Order: person, right eye first, day, rule order, regimen; standing rows last of each eye.
    """
    v = reviewed.visits
    chosen = np.arange(len(v)) if rows is None else np.asarray(sorted(rows), dtype=np.int64)
    order = {name: place for place, name in enumerate((*registry.by_id(), *regimens.by_id()))}
    placed: list[tuple[tuple[int, int, int, int, int], VerdictRow]] = []
    for rule, module in registry.by_id().items():
        if rule not in reviewed.judged:
            continue
        if module.INFO.shape == "standing":
            eyes = np.unique(v.eye[chosen]) if standing else np.zeros(0, dtype=int)
            for eye, one in zip(
                eyes.tolist(), rule_rows(reviewed, rule, eyes, all_working), strict=True
            ):
                placed.append(((eye, 1, 0, 0, order[rule]), one))
            continue
        found = rule_rows(reviewed, rule, chosen, all_working)
        for row, one in zip(chosen.tolist(), found, strict=True):
            placed.append(((int(v.eye[row]), 0, int(v.day[row]), row, order[rule]), one))
    for regimen in reviewed.regimens:
        for one in regimen_rows(reviewed, regimen, None if rows is None else chosen.tolist()):
            key = (int(v.eye[one.row]), 0, int(v.day[one.row]), one.row, order[regimen])
            placed.append((key, one))
    if rows is None:
        placed += _placed_fellows(reviewed, order["alarm_symptoms"])
    return [one for _key, one in sorted(placed, key=lambda pair: pair[0])]


def _placed_fellows(
    reviewed: Reviewed, place: int
) -> list[tuple[tuple[int, int, int, int, int], VerdictRow]]:
    v, judged = reviewed.visits, reviewed.judged.get("alarm_symptoms")
    lone = judged.extra.get("fellow_of", []) if judged is not None else []
    return [
        ((eye, 0, int(v.day[alarm]), -1, place), one)
        for (alarm, eye), one in zip(lone, fellow_rows(reviewed), strict=True)
    ]
