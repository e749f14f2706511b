"""The sources pages: what each rule, regimen, formula and range rests on, with a worked example.

The same content as ``python -m trends sources``; it belongs to no site and is made once a process.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache

from trends.parts import FROM_MEMORY, QUIET_WORDS, Part, nine_parts, quiet_parts, said
from trends.saying import column
from trends.sources import Limit, Sourced, by_name, shown_value
from trends.wording import VerdictRow
from trends.worked import QUIET, Story, shown_whole, stories

GROUP_WORDS = {
    "Rules at a visit": "They judge one visit of one eye.",
    "Rules of the day asked": "They depend on the day: who is due, late, away or undecided.",
    "Regimens": "What a published regimen says at a visit of an eye that follows it.",
    "Shared by the rules": "Numbers that several rules read.",
    "Formulas": "Arithmetic behind values and notations.",
    "Ranges of entry": "What is refused or asked about when a value is typed, and chart bars.",
}


@dataclass(frozen=True)
class Entry:
    """One line of the contents."""

    name: str
    title: str
    gist: str
    memory: bool


@dataclass(frozen=True)
class Group:
    """One group of the contents; ``anchor`` is its place on the page."""

    title: str
    anchor: str
    words: str
    entries: tuple[Entry, ...]


@dataclass(frozen=True)
class Number:
    """One number with the place of its source in the page's list."""

    name: str
    value: str
    source: int
    place: str
    memory: bool
    note: str
    limit_set: str = ""


@dataclass(frozen=True)
class Shown:
    """One visit of an example: its nine parts where it is shown whole, else a sentence."""

    day: str
    said: str
    rank: str
    sentence: str
    parts: tuple[Part, ...] = ()


@dataclass(frozen=True)
class Example:
    """One worked example."""

    title: str
    visits: tuple[Shown, ...] = ()
    quiet: tuple[Part, ...] = ()


@dataclass(frozen=True)
class SourcePage:
    """The page of one entry."""

    one: Sourced
    gist: str
    more: tuple[str, ...]
    needs: tuple[str, ...]
    numbers: tuple[Number, ...]
    elsewhere: tuple[Number, ...]
    examples: tuple[Example, ...]
    from_memory: str = FROM_MEMORY


@cache
def contents() -> tuple[Group, ...]:
    """Return every entry, by group, in the order of the engine."""
    groups: dict[str, list[Entry]] = {title: [] for title in GROUP_WORDS}
    for one in by_name().values():
        entry = Entry(one.name, one.title, one.paragraphs[0], one.memory)
        groups[one.group].append(entry)
    return tuple(
        Group(title, title.lower().replace(" ", "-"), GROUP_WORDS[title], tuple(entries))
        for title, entries in groups.items()
    )


@cache
def source_page(name: str) -> SourcePage | None:
    """Return the page of one entry; None where there is no such entry."""
    one = by_name().get(name)
    if one is None:
        return None
    gist, *more = one.paragraphs
    return SourcePage(
        one,
        gist,
        tuple(more),
        tuple(map(column, one.needs)),
        _numbers(one, one.limits),
        _numbers(one, one.elsewhere),
        tuple(_example(story) for story in one.stories),
    )


@cache
def quiet_examples() -> tuple[Example, ...]:
    """Return visits at which nothing was raised."""
    return tuple(Example(s.title, quiet=quiet_parts(s.verdicts())) for s in stories(QUIET))


def quiet_words() -> str:
    """Return what "nothing raised" means."""
    return QUIET_WORDS


def _numbers(one: Sourced, held: Sequence[Limit]) -> tuple[Number, ...]:
    return tuple(
        Number(
            limit.name.replace("_", " "),
            shown_value(limit),
            one.cites.index(limit.citation) + 1,
            limit.place,
            limit.memory,
            limit.note,
            limit.limit_set.replace("_", " "),
        )
        for limit in held
    )


def _example(story: Story) -> Example:
    found = story.verdicts()
    whole = shown_whole(found)
    return Example(story.title, tuple(map(_shown, found, whole)))


def _shown(one: VerdictRow, whole: bool) -> Shown:
    return Shown(
        one.date,
        said(one),
        one.rank.replace("_", " "),
        one.sentence,
        nine_parts(one.working) if whole and one.working is not None else (),
    )
