"""Everything a number rests on: each rule, regimen, formula and range with source and example.

Driven by the registries, the shipped sets and the parameter files, so that whatever is added there
stands here too. Read by the command, by the app's page and by the tests.
"""

import inspect
import tomllib
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from importlib import resources
from types import ModuleType
from typing import Any

from trends import limits, worked
from trends.citations import Citation, citation
from trends.formulas import formulas
from trends.parts import FROM_MEMORY
from trends.regimens import registry as regimens
from trends.rules import registry
from trends.worked import Story

GROUPS = (
    "Rules at a visit",
    "Rules of the day asked",
    "Regimens",
    "Shared by the rules",
    "Formulas",
    "Ranges of entry",
)


@dataclass(frozen=True)
class Limit:
    """One number of a limit set, with its source."""

    limit_set: str
    name: str
    value: Any
    unit: str
    citation: Citation
    place: str = ""
    memory: bool = False
    note: str = ""


@dataclass(frozen=True)
class Sourced:
    """One rule, regimen, formula or range; ``group`` is one of ``GROUPS``.

    ``limits`` are those of the general set; ``elsewhere`` those that another shipped set holds
    otherwise. ``arithmetic`` is a formula's example; a rule's stand in ``stories``.
    """

    group: str
    name: str
    title: str
    words: str
    cites: tuple[Citation, ...]
    leans: str = ""
    needs: tuple[str, ...] = ()
    limits: tuple[Limit, ...] = ()
    elsewhere: tuple[Limit, ...] = ()
    stories: tuple[Story, ...] = ()
    arithmetic: tuple[str, ...] = ()
    always_on: bool = False

    @property
    def paragraphs(self) -> tuple[str, ...]:
        """The words in paragraphs."""
        return tuple(" ".join(one.split()) for one in self.words.split("\n\n"))

    @property
    def memory(self) -> bool:
        """Say whether a number of it is from memory."""
        return any(one.memory for one in (*self.limits, *self.elsewhere))


def shown_value(one: Limit) -> str:
    """Return a number with its unit, in words."""
    if isinstance(one.value, bool):
        return "yes" if one.value else "no"
    value = str(one.value)
    return value.replace("_", " ") if one.unit == "rank" else f"{value} {one.unit}".strip()


def limit_words(one: Limit, cites: Sequence[Citation]) -> str:
    """Return a number with the number of its source, place, memory mark and note."""
    shown = f"{one.name} = {shown_value(one)}; " if shown_value(one) else ""
    place = f", {one.place}" if one.place else ""
    mark = f" [{FROM_MEMORY}]" if one.memory else ""
    note = f". {one.note}" if one.note else ""
    return f"{shown}source {cites.index(one.citation) + 1}{place}{mark}{note}"


def _limits(table: limits.Table | None, limit_set: str) -> tuple[Limit, ...]:
    entries = table.entries.items() if table is not None else ()
    return tuple(
        Limit(
            limit_set,
            name,
            entry.value,
            entry.unit,
            citation(entry.cite),
            entry.place,
            entry.memory,
            entry.note,
        )
        for name, entry in entries
    )


def _table(chosen: limits.LimitSet, name: str, *, is_rule: bool) -> limits.Table | None:
    return chosen.rule(name) if is_rule else chosen.regimen(name)


def _elsewhere(name: str, own: Iterable[Limit], *, is_rule: bool) -> Iterator[Limit]:
    """Yield what other shipped sets hold otherwise, and what runs before any set is adopted."""
    usual = {one.name: one.value for one in own}
    others = [limits.shipped(one) for one in limits.shipped_names()[1:]]
    for chosen in (*others, limits.floor()):
        for one in _limits(_table(chosen, name, is_rule=is_rule), chosen.name):
            if usual.get(one.name, None) != one.value:
                yield one


def clinical_words(module: ModuleType) -> str:
    """Return a module's opening words: the rule as a clinician would say it."""
    return (inspect.getdoc(module) or "").replace("``", "")


def _of_module(group: str, module: ModuleType, *, is_rule: bool) -> Sourced:
    info = module.INFO
    general = limits.shipped(worked.SHIPPED_SET)
    own = _limits(_table(general, info.id, is_rule=is_rule), general.name)
    elsewhere = tuple(_elsewhere(info.id, own, is_rule=is_rule))
    keys = dict.fromkeys((*info.cites, *(one.citation.key for one in (*own, *elsewhere))))
    return Sourced(
        group=group,
        name=info.id,
        title=info.title,
        words=clinical_words(module),
        cites=tuple(citation(key) for key in keys),
        leans=info.leans,
        needs=tuple(info.needs),
        limits=own,
        elsewhere=elsewhere,
        stories=worked.stories(info.id),
        always_on=bool(getattr(info, "floor", False)),
    )


def _shared() -> Iterator[Sourced]:
    """Yield tables of the general set that belong to no single rule."""
    general = limits.shipped(worked.SHIPPED_SET)
    for name in general.rules:
        if name not in registry.by_id():
            own = _limits(general.rule(name), general.name)
            cites = dict.fromkeys(one.citation for one in own)
            words = "; ".join(one.note for one in own if one.note)
            title = name.replace("_", " ").capitalize()
            yield Sourced(GROUPS[3], name, title, words, tuple(cites), limits=own)


def _formulas() -> Iterator[Sourced]:
    for one in formulas().values():
        shown = (Limit("formula", one.name, "", "", one.citation, one.place, one.memory, one.note),)
        yield Sourced(
            GROUPS[4],
            one.name,
            one.title,
            one.words,
            (one.citation,),
            limits=shown,
            arithmetic=tuple(one.arithmetic()),
        )


PARAMETERS = {
    "ranges": "Ranges of entry",
    "repeatability": "Repeatability for the chart's bars",
    "osmosis": "Coefficients of the colloid osmotic pressure",
}
"""Parameter files of ``measures`` and what they hold."""
SAID = ("cite", "memory", "place", "why", "allowed", "unlikely_why", "looks_like_g_l_why", "unit")
"""Entries of a parameter table that aren't values themselves."""


def _parameters(file: str) -> dict[str, Any]:
    text = resources.files("trends.measures") / f"{file}.toml"
    return tomllib.loads(text.read_text(encoding="utf-8"))


def _flat(data: dict[str, Any], before: str = "") -> Iterator[tuple[str, dict[str, Any]]]:
    """Yield (name, table) of every table that cites a source."""
    for name, table in data.items():
        if "cite" in table:
            yield f"{before}{name}", table
        else:
            yield from _flat(table, f"{name}, ")


def _ranges() -> Iterator[Sourced]:
    for file, title in PARAMETERS.items():
        for name, table in _flat(_parameters(file)):
            source = citation(table["cite"])
            note = "; ".join(str(table[one]) for one in ("why", "unlikely_why") if one in table)
            shown = tuple(
                Limit(
                    title,
                    entry,
                    _plain(value),
                    str(table.get("unit", "")),
                    source,
                    str(table.get("place", "")),
                    bool(table.get("memory", False)),
                )
                for entry, value in table.items()
                if entry not in SAID
            )
            words = str(table.get("allowed", title))
            yield Sourced(
                GROUPS[5],
                f"{file}.{name}".replace(", ", "."),
                f"{name.replace('_', ' ')}",
                f"{words}. {note}".strip(),
                (source,),
                limits=shown,
            )


def _plain(value: Any) -> Any:
    return ", ".join(str(one) for one in value) if isinstance(value, list) else value


def everything() -> Iterator[Sourced]:
    """Yield every rule, regimen, formula and range, in the order of ``GROUPS``."""
    for module in registry.VISIT_RULES:
        yield _of_module(GROUPS[0], module, is_rule=True)
    for module in registry.STANDING_RULES:
        yield _of_module(GROUPS[1], module, is_rule=True)
    for module in regimens.REGIMENS:
        yield _of_module(GROUPS[2], module, is_rule=False)
    yield from _shared()
    yield from _formulas()
    yield from _ranges()


def by_name() -> dict[str, Sourced]:
    """Return every entry by its name, in order."""
    return {one.name: one for one in everything()}
