"""A guard on free text: what looks like an identifier of a person is blocked or asked about.

An aid, not a guarantee: published scanners of this kind miss several in a hundred (Neamatullah
2008, BMC Med Inform Decis Mak 8:32), and a bare name can't be caught at all. Dates need a year in
the pattern, so that acuities (6/12), pressures (16/18) and blood pressures (148/92) pass.
"""

import re
from dataclasses import dataclass

MONTHS = (
    "Jan(?:uary)?|Feb(?:ruary)?|Mar(?:ch)?|Apr(?:il)?|May|June?|July?|Aug(?:ust)?|"
    "Sep(?:t(?:ember)?)?|Oct(?:ober)?|Nov(?:ember)?|Dec(?:ember)?"
)
DAY, MONTH = r"(?:0?[1-9]|[12][0-9]|3[01])", r"(?:0?[1-9]|1[0-2])"
ORDINAL = r"[0-9]{1,2}(?:st|nd|rd|th)?"


@dataclass(frozen=True)
class Guard:
    """One pattern: what it finds in words, and whether it blocks or only asks."""

    words: str
    pattern: re.Pattern[str]
    blocks: bool


def _guard(words: str, pattern: str, *, blocks: bool, any_case: bool = False) -> Guard:
    return Guard(words, re.compile(pattern, re.IGNORECASE if any_case else 0), blocks)


GUARDS = (
    _guard(
        "an e-mail address",
        r"(?<![\w.+-])[\w.+-]{1,64}@[\w-]+(?:\.[\w-]+)+",
        blocks=True,
        any_case=True,
    ),
    _guard("a web address", r"\b(?:https?://|www\.)\S+", blocks=True, any_case=True),
    _guard("a long number", r"(?<![0-9.])[0-9](?:[ -]?[0-9]){6,}(?![0-9.])", blocks=True),
    _guard(
        "a labelled number of a person",
        r"\b(?:mrn|med(?:ical)?\.? ?rec(?:ord)?\.?(?: ?(?:no|number|#))?|hospital (?:no|number)|"
        r"chart (?:no|number)|nhs(?: (?:no|number))?|ssn|insurance (?:no|number|id)|"
        r"policy (?:no|number)|passport|account (?:no|number)|patient id)\b\s*[:#.]?\s*"
        r"[A-Z0-9-]{4,}",
        blocks=True,
        any_case=True,
    ),
    _guard(
        "a full date",
        rf"(?<![0-9/.-])(?:[0-9]{{4}}[-/.]{MONTH}[-/.]{DAY}|{DAY}[-/.]{DAY}[-/.][0-9]{{4}})"
        r"(?![0-9/.-])",
        blocks=True,
    ),
    _guard(
        "a full date",
        rf"\b(?:{ORDINAL}\s+)?(?:{MONTHS})\.?\s+(?:{ORDINAL},?\s+)?(?:19|20)[0-9]{{2}}\b",
        blocks=True,
        any_case=True,
    ),
    _guard(
        "a title with a name",
        r"\b(?:Mr|Mrs|Ms|Miss|Mx|Dr|Prof|Sir|Dame)\.?\s+[A-Z][a-zA-Z'’-]+",
        blocks=True,
    ),
    _guard(
        "a date of birth",
        r"\b(?:d\.?o\.?b\.?|date of birth|born(?: on)?)\b",
        blocks=False,
        any_case=True,
    ),
    _guard(
        "perhaps a date",
        rf"(?<![0-9/.-]){DAY}[-/.]{DAY}[-/.][0-9]{{2}}(?![0-9/.-])",
        blocks=False,
    ),
    _guard(
        "a relative with a name",
        r"\b(?:wife|husband|son|daughter|mother|father|brother|sister|partner|carer|friend)\s+"
        r"(?:is\s+)?[A-Z][a-z]+",
        blocks=False,
    ),
    _guard(
        "a labelled name",
        r"\b(?:patient(?:'s)? name|name|surname|pt name)\s*[:=]\s*\S+",
        blocks=False,
        any_case=True,
    ),
    _guard(
        "an age of 90 or more",
        r"\b(?:aged?\s*|age[: ]\s*)?(?:9[0-9]|1[0-2][0-9])\s*"
        r"(?:y(?:ears?)?\b[ -]?(?:old|o)?|yo\b|y/o\b|-year-old)",
        blocks=False,
        any_case=True,
    ),
    _guard(
        "a street address",
        r"\b[0-9]{1,5}\s+(?:[A-Z][a-z]+\s){1,3}(?:Street|St|Avenue|Ave|Road|Rd|Lane|Ln|Drive|Dr|"
        r"Close|Court|Ct|Way|Place|Pl|Boulevard|Blvd)\b",
        blocks=False,
    ),
    _guard("a postal code", r"\b[A-Z]{1,2}[0-9][A-Z0-9]?\s*[0-9][A-Z]{2}\b", blocks=False),
    _guard("a postal code", r"(?<![0-9])[0-9]{5}-[0-9]{4}(?![0-9])", blocks=False),
    _guard(
        "a serial or lot number",
        r"\b(?:serial|s/n|lot|batch)\s*(?:no\.?|number|#)?\s*[:#]?\s*(?=[A-Z0-9-]*[0-9])"
        r"[A-Z0-9-]{5,}",
        blocks=False,
        any_case=True,
    ),
)


@dataclass(frozen=True)
class Match:
    """One thing found in a text, shown with the reason."""

    words: str
    text: str
    blocks: bool


def found(text: str) -> list[Match]:
    """Return what in a text looks like an identifier, those that block first."""
    matches = [
        Match(guard.words, match.group(0), guard.blocks)
        for guard in GUARDS
        for match in guard.pattern.finditer(text)
    ]
    return sorted(matches, key=lambda match: not match.blocks)
