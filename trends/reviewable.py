"""One readable file of rendered verdicts: every rule and regimen, for a clinician to review."""

import textwrap
from collections.abc import Iterator

from trends.notice import NOTICE
from trends.printed import WIDTH, story
from trends.regimens import registry as regimens
from trends.rules import registry
from trends.worked import QUIET, stories

WHOLE = ("still", "could_not_tell")
"""Outcomes laid out whole once a story, beside every raised one."""
HEAD = (
    "Rendered verdicts, for review by a clinician. People, visits and numbers are invented; "
    "sentences, arithmetic and options are the engine's own. Written by "
    "python -m trends sources --verdicts FILE."
)


def verdict_file() -> str:
    """Return the whole file as text."""
    return "\n".join(line.rstrip() for line in _lines()).rstrip() + "\n"


def _lines() -> Iterator[str]:
    for paragraph in (HEAD, NOTICE):
        yield from textwrap.wrap(paragraph, WIDTH)
        yield ""
    titles = {
        name: m.INFO.title for name, m in (*registry.by_id().items(), *regimens.by_id().items())
    }
    for name, title in {**titles, QUIET: "A visit at which nothing was raised"}.items():
        yield "=" * WIDTH
        yield f"{title} ({name})"
        yield "=" * WIDTH
        yield ""
        for told in stories(name):
            yield from story(told, WHOLE)
            yield ""
