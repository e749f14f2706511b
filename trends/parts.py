"""The nine parts of a shown verdict, each a label with its lines, and what a quiet visit says.

Nothing here words a fact: sentences, arithmetic and options come from the engine as they are.
"""

from collections.abc import Iterable, Iterator, Mapping
from typing import Any, NamedTuple

from trends.rules import registry
from trends.verdict import OUTCOME_WORDS
from trends.wording import VerdictRow, missing_words

FROM_MEMORY = "from memory, check the original"
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
QUIET_OUTCOMES = ("limit_not_reached", "still", "could_not_tell", "does_not_apply")
SHOWN = {
    **{word: word.replace("_", " ") for word in OUTCOME_WORDS.values()},
    "could_not_tell": "couldn't tell",
    "does_not_apply": "doesn't apply",
}
EYES = {"R": "Right eye", "L": "Left eye"}


class Part(NamedTuple):
    """One part: its label and its lines, never none."""

    label: str
    lines: tuple[str, ...]


def part(label: str, lines: Iterable[str], otherwise: str) -> Part:
    """Return a part; ``otherwise`` is said where there is no line."""
    return Part(label, tuple(line for line in lines if line) or (otherwise,))


def value_words(one: Mapping[str, Any]) -> str:
    """Return one value used: what, value, unit, date, eye, method, as entered."""
    shown = f"{one['what']} {one['value']} {one['unit']}".strip()
    entered = f"entered as “{one['as_entered']}”" if one.get("as_entered") else ""
    facts = (one.get(name, "") for name in ("date", "eye", "method"))
    return ", ".join(each for each in (shown, *facts, entered) if each)


def source_words(one: Mapping[str, Any]) -> str:
    """Return a source: text, population, strength, and whether a number is from memory."""
    said = [one["text"], f"Population: {one['population']}." if one["population"] else ""]
    said += [f"Strength: {one['strength']}.", f"[{FROM_MEMORY}]" if one["memory"] else ""]
    return " ".join(each for each in said if each)


def rule_words(rule: Mapping[str, Any]) -> str:
    """Return rule, limit and limit set with their versions; an example's set is adopted nowhere."""
    limit = f"{rule['id']} version {rule['version']}: {rule['limit'] or 'no limit was compared'}. "
    named = f"Limit set {rule['limit_set']} version {rule['limit_set_version']}"
    return f"{limit}{named}, adopted by nobody: an example"


def nine_parts(working: Mapping[str, Any]) -> tuple[Part, ...]:
    """Return the nine parts of a verdict's working."""
    assumed = (f"assumed: {one}" for one in working["assumed"])
    weighed = part(PARTS[7], working["options"], "nothing: nothing is raised here")
    if working["emergency"]:
        weighed = Part(EMERGENCY, (EMERGENCY_TEXT,))
    return (
        part(PARTS[0], [working["fact"]], "no sentence"),
        part(PARTS[1], map(value_words, working["values"]), "none"),
        part(PARTS[2], working["arithmetic"], "nothing is calculated"),
        Part(PARTS[3], (rule_words(working["rule"]),)),
        part(PARTS[4], map(source_words, working["source"]), "none"),
        part(PARTS[5], [working["noise"]], "nothing was compared"),
        part(PARTS[6], [*working["unknowns"], *assumed], "nothing known to be missing"),
        weighed,
        part(PARTS[8], working["not_for"], "nothing named"),
    )


def said(one: VerdictRow) -> str:
    """Return what came out in a word or two: the outcome, or the regimen's reading."""
    return one.reading or SHOWN[one.outcome]


def quiet_parts(found: Iterable[VerdictRow]) -> tuple[Part, ...]:
    """Return a visit at which nothing was raised: which rules ran, which couldn't tell and why.

    Raises ``ValueError`` where a rule is raised.
    """
    rows = [one for one in found if one.rule in registry.by_id()]
    if any(one.rank for one in rows):
        raise ValueError("a rule is raised at this visit")
    return (*_by_outcome(rows), part("Off in this set", _off(rows), "none"))


def _by_outcome(rows: list[VerdictRow]) -> Iterator[Part]:
    for outcome in QUIET_OUTCOMES:
        mine = (_why(one) for one in rows if one.outcome == outcome)
        yield part(SHOWN[outcome].capitalize(), mine, "none")


def _off(rows: list[VerdictRow]) -> Iterator[str]:
    ran = {one.rule for one in rows}
    return (module.INFO.title for name, module in registry.by_id().items() if name not in ran)


def _why(one: VerdictRow) -> str:
    title: str = registry.by_id()[one.rule].INFO.title
    missing = f": {missing_words(one.missing)}" if one.outcome == "could_not_tell" else ""
    return f"{title}{missing}"
