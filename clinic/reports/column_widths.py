"""How wide the columns of a table are: as their words need, the rest as their lines would like."""

from collections.abc import Sequence
from dataclasses import dataclass

from clinic.reports.fonts import plain, width

SIZE = 6.8
PAD_X = 3.0
SLACK = 0.5
MOST_SHARE = 0.25
MOST_MORE = 45.0
Wish = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Row:
    """A row: one text a column, and perhaps a line under them over the whole width."""

    cells: Sequence[str]
    under: str = ""


def wished(
    columns: Sequence[str], rows: Sequence[Row], kept: Sequence[int], room: float
) -> list[Wish]:
    """Return what each kept column wants: room for its longest word, and for its longest line.

    A word that would take more than its share of the page is broken instead.
    """
    wishes = []
    for n in kept:
        lines = [(columns[n], True)]
        lines += [
            (line, False) for text in {row.cells[n] for row in rows} for line in text.split("\n")
        ]
        longest_line = max(width(plain(line), bold, SIZE) for line, bold in lines)
        longest_word = max(
            width(word, bold, SIZE) for line, bold in lines for word in plain(line).split(" ")
        )
        most = MOST_SHARE * room
        wishes.append((min(longest_word, most), longest_line))
    return wishes


def shared(wishes: Sequence[Wish], room: float) -> list[float]:
    """Return the width of each column: its longest word, and a fair part of what is left.

    Where even the words don't fit, all columns shrink alike and words are broken.
    """
    least = [word + 2 * PAD_X + SLACK for word, _ in wishes]
    more = [min(MOST_MORE, max(0.0, line - word)) for word, line in wishes]
    left = room - sum(least)
    if left < 0:
        return [wide * room / sum(least) for wide in least]
    if left >= sum(more):
        each = (left - sum(more)) / len(wishes)
        return [wide + extra + each for wide, extra in zip(least, more, strict=True)]
    return [wide + extra * left / sum(more) for wide, extra in zip(least, more, strict=True)]
