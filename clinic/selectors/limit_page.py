"""The limit-set page: every entry with unit and source, and what is proposed or in force."""

from dataclasses import dataclass

from clinic.models import Adoption, LimitSetText
from clinic.selectors.access import Here
from clinic.selectors.adopted import adopted_for, parsed
from trends.citations import citation
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.rules import registry as rules


@dataclass(frozen=True)
class EntryLine:
    """One threshold with its source."""

    key: str
    name: str
    value: str
    unit: str
    source: str
    place: str
    note: str
    memory: bool


@dataclass(frozen=True)
class TableLines:
    """The thresholds of one rule or regimen."""

    title: str
    name: str
    lines: tuple[EntryLine, ...]


@dataclass(frozen=True)
class SetPage:
    """One stored set."""

    row: LimitSetText
    limits: LimitSet
    tables: tuple[TableLines, ...]
    from_memory: int


@dataclass(frozen=True)
class LimitPage:
    """All sets, what is in force, and what waits for a clinician."""

    sets: tuple[SetPage, ...]
    in_force: tuple[str, ...]
    proposed: tuple[Adoption, ...]


def set_page(row: LimitSetText) -> SetPage:
    """Return one set with its entries and sources."""
    limits = parsed(row.text)
    named = {**rules.by_id(), **regimens.by_id()}
    tables = [
        TableLines(
            str(named[table.name].INFO.title) if table.name in named else table.name,
            table.name,
            tuple(
                EntryLine(
                    f"{table.name}.{name}",
                    name.replace("_", " "),
                    str(entry.value),
                    entry.unit,
                    citation(entry.cite).text,
                    entry.place,
                    entry.note,
                    entry.memory,
                )
                for name, entry in table.entries.items()
            ),
        )
        for table in (*limits.rules.values(), *limits.regimens.values())
    ]
    from_memory = sum(line.memory for table in tables for line in table.lines)
    return SetPage(row, limits, tuple(tables), from_memory)


def limit_page(here: Here) -> LimitPage:
    """Return the page of a site."""
    open_ones = Adoption.objects.filter(site=here.site, confirmation=None)
    return LimitPage(
        sets=tuple(set_page(row) for row in LimitSetText.objects.order_by("name", "pk")),
        in_force=tuple(one.words for one in adopted_for(here.site).values()),
        proposed=tuple(open_ones.select_related("limit_set", "by").order_by("-seq")),
    )
