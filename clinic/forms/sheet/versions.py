"""Two versions of one part: what each says, and both put together without losing a value.

What somebody didn't touch is not theirs to decide, so the stored value stays; what they changed
goes on top. The fields of one value (a thickness and its scanner) are taken from one version.
"""

from typing import Any

from clinic.forms.sheet.eye import EyeForm
from clinic.forms.sheet.told import UNTOLD, label, told


def touched(theirs: EyeForm, mine: EyeForm, opened_on: EyeForm) -> set[str]:
    """Return the fields that were changed since the sheet was opened, each with its value's.

    A value that both typed alike isn't mine: its blank tonometer must not blank theirs.
    """
    changed = {
        name
        for name in mine.fields
        if name not in mine.station and told(mine, name) != told(opened_on, name)
    }
    for group in mine.groups:
        if changed.intersection(group):
            alike = all(_adds_nothing(name, theirs, mine, opened_on) for name in group)
            changed = changed.difference(group) if alike else changed.union(group)
    return changed - set(UNTOLD)


def _adds_nothing(name: str, theirs: EyeForm, mine: EyeForm, opened_on: EyeForm) -> bool:
    was, words = told(opened_on, name), told(mine, name)
    return words == told(theirs, name) or (not words and not was)


def both(theirs: EyeForm, mine: EyeForm, opened_on: EyeForm) -> list[dict[str, Any]]:
    """Return label and words of both versions of each field that either fills."""
    changed = touched(theirs, mine, opened_on)
    found = []
    for name in mine.fields:
        one, other = told(theirs, name), told(mine, name)
        if name not in UNTOLD and (one or (other and name in changed)):
            row = {"label": label(mine, name), "theirs": one, "mine": other}
            found.append({**row, "stays": name not in changed, "same": one == other})
    return found


def together(theirs: EyeForm, mine: EyeForm, opened_on: EyeForm) -> list[tuple[str, str]]:
    """Return names and values to post so that mine goes on top and nothing of theirs is lost."""
    changed = touched(theirs, mine, opened_on)
    return [
        (mine.add_prefix(name), text)
        for name in mine.fields
        if name not in UNTOLD
        for text in _posted((mine if name in changed else theirs)[name].value())
    ]


def _posted(value: Any) -> list[str]:
    if isinstance(value, bool):
        return ["on"] if value else []
    values = value if isinstance(value, list) else [value]
    return [str(one) for one in values if one not in (None, "")]
