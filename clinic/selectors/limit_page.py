"""The limit-set page: every entry with unit and source, and what is proposed or in force."""

from collections.abc import Collection
from dataclasses import dataclass, replace

from clinic.models import Adoption, LimitSetText
from clinic.selectors.access import Here
from clinic.selectors.adopted import adopted_for, parsed
from trends.citations import citation
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.rules import registry as rules

FIRST = "general"
"""The set shown first where none is in force."""
OTHER_TITLES = {
    "comparison": "Comparison with earlier values",
    "prediction": "What a value is expected to be, for doubts",
}


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
    in_force: bool = False
    against: str = ""
    differing: tuple[TableLines, ...] = ()
    absent: tuple[str, ...] = ()

    @property
    def alike(self) -> tuple[TableLines, ...]:
        """The tables that read the same as in the set compared with."""
        return tuple(table for table in self.tables if table not in self.differing)


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
            str(named[table.name].INFO.title) if table.name in named else OTHER_TITLES[table.name],
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


def compared(one: SetPage, base: SetPage, *, in_force: bool) -> SetPage:
    """Return a set's page with what differs from another's, table by table."""
    theirs = {table.name: table.lines for table in base.tables}
    names = {table.name for table in one.tables}
    return replace(
        one,
        in_force=in_force,
        against="" if one.row.pk == base.row.pk else base.limits.title,
        differing=tuple(t for t in one.tables if theirs.get(t.name) != t.lines),
        absent=tuple(table.title for table in base.tables if table.name not in names),
    )


def _sets(in_force: Collection[str]) -> tuple[SetPage, ...]:
    """Return every stored set, those in force first, each beside the first of them."""
    pages = [set_page(row) for row in LimitSetText.objects.order_by("name", "pk")]
    digests = [page.limits.digest in in_force for page in pages]
    pages = [
        page
        for _order, page in sorted(
            zip(digests, pages, strict=True),
            key=lambda both: (not both[0], both[1].row.name != FIRST, both[1].limits.title),
        )
    ]
    return tuple(
        compared(page, pages[0], in_force=page.limits.digest in in_force) for page in pages
    )


def limit_page(here: Here) -> LimitPage:
    """Return the page of a site."""
    open_ones = Adoption.objects.filter(site=here.site, confirmation=None)
    adopted = adopted_for(here.site)
    return LimitPage(
        sets=_sets({one.limits.digest for one in adopted.values()}),
        in_force=tuple(one.words for one in adopted.values()),
        proposed=tuple(open_ones.select_related("limit_set", "by").order_by("-seq")),
    )
