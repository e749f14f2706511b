"""Symptoms as written in one cell: ``pain+blurred:gone``; bare means present now."""

from dataclasses import dataclass

from trends import words
from trends.errors import EbblineError

GONE = ":gone"
NONE = "none"


class SymptomsRefused(EbblineError):
    """A symptom that isn't one of the list."""


@dataclass(frozen=True)
class Symptoms:
    """Symptoms of an eye at one visit, present now and passed."""

    present: tuple[str, ...]
    gone: tuple[str, ...]

    @property
    def present_bits(self) -> int:
        """Present ones, a bit each in the order of ``words.SYMPTOMS``."""
        return sum(1 << words.SYMPTOMS.index(one) for one in self.present)

    @property
    def gone_bits(self) -> int:
        """Passed ones, a bit each."""
        return sum(1 << words.SYMPTOMS.index(one) for one in self.gone)


def names(bits: int) -> tuple[str, ...]:
    """Return the symptoms of some bits."""
    return tuple(one for place, one in enumerate(words.SYMPTOMS) if int(bits) >> place & 1)


def _refused(text: str) -> SymptomsRefused:
    return SymptomsRefused(
        "symptoms",
        text,
        ", ".join((*words.SYMPTOMS, NONE)) + f"; joined by +; {GONE} when passed",
        "'none' stands alone.",
        "Use the words of the list.",
    )


def parse(text: str) -> Symptoms | None:
    """Read a cell; None when blank (not asked). Raises ``SymptomsRefused``.

    A symptom named twice counts once. Only joins, without a word, are no answer and are refused.
    """
    if not text.strip():
        return None
    tokens = list(dict.fromkeys(one.strip() for one in text.lower().split("+") if one.strip()))
    if not tokens:
        raise _refused(text)
    present: list[str] = []
    gone: list[str] = []
    for token in tokens:
        name = token.removesuffix(GONE)
        if name not in (*words.SYMPTOMS, NONE) or (name == NONE and tokens != [NONE]):
            raise _refused(text)
        if name != NONE:
            (gone if token.endswith(GONE) else present).append(name)
    return Symptoms(tuple(present), tuple(gone))
