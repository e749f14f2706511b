"""Limit sets: named, versioned thresholds, each with unit, source and place in the source."""

import hashlib
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from functools import cache
from importlib import resources
from typing import Any

from trends import limit_texts, words
from trends.citations import citation
from trends.errors import LimitSetRefused

Value = int | str | bool


@dataclass(frozen=True)
class Entry:
    """One threshold: its value, unit, citation key and place; ``memory`` = not yet checked."""

    value: Value
    unit: str
    cite: str
    place: str = ""
    from_day: str = ""
    memory: bool = False
    note: str = ""


@dataclass(frozen=True)
class Table:
    """The entries of one rule or regimen; ``floor_only``: nothing adopted, only the floor runs."""

    name: str
    entries: Mapping[str, Entry]
    floor_only: bool = False
    others: "Mapping[str, Table]" = field(default_factory=dict, compare=False, repr=False)

    def __getitem__(self, name: str) -> Value:
        return self.entries[name].value

    def __contains__(self, name: object) -> bool:
        return name in self.entries

    def number(self, name: str) -> int:
        """Return a whole number; raises ``LimitSetRefused`` for anything else."""
        value = self.entries[name].value if name in self.entries else None
        if isinstance(value, bool) or not isinstance(value, int):
            raise _refused(f"{self.name}.{name}", value, "a whole number")
        return value

    def get(self, name: str) -> int | None:
        """Return a whole number, or None where the set leaves it open (a site choice)."""
        return self.number(name) if name in self.entries else None


@dataclass(frozen=True)
class LimitSet:
    """A whole set. A rule that isn't in it is off and says so (floor rules excepted)."""

    name: str
    version: str
    title: str
    causes: tuple[str, ...]
    rules: Mapping[str, Table]
    regimens: Mapping[str, Table]
    text: str

    @property
    def digest(self) -> str:
        """SHA-256 of the canonical text."""
        return hashlib.sha256(self.text.encode()).hexdigest()

    def rule(self, name: str) -> Table | None:
        """Return a rule's entries, or None when the rule is off."""
        return self.rules.get(name)

    def regimen(self, name: str) -> Table | None:
        """Return a regimen's defaults, or None."""
        return self.regimens.get(name)

    def entries(self) -> Iterator[tuple[str, str, Entry]]:
        """Yield (table, entry name, entry) of every threshold, in the order of the text."""
        for table in (*self.rules.values(), *self.regimens.values()):
            for name, entry in table.entries.items():
                yield table.name, name, entry

    @classmethod
    def from_toml(cls, text: str) -> "LimitSet":
        """Read and validate a set; raises ``LimitSetRefused`` with what, value, allowed, why.

        Tables and entries are those of the shipped general set; a rule or regimen may be absent
        (it is off then), an entry for one OCT class may be absent or added (a site choice).
        """
        return _checked(cls._read(text))

    @classmethod
    def from_stored(cls, text: str) -> "LimitSet":
        """Read a set that was valid when it was stored, maybe by an earlier version.

        An entry that later versions ask for has the shipped value and says so in its note, so that
        an upgrade doesn't take a clinic's set away; the text and its digest stay as adopted.
        """
        return _checked(_completed(cls._read(text)))

    @classmethod
    def _read(cls, text: str) -> "LimitSet":
        text = text.replace("\r\n", "\n").strip() + "\n"
        try:
            data = tomllib.loads(text)
        except tomllib.TOMLDecodeError as error:
            raise _refused("limit set", str(error), "TOML text") from error
        for needed in ("name", "version", "title", "causes"):
            if needed not in data:
                raise _refused(needed, None, "present")
        return cls(
            name=str(data["name"]),
            version=str(data["version"]),
            title=str(data["title"]),
            causes=tuple(data["causes"]),
            rules=_tables(data.get("rules", {})),
            regimens=_tables(data.get("regimens", {})),
            text=text,
        )


def _refused(what: str, value: Any, allowed: str) -> LimitSetRefused:
    return LimitSetRefused(
        f"limit set, {what}",
        value,
        allowed,
        "A threshold without a clear value and source can't be shown or trusted.",
        "Correct the text; nothing was adopted.",
    )


def _tables(data: Mapping[str, Any]) -> dict[str, Table]:
    return {name: Table(name, dict(_entries(name, body))) for name, body in data.items()}


def _entries(table: str, body: Mapping[str, Any]) -> Iterator[tuple[str, Entry]]:
    for name, raw in body.items():
        if not isinstance(raw, dict) or "value" not in raw or "cite" not in raw:
            raise _refused(f"{table}.{name}", raw, "a table with value, unit and cite")
        if not isinstance(raw["value"], int | str | bool):
            raise _refused(f"{table}.{name}", raw["value"], "a whole number, a word, true or false")
        try:
            citation(raw["cite"])
        except KeyError as error:
            raise _refused(f"{table}.{name}.cite", raw["cite"], "a key of the citations") from error
        yield (
            name,
            Entry(
                value=raw["value"],
                unit=str(raw.get("unit", "")),
                cite=raw["cite"],
                place=str(raw.get("table", "")),
                from_day=str(raw.get("from_day", "")),
                memory=bool(raw.get("memory", False)),
                note=str(raw.get("note", "")),
            ),
        )


RANK_NAMES = ("raise_first", "weigh_today", "keep_in_mind")
"""The words a rank may be; ``verdict`` numbers them."""


@cache
def _shape() -> LimitSet:
    """Return the set whose tables and entries every set is checked against."""
    file = resources.files("trends") / "limit_sets" / "general.toml"
    return LimitSet._read(file.read_text(encoding="utf-8"))


def _checked(found: LimitSet) -> LimitSet:
    """Return a set whose causes, tables and entries the rules can run with."""
    for cause in found.causes:
        if cause not in words.CAUSES:
            raise _refused("causes", cause, ", ".join(words.CAUSES))
    for here, known in ((found.rules, _shape().rules), (found.regimens, _shape().regimens)):
        for name, table in here.items():
            if name not in known:
                raise _refused(name, name, ", ".join(known))
            _check_table(table, known[name])
    return found


ADDED_LATER = "not in the adopted text; the value a later version ships"


def _completed(found: LimitSet) -> LimitSet:
    """Return a set with the entries its tables lack, as shipped; tables it lacks stay off."""
    return replace(
        found,
        rules=_filled(found.rules, _shape().rules),
        regimens=_filled(found.regimens, _shape().regimens),
    )


def _filled(tables: Mapping[str, Table], known: Mapping[str, Table]) -> dict[str, Table]:
    filled = {}
    for name, table in tables.items():
        model = known[name].entries if name in known else {}
        added = {
            entry_name: replace(entry, note=ADDED_LATER)
            for entry_name, entry in model.items()
            if entry_name not in table.entries and "*" not in _by_class(entry_name)
        }
        filled[name] = replace(table, entries={**table.entries, **added})
    return filled


def _by_class(name: str) -> str:
    """Return an entry's name without the OCT class (or "assumed") it is for."""
    parts = name.split("_")
    return "_".join("*" if p in (*words.OCT_CLASSES, "assumed") else p for p in parts)


def _check_table(table: Table, known: Table) -> None:
    like = {_by_class(name): entry for name, entry in known.entries.items()}
    for name, entry in table.entries.items():
        what, model = f"{table.name}.{name}", like.get(_by_class(name))
        if model is None:
            raise _refused(what, name, ", ".join(known.entries))
        if type(entry.value) is not type(model.value):
            raise _refused(what, entry.value, f"a value such as {model.value}")
        if name.startswith("rank") and entry.value not in RANK_NAMES:
            raise _refused(what, entry.value, ", ".join(RANK_NAMES))
        if isinstance(entry.value, int) and entry.value < 0:
            raise _refused(what, entry.value, "0 or more")
    lacking = [n for n in known.entries if n not in table.entries and "*" not in _by_class(n)]
    if lacking:
        raise _refused(f"{table.name}.{lacking[0]}", None, "present")


def shipped_names() -> list[str]:
    """Return the names of the shipped sets, the cautious general one first."""
    folder = resources.files("trends") / "limit_sets"
    names = (f.name.removesuffix(".toml") for f in folder.iterdir() if f.name[-5:] == ".toml")
    return sorted(names, key=lambda name: (name != "general", name))


@cache
def shipped(name: str) -> LimitSet:
    """Return a shipped set by name; raises ``LimitSetRefused`` for an unknown one."""
    if name not in shipped_names():
        raise _refused("name", name, ", ".join(shipped_names()))
    return LimitSet.from_toml(_shipped_text(name))


def _shipped_text(name: str) -> str:
    """Return the whole text of a shipped set, also of one that builds on another."""
    file = resources.files("trends") / "limit_sets" / f"{name}.toml"
    text = file.read_text(encoding="utf-8")
    base = limit_texts.base_of(text)
    return text if base is None else limit_texts.whole(text, _shipped_text(base))


@cache
def floor() -> LimitSet:
    """Return the floor: alarms and levels that run always and can't be switched off."""
    file = resources.files("trends") / "floor.toml"
    return LimitSet._read(file.read_text(encoding="utf-8"))


def table_for(limits: LimitSet | None, rule: str, *, is_floor: bool) -> Table | None:
    """Return the entries a rule runs with, or None when it is off; no set moves the floor's own."""
    table = limits.rule(rule) if limits is not None else None
    always = floor().rules[rule].entries if is_floor else {}
    if table is not None and limits is not None:
        return replace(table, entries={**table.entries, **always}, others=limits.rules)
    return Table(rule, always, floor_only=True) if is_floor else None
