"""The limit line and the error bars of the chart, from the adopted set and published numbers."""

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import groupby

from clinic.chart import LimitPiece
from clinic.models import EyeState
from trends.limits import LimitSet
from trends.measures.repeatability import repeatability

PERMILLE, TENTHS = 1000, 10
SEX_WORDS = {"f": "women", "m": "men"}
LINES = (
    "Lines join only readings taken in a comparable way, with no eye surgery between. "
    "Hollow: poor scan."
)


@dataclass
class Errors:
    """Published repeatability by method; ``told`` gathers the note and source of each one used."""

    limits: LimitSet | None
    told: dict[str, None] = field(default_factory=dict)

    def cst_um(self, oct_class: str, is_assumed: bool, amount_um: int) -> float | None:
        """Return the class's repeatability in µm; where it is published in per cent, of amount."""
        klass = oct_class or ("assumed" if is_assumed else "")
        table = self.limits.rule("thickening") if self.limits else None
        if table is None or self.limits is None:
            return None
        named = f"limit set {self.limits.name} {self.limits.version}"
        if (um := table.get(f"um_{klass}")) is not None:
            self.told[f"CST ±{um} µm ({klass}, {named})"] = None
            return um
        if (permille := table.get(f"permille_{klass}")) is not None:
            self.told[f"CST ±{permille / TENTHS:g} % ({klass}, {named})"] = None
            return amount_um * permille / PERMILLE
        return None

    def published(self, what: str, method: str) -> float | None:
        """Return the repeatability of ``letters`` or ``iop``, in letters or mmHg."""
        found = repeatability(what, method)
        if found is None:
            return None
        size = f"±{found.tenths / TENTHS:g} {found.unit}"
        name = "Acuity" if what == "letters" else "IOP"
        self.told[f"{name} {size} ({method.replace('_', ' ')}; {found.source.rstrip('.')})"] = None
        return found.tenths / TENTHS

    def notes(self) -> tuple[str, ...]:
        """Return what the bars and gaps of the chart mean."""
        bars = "Bars, published repeatability: " + "; ".join(self.told) + "."
        return (bars, LINES) if self.told else (LINES,)


def limit_pieces(
    scans: Sequence[tuple[dt.date, str]], sex: str, cause: str, limits: LimitSet | None
) -> tuple[LimitPiece, ...]:
    """Return the center-involved limit for each stretch of one scanner class, (day, class) in.

    A stretch begins at its first scan; the first reaches back to the beginning of the chart and
    the last on to its end. Sex not recorded: both limits are drawn. The limit is published for
    diabetic macular edema, so another cause has none.
    """
    table = limits.rule("crossed_limit") if limits else None
    if table is None or cause != EyeState.Cause.DIABETIC:
        return ()
    runs = [
        (klass, next(days)[0]) for klass, days in groupby(sorted(scans), key=lambda one: one[1])
    ]
    pieces: list[LimitPiece] = []
    for n, (klass, first) in enumerate(runs):
        until = runs[n + 1][1] if n + 1 < len(runs) else None
        for word in [sex] if sex else list(SEX_WORDS):
            um = table.get(f"limit_{word}_{klass}")
            if um is not None:
                words = f"center-involved limit, {klass}, {SEX_WORDS[word]}"
                pieces.append(LimitPiece(um, words, first if n else None, until))
    return tuple(pieces)
