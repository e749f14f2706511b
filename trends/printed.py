"""Verdicts and sources laid out as plain text that a clinician can read through."""

import textwrap
from collections.abc import Container, Iterable, Iterator

from trends.parts import EYES, PARTS, QUIET_WORDS, Part, nine_parts, quiet_parts, said, source_words
from trends.saying import column
from trends.sources import Sourced, limit_words
from trends.verdict import LIMIT_NOT_REACHED, OUTCOME_WORDS
from trends.wording import VerdictRow
from trends.worked import QUIET, Story, shown_whole

WIDTH = 100
LABEL = 22
WEIGHED = PARTS[7]
SHORT = (OUTCOME_WORDS[LIMIT_NOT_REACHED], "does_not_apply")


def labelled(label: str, text: str) -> list[str]:
    """Return a text beside its label, wrapped under itself."""
    return textwrap.wrap(
        text,
        WIDTH,
        initial_indent=f"  {label}".ljust(LABEL) + " ",
        subsequent_indent=" " * (LABEL + 1),
        break_on_hyphens=False,
    )


def laid_out(part: Part) -> list[str]:
    """Return a part's lines, the first beside its label; things to weigh as a list."""
    mark = "- " if part.label == WEIGHED and len(part.lines) > 1 else ""
    first, *more = (mark + line for line in part.lines)
    return labelled(part.label, first) + [line for one in more for line in labelled("", one)]


def _all_laid_out(parts: Iterable[Part]) -> list[str]:
    return [line for part in parts for line in laid_out(part)]


def headline(one: VerdictRow) -> str:
    """Return where a verdict stands and what came out."""
    rank = f", rank: {one.rank.replace('_', ' ')}" if one.rank else ""
    shown = said(one).upper() if one.rank else said(one)
    return f"{one.rule} · {EYES[one.eye]} · {one.date} · {shown}{rank}"


def verdict(one: VerdictRow) -> list[str]:
    """Return one verdict with its nine parts."""
    return [headline(one), *(_all_laid_out(nine_parts(one.working)) if one.working else [])]


def quiet(found: Iterable[VerdictRow]) -> list[str]:
    """Return a visit at which nothing was raised."""
    return [*textwrap.wrap(QUIET_WORDS, WIDTH), *_all_laid_out(quiet_parts(found))]


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
    text = f"{one.date}: {said(one)}. {one.sentence}"
    return textwrap.wrap(text, WIDTH, initial_indent="  ", subsequent_indent="    ")


def sourced(one: Sourced) -> Iterator[str]:
    """Yield one entry of the sources: words, numbers with citations, sources, worked examples."""
    yield f"{one.name}: {one.title}"
    yield ""
    for paragraph in one.paragraphs:
        yield from textwrap.wrap(paragraph, WIDTH, break_on_hyphens=False)
        yield ""
    yield from _facts(one)
    if one.arithmetic:
        yield from laid_out(Part("Example", one.arithmetic))
    for told in one.stories:
        yield ""
        yield from story(told)


def _facts(one: Sourced) -> Iterator[str]:
    if one.leans:
        yield from labelled("Leans", one.leans)
    if one.needs:
        yield from labelled("Needs", ", ".join(map(column, one.needs)))
    if one.always_on:
        yield from labelled("Always on", "runs before any limit set is adopted, can't be off")
    numbers = tuple(limit_words(each, one.cites) for each in one.limits)
    yield from laid_out(Part("Numbers", numbers or ("none",)))
    for other in one.elsewhere:
        yield from labelled("Otherwise", f"in {other.limit_set}: {limit_words(other, one.cites)}")
    for number, source in enumerate(one.cites, start=1):
        facts = {"text": source.text, "population": source.population}
        words = source_words({**facts, "strength": source.strength, "memory": False})
        yield from labelled(f"Source {number}", words)
