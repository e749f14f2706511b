"""Agents by international non-proprietary name, lower case; ``+`` joins two of one day."""

from functools import cache

from trends.errors import EbblineError
from trends.measures.ranges import ranges

NOTHING = "none"


class AgentRefused(EbblineError):
    """An agent that isn't a known INN."""


@cache
def known() -> tuple[str, ...]:
    """Return every known agent."""
    return (*ranges("agents").texts("anti_vegf"), *ranges("agents").texts("steroid"))


@cache
def is_steroid(agents: str) -> bool:
    """Say whether one of the joined agents is a steroid."""
    return any(one in ranges("agents").texts("steroid") for one in agents.split("+"))


@cache
def parse(text: str) -> str:
    """Return agents in canonical form, ``none``, or nothing when blank; raises ``AgentRefused``."""
    parts = [part.strip().lower() for part in text.split("+") if part.strip()]
    if not parts:
        return ""
    strangers = [part for part in parts if part not in (*known(), NOTHING)]
    if strangers or (NOTHING in parts and len(parts) > 1):
        raise AgentRefused(
            "agent",
            text,
            ", ".join((*known(), NOTHING)) + "; joined by +",
            "Agents are written by their international non-proprietary name.",
            "Write the generic name; 'none' means that nothing was given.",
        )
    return "+".join(sorted(parts))
