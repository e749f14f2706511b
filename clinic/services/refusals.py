"""What services refuse. Nothing of a refused post is stored, nothing of it is lost."""

from collections.abc import Sequence

from trends.errors import EbblineError


class PartRefused(EbblineError):
    """Something that can't be stored; nothing of it was."""


class ReasonNeeded(PartRefused):
    """A correction without a reason."""


class Conflict(Exception):
    """Somebody else saved the same part meanwhile. Nothing of this post was stored."""

    def __init__(self, part: str, sides: Sequence[str]) -> None:
        self.part, self.sides = part, tuple(sides)
        super().__init__(f"{part} was saved by somebody else meanwhile")


def reason_given(reason: str, *, of: str, why: str) -> str:
    """Return a reason without its outer blanks; raises ``ReasonNeeded`` when there is none."""
    if reason.strip():
        return reason.strip()
    raise ReasonNeeded(
        f"reason for {of}",
        "(blank)",
        "a few words",
        why,
        "Say why, for example: typed wrong, wrong eye. What stood before stays visible.",
    )
