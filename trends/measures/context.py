"""What bears on a treatment, as written in one cell: ``pregnancy+stroke:2026-01-02``.

Tokens are of the person, ``inflammation:AGENT`` of the eye. ``none`` says that nothing known
before still holds; tokens beside it do.
"""

import datetime as dt
import re
from dataclasses import dataclass, field
from functools import cache

from trends import words
from trends.errors import EbblineError
from trends.measures import agents

NONE = "none"
INFLAMMATION = "inflammation"
DATED = ("stroke", "heart_attack")
ISO = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
ENDS = 1
"""The bit of ``none``; those of ``words.CONTEXT`` and of inflammations follow."""


class ContextRefused(EbblineError):
    """A token that isn't one of the list."""


@cache
def inflaming() -> tuple[str, ...]:
    """Return the agents an earlier inflammation can be told of, in the order of their bits."""
    return (*agents.known(), "other")


def bit(token: str) -> int:
    """Return the bit of a token of the person."""
    return 2 << words.CONTEXT.index(token)


def inflammation_bit(agent: str) -> int:
    """Return the bit of an earlier inflammation with one agent."""
    return 2 << len(words.CONTEXT) + inflaming().index(agent)


def person_mask() -> int:
    """Return every bit that is of the person."""
    return sum(map(bit, words.CONTEXT))


def inflammation_mask() -> int:
    """Return every bit that is of one eye."""
    return sum(map(inflammation_bit, inflaming()))


@dataclass(frozen=True)
class Context:
    """One cell: its bits, and the days of what was dated."""

    bits: int = 0
    days: dict[str, dt.date] = field(default_factory=dict)


def names(bits: int) -> tuple[str, ...]:
    """Return tokens of some bits in words."""
    found = [one.replace("_", " ") for one in words.CONTEXT if bits & bit(one)]
    found += [f"inflammation with {one}" for one in inflaming() if bits & inflammation_bit(one)]
    return tuple(found)


def _refused(text: str) -> ContextRefused:
    return ContextRefused(
        "context",
        text,
        f"{', '.join(words.CONTEXT)}, {INFLAMMATION}:AGENT, {NONE}; joined by +; "
        "stroke and heart_attack may have a day, stroke:2026-01-02",
        "The words are those of the list.",
        "Use the words of the list.",
    )


def parse(text: str) -> Context | None:
    """Read a cell; None when blank (not asked). Raises ``ContextRefused``."""
    if not text.strip():
        return None
    tokens = [one.strip() for one in text.lower().split("+") if one.strip()]
    bits = 0
    days: dict[str, dt.date] = {}
    for token in tokens:
        name, _, more = token.partition(":")
        bits |= _bit_of(name, more, text)
        if more and name in DATED:
            days[name] = max(_day(more, text), days.get(name, dt.date.min))
    if not tokens:
        raise _refused(text)
    return Context(bits, days)


def _bit_of(name: str, more: str, text: str) -> int:
    if name == INFLAMMATION and more in inflaming():
        return inflammation_bit(more)
    if more and name not in DATED:
        raise _refused(text)
    if name == NONE:
        return ENDS
    if name not in words.CONTEXT:
        raise _refused(text)
    return bit(name)


def _day(text: str, cell: str) -> dt.date:
    try:
        if ISO.fullmatch(text):
            return dt.date.fromisoformat(text)
    except ValueError:
        pass
    raise _refused(cell)
