"""Verdicts and sources laid out as plain text that a clinician can read through.

Nothing here words a fact: sentences, arithmetic and options come from the engine as they are.
"""

import re
import textwrap
from collections.abc import Container, Iterable, Iterator, Mapping, Sequence
from typing import Any

from trends.citations import Citation
from trends.rules import registry
from trends.sources import FROM_MEMORY, Limit, Sourced
from trends.verdict import LIMIT_NOT_REACHED, OUTCOME_WORDS
from trends.wording import VerdictRow, missing_words
from trends.worked import QUIET, Story

WIDTH = 100
LABEL = 22
PARTS = (
    "1 Fact",
    "2 Values used",
    "3 Arithmetic",
    "4 Rule and limit",
    "5 Source",
    "6 Measurement error",
    "7 Missing or assumed",
    "8 May be weighed",
    "9 Doesn't apply to",
)
EMERGENCY = "8 Emergency"
EMERGENCY_TEXT = (
    "the clinic's own emergency text stands here, in place of options: who answers, who is rung"
)
QUIET_WORDS = (
    "Nothing raised. That isn't a finding that all is well: it says only which limits weren't "
    "reached, and which rules couldn't tell."
)
SHOWN = {
    **{word: word.replace("_", " ") for word in OUTCOME_WORDS.values()},
    "could_not_tell": "couldn't tell",
    "does_not_apply": "doesn't apply",
}


def labelled(label: str, text: str) -> list[str]:
    """Return a text beside its label, wrapped under itself."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=f"  {label}".ljust(LABEL) + " ",
        subsequent_indent=" " * (LABEL + 1),
        break_on_hyphens=False,
    )


def _listed(label: str, texts: Iterable[str], otherwise: str) -> list[str]:
    given = list(texts) or [otherwise]
    first, *more = given
    return labelled(label, first) + [line for one in more for line in labelled("", one)]


def value_words(one: Mapping[str, Any]) -> str:
    """Return one value used: what, value, unit, date, eye, method, as entered."""
    shown = f"{one['what']} {one['value']} {one['unit']}".strip()
    entered = f"entered as “{one['as_entered']}”" if one.get("as_entered") else ""
    facts = (one.get(name, "") for name in ("date", "eye", "method"))
    return ", ".join(part for part in (shown, *facts, entered) if part)


def source_words(one: Mapping[str, Any]) -> str:
    """Return a source: text, population, strength, and whether a number is from memory."""
    said = [one["text"], f"Population: {one['population']}." if one["population"] else ""]
    said += [f"Strength: {one['strength']}.", f"[{FROM_MEMORY}]" if one["memory"] else ""]
    return " ".join(part for part in said if part)


def nine_parts(working: Mapping[str, Any]) -> list[str]:
    """Return the nine parts of a shown verdict, laid out."""
    rule = working["rule"]
    limit = f"{rule['id']} version {rule['version']}: {rule['limit'] or 'no number of its own'}. "
    limit += f"Limit set {rule['limit_set']} version {rule['limit_set_version']}, "
    limit += "adopted by nobody: an example"
    unknown = [*working["unknowns"], *(f"assumed: {one}" for one in working["assumed"])]
    if working["emergency"]:
        weighed = labelled(EMERGENCY, EMERGENCY_TEXT)
    else:
        options = (f"- {one}" for one in working["options"])
        weighed = _listed(PARTS[7], options, "nothing: nothing is raised here")
    return [
        *labelled(PARTS[0], working["fact"]),
        *_listed(PARTS[1], map(value_words, working["values"]), "none"),
        *_listed(PARTS[2], working["arithmetic"], "nothing is calculated"),
        *labelled(PARTS[3], limit),
        *_listed(PARTS[4], map(source_words, working["source"]), "none"),
        *labelled(PARTS[5], working["noise"] or "nothing was compared"),
        *_listed(PARTS[6], unknown, "nothing known to be missing"),
        *weighed,
        *_listed(PARTS[8], working["not_for"], "nothing named"),
    ]


def headline(one: VerdictRow) -> str:
    """Return where a verdict stands and what came out."""
    eye = {"R": "Right eye", "L": "Left eye"}[one.eye]
    said: str = one.reading or SHOWN[one.outcome]
    rank = f", rank: {one.rank.replace('_', ' ')}" if one.rank else ""
    return f"{one.rule} · {eye} · {one.date} · {said.upper() if one.rank else said}{rank}"


def verdict(one: VerdictRow) -> list[str]:
    """Return one verdict; what wasn't raised in two lines, what was with all nine parts."""
    if one.working is None:
        return [headline(one)]
    if one.outcome in {OUTCOME_WORDS[LIMIT_NOT_REACHED], "does_not_apply"} and not one.reading:
        limit = one.working["rule"]["limit"]
        fact = labelled(PARTS[0], one.sentence)
        return [headline(one), *fact, *(labelled("Limit", limit) if limit else [])]
    return [headline(one), *nine_parts(one.working)]


def quiet(found: Iterable[VerdictRow]) -> list[str]:
    """Return a visit at which nothing was raised: which rules ran, which couldn't tell and why."""
    rows = [one for one in found if one.rule in registry.by_id()]
    if any(one.rank for one in rows):
        raise ValueError("a rule is raised at this visit")
    lines = textwrap.wrap(QUIET_WORDS, WIDTH)
    for outcome in ("limit_not_reached", "still", "could_not_tell", "does_not_apply"):
        mine = [one for one in rows if one.outcome == outcome]
        lines += _listed(SHOWN[outcome].capitalize(), map(_why, mine), "none")
    off = [name for name in registry.by_id() if name not in {one.rule for one in rows}]
    return lines + _listed("Off in this set", off, "none")


def _why(one: VerdictRow) -> str:
    title: str = registry.by_id()[one.rule].INFO.title
    if one.outcome == "does_not_apply":
        return title
    missing = f": {missing_words(one.missing)}" if one.outcome == "could_not_tell" else ""
    return f"{title}{missing}"


def shown_whole(found: Sequence[VerdictRow], outcomes: Container[str]) -> list[bool]:
    """Say which verdicts of a story are laid out whole: raised ones, and the first of each kind.

    A reading counts as of one kind with another that differs in its numbers only.
    """
    seen: set[tuple[str, str]] = set()
    out = []
    for one in found:
        kind = (re.sub("[0-9]+", "", one.reading), one.outcome)
        first = kind not in seen and (bool(one.reading) or one.outcome in outcomes)
        seen.add(kind)
        out.append(bool(one.rank) or first)
    return out


def story(told: Story, outcomes: Container[str] = ()) -> Iterator[str]:
    """Yield a worked example: raised ones whole, the others in a line.

    ``outcomes`` names outcomes whose first verdict is laid out whole too.
    """
    yield from textwrap.wrap(f"Example: {told.title}", WIDTH)
    found = told.verdicts()
    if told.about == QUIET:
        yield from quiet(found)
        return
    for one, whole in zip(found, shown_whole(found, outcomes), strict=True):
        if whole:
            yield ""
            yield from verdict(one)
            yield ""
        else:
            yield from _in_a_line(one)


def _in_a_line(one: VerdictRow) -> list[str]:
    said = one.reading or SHOWN[one.outcome]
    text = f"{one.date}: {said}. {one.sentence}"
    return textwrap.wrap(text, WIDTH, initial_indent="  ", subsequent_indent="    ")


def shown_value(one: Limit) -> str:
    """Return a number of a limit set with its unit, in words."""
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


def sourced(one: Sourced) -> Iterator[str]:
    """Yield one entry of the sources: words, numbers with citations, sources, worked examples."""
    yield f"{one.name}: {one.title}"
    yield ""
    for paragraph in one.words.split("\n\n"):
        yield from textwrap.wrap(paragraph, WIDTH, break_on_hyphens=False)
        yield ""
    yield from _facts(one)
    if one.arithmetic:
        yield from _listed("Example", one.arithmetic, "")
    for told in one.stories:
        yield ""
        yield from story(told)


def _facts(one: Sourced) -> Iterator[str]:
    if one.leans:
        yield from labelled("Leans", one.leans)
    if one.needs:
        yield from labelled("Needs", ", ".join(one.needs))
    if one.always_on:
        yield from labelled("Always on", "runs before any limit set is adopted, can't be off")
    yield from _listed("Numbers", (limit_words(each, one.cites) for each in one.limits), "none")
    for other in one.elsewhere:
        yield from labelled("Otherwise", f"in {other.limit_set}: {limit_words(other, one.cites)}")
    for number, source in enumerate(one.cites, start=1):
        facts = {"text": source.text, "population": source.population}
        words = source_words({**facts, "strength": source.strength, "memory": False})
        yield from labelled(f"Source {number}", words)
