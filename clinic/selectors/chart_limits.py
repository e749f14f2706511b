"""The limit line and the error bars of the chart, read from the adopted limit set."""

import datetime as dt
from collections.abc import Sequence
from itertools import groupby

from clinic.chart import LimitPiece
from trends.limits import LimitSet, Table

PERMILLE = 1000
SEX_WORDS = {"f": "women", "m": "men"}


class Errors:
    """Published repeatability by method; nothing where the set holds none."""

    def __init__(self, limits: LimitSet | None) -> None:
        self.limits = limits

    def _number(self, table: str, name: str) -> int | None:
        found: Table | None = self.limits.rule(table) if self.limits else None
        return found.get(name) if found else None

    def cst_um(self, oct_class: str, is_assumed: bool, amount_um: int) -> float | None:
        """Return the class's repeatability in µm; where it is published in per cent, of amount."""
        klass = oct_class or ("assumed" if is_assumed else "")
        um = self._number("thickening", f"um_{klass}")
        if um is not None:
            return um
        permille = self._number("thickening", f"permille_{klass}")
        return None if permille is None else amount_um * permille / PERMILLE

    def letters(self) -> float | None:
        """Return the repeatability of letters on a five-letter chart."""
        return self._number("noise", "letters")

    def iop_mmhg(self, method: str) -> float | None:
        """Return the repeatability of a tonometer in mmHg."""
        tenths = self._number("noise", f"iop_tenths_{method}")
        return None if tenths is None else tenths / 10


def limit_pieces(
    scans: Sequence[tuple[dt.date, str]], sex: str, limits: LimitSet | None
) -> tuple[LimitPiece, ...]:
    """Return the center-involved limit for each stretch of one scanner class, (day, class) in.

    A stretch begins at its first scan; the first reaches back to the beginning of the chart and
    the last on to its end. Sex not recorded: both limits are drawn.
    """
    table = limits.rule("crossed_limit") if limits else None
    if table is None:
        return ()
    runs = [
        (klass, next(days)[0]) for klass, days in groupby(sorted(scans), key=lambda one: one[1])
    ]
    pieces: list[LimitPiece] = []
    for n, (klass, first) in enumerate(runs):
        until = runs[n + 1][1] if n + 1 < len(runs) else None
        for word in [sex] if sex else list(SEX_WORDS):
            um = table.get(f"um_{klass}_{word}")
            if um is not None:
                words = f"center-involved limit, {klass}, {SEX_WORDS[word]}"
                pieces.append(LimitPiece(um, words, first if n else None, until))
    return tuple(pieces)
