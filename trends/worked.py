"""Worked examples: invented visits of one rule or regimen, and what the engine says of them.

``examples/NAME.toml`` holds the stories of the rule or regimen NAME: visits as cells of the tidy
file, and ``then``, the outcome (or the regimen's reading) expected at each. Sentences and
arithmetic aren't kept there: they are worked out when asked for, so they can't go stale.
"""

import datetime as dt
import re
import tomllib
from collections.abc import Container, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache
from importlib import resources
from typing import Any

import numpy as np

from trends.frames import read_rows
from trends.limits import shipped
from trends.regimens import registry as regimens
from trends.review import Reviewed, review
from trends.rules import registry
from trends.visits import Visits
from trends.wording import VerdictRow, fellow_rows, regimen_rows, rule_rows, verdict_rows

SHIPPED_SET = "general"
QUIET = "nothing_raised"
"""The stories of whole visits at which no rule raised anything."""
USUAL = {"person": "invented", "eye": "R"}
OF_A_STORY = ("then", "columns")
"""Keys of a visit that aren't cells: what is expected, and columns only the app fills."""


@dataclass(frozen=True)
class Story:
    """Invented visits, the day asked, and the outcome or reading expected at each visit.

    ``expected`` holds (eye, date, outcome); a standing rule has one entry, dated the day asked.
    """

    about: str
    title: str
    limit_set: str
    as_of: dt.date
    rows: tuple[Mapping[str, str], ...]
    expected: tuple[tuple[str, str, str], ...]
    columns: tuple[Mapping[str, int], ...]

    def visits(self) -> Visits:
        """Return the visits, columns that only the app fills put in place."""
        v = read_rows(self.rows)
        columns = {name: column.copy() for name, column in v.columns.items()}
        for row, source in enumerate(v.source_row.tolist()):
            for name, value in self.columns[source].items():
                columns[name][row] = value
        return replace(v, columns=columns)

    def reviewed(self) -> Reviewed:
        """Return the engine's review: the rule alone, or every rule at a quiet visit."""
        only = None if self.about == QUIET else [self.about]
        return review(self.visits(), shipped(self.limit_set), self.as_of, only)

    def verdicts(self) -> list[VerdictRow]:
        """Return what the rule or regimen says at each visit, in order."""
        reviewed = self.reviewed()
        if self.about == QUIET:
            return verdict_rows(reviewed, [len(reviewed.visits) - 1], all_working=True)
        if self.about in regimens.by_id():
            return list(regimen_rows(reviewed, self.about))
        info = registry.by_id()[self.about].INFO
        size = reviewed.judged[self.about].outcome.size
        found = list(rule_rows(reviewed, self.about, np.arange(size).tolist(), all_working=True))
        more = fellow_rows(reviewed) if info.id == "alarm_symptoms" else []
        return found + more


def _story(about: str, raw: Mapping[str, Any]) -> Story:
    usual = {**USUAL, **raw.get("usual", {})}
    rows = [{**usual, **visit} for visit in raw["visits"]]
    cells = [{k: str(v) for k, v in row.items() if k not in OF_A_STORY} for row in rows]
    if "then" in raw:
        expected = [(usual["eye"], str(raw["as_of"]), str(raw["then"]))]
    else:
        expected = [(row["eye"], row["date"], row["then"]) for row in rows if "then" in row]
    return Story(
        about=about,
        title=raw["title"],
        limit_set=raw.get("limit_set", SHIPPED_SET),
        as_of=dt.date.fromisoformat(raw["as_of"]),
        rows=tuple(cells),
        expected=tuple(expected),
        columns=tuple(row.get("columns", {}) for row in rows),
    )


@cache
def stories(about: str) -> tuple[Story, ...]:
    """Return the stories of a rule or regimen; none when it has no file."""
    file = resources.files("trends") / "examples" / f"{about}.toml"
    if not file.is_file():
        return ()
    data = tomllib.loads(file.read_text(encoding="utf-8"))
    return tuple(_story(about, raw) for raw in data["story"])


def named() -> list[str]:
    """Return what the files are about, those of no known rule or regimen too."""
    folder = resources.files("trends") / "examples"
    return sorted(
        file.name.removesuffix(".toml") for file in folder.iterdir() if file.name[-5:] == ".toml"
    )


def shown_whole(found: Sequence[VerdictRow], outcomes: Container[str] = ()) -> list[bool]:
    """Say which verdicts of a story are laid out whole: raised ones, and the first of each kind.

    Kinds are readings (one that differs in its numbers only is the same) and ``outcomes`` named.
    """
    seen: set[tuple[str, str]] = set()
    out = []
    for one in found:
        kind = (re.sub("[0-9]+", "", one.reading), one.outcome)
        first = kind not in seen and (bool(one.reading) or one.outcome in outcomes)
        seen.add(kind)
        out.append(bool(one.rank) or first)
    return out
