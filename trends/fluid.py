"""The change of thickness since the last comparable scan, shared by the rules that read it."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import saying, words
from trends.comparable import Previous
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, bit
from trends.visits import MISSING, Bools, Ints, Visits

CLASSES = (*words.OCT_CLASSES, "assumed")


def by_class(limits: Table, prefix: str, classes: Ints, absent: int) -> Ints:
    """Return a limit for each class code (n,); ``absent`` where the set leaves a class open."""
    table = [limits.get(f"{prefix}_{name}") for name in CLASSES]
    numbers = np.array([absent if one is None else one for one in table] + [absent])
    return numbers[classes]


@dataclass(frozen=True)
class Rise:
    """The rise of every scan against its comparable one; columns (n,).

    ``against`` compares with other references than the last comparable scan.
    """

    v: Visits
    c: Comparisons
    limits: Table
    against: Previous | None = None

    @property
    def reference(self) -> Previous:
        """What each scan is compared with."""
        return self.against if self.against is not None else self.c.cst

    @cached_property
    def classes(self) -> Ints:
        """Class codes: the four classes, then "assumed"; -1 where nothing can be said."""
        assumed = np.where(self.v.scanner_assumed == 1, CLASSES.index("assumed"), -1)
        return np.where(self.v.oct_class < 0, assumed, self.v.oct_class)

    @cached_property
    def permille(self) -> Ints:
        """Percentage limit in per mille; MISSING where the set leaves the class open."""
        return by_class(self.limits, "permille", self.classes, MISSING)

    @cached_property
    def um(self) -> Ints:
        """The µm that must be exceeded, -1 where only the percentage counts."""
        return by_class(self.limits, "um", self.classes, -1)

    @cached_property
    def before(self) -> Ints:
        """The reference thickness; MISSING where there is none."""
        return np.where(self.reference.found, self.v.cst_um[self.reference.ref], MISSING)

    @cached_property
    def change(self) -> Ints:
        """µm since the reference; 0 where it can't be told."""
        both = self.c.cst_given & self.reference.found
        return np.where(both, self.v.cst_um - self.before, 0)

    @cached_property
    def applies(self) -> Bools:
        """Followed eyes, at kinds where a scan is expected or where one was made."""
        return self.c.followed & (self.c.cst_given | self.c.measured_kind)

    @cached_property
    def judgeable(self) -> Bools:
        """Measured, with a known class that has a limit and something to compare with."""
        has_limit = (self.classes >= 0) & (self.permille != MISSING)
        return np.asarray(self.c.cst_given & has_limit & self.reference.found)

    @cached_property
    def percent_met(self) -> Bools:
        """At or above the percentage, in whole numbers so that exactly 10 % counts."""
        reached = (
            1000 * self.change.astype(np.int64) >= self.permille.astype(np.int64) * self.before
        )
        return np.asarray(self.judgeable & reached)

    @cached_property
    def certain(self) -> Bools:
        """Beyond the percentage and, where the class has one, beyond the µm repeatability."""
        return np.asarray(self.percent_met & ((self.um < 0) | (self.change > self.um)))

    def missing(self, poor: Bools) -> Ints:
        """Return the missing bits of rows that could not be told."""
        out = np.where(~self.c.cst_given, bit("cst_um"), 0)
        given = self.c.cst_given
        no_class = given & ((self.classes < 0) | (self.permille == MISSING))
        return out | self._scan_missing(no_class, poor)

    def missing_without_limit(self, poor: Bools) -> Ints:
        """Return the missing bits for a rule that has limits for one class only."""
        out = np.where(~self.c.cst_given, bit("cst_um"), 0)
        return out | self._scan_missing(self.c.cst_given & (self.classes < 0), poor)

    def _scan_missing(self, no_class: Bools, poor: Bools) -> Ints:
        given = self.c.cst_given
        not_comparable = given & self.reference.not_comparable
        out = np.where(no_class | not_comparable, bit("oct_class"), 0)
        return np.asarray(out | np.where(poor & given, bit("scan_quality"), 0), dtype=np.int64)


def rise(v: Visits, c: Comparisons, limits: Table, against: Previous | None = None) -> Rise:
    """Return the rise of every scan."""
    return Rise(v, c, limits, against)


def class_name(v: Visits, row: int) -> str:
    """Return the class under which the limits of a row stand."""
    code = int(v.oct_class[row])
    unknown = "assumed" if int(v.scanner_assumed[row]) else "class not recorded"
    return words.OCT_CLASSES[code] if code >= 0 else unknown


def limit_words(v: Visits, limits: Table, row: int) -> str:
    """Return the limit of a row's class in words."""
    name = class_name(v, row)
    permille, um = limits.get(f"permille_{name}"), limits.get(f"um_{name}")
    if permille is None:
        return "no limit for this class: a site choice"
    return f"at least {permille / 10:g} %" + (f" and more than {um} µm" if um is not None else "")


def is_poor(v: Visits, row: int) -> bool:
    """Say whether a scan was said to be poor."""
    return int(v.scan_quality[row]) == words.QUALITIES.index("poor")


def provisional(v: Visits, row: int) -> str:
    """Return what a sentence adds on a poor scan: its change is shown, never silenced."""
    return "; provisional, the scan is poor" if is_poor(v, row) else ""


def doubts(v: Visits, judged: Judged, row: int, ref: int) -> list[str]:
    """Return what makes a comparison weaker: poor scan, another scanner, values passed over."""
    found = []
    if is_poor(v, row):
        found.append("the scan is poor: repeat the scan before the patient leaves")
    if ref >= 0 and v.text("scanner", ref) != v.text("scanner", row):
        was, now = (v.text("scanner", one) or "not recorded" for one in (ref, row))
        found.append(f"scanner {was} on {saying.day(v, ref)}, {now} now, of the same class")
    passed = judged.extra.get("skipped")
    over = int(passed[row]) if passed is not None else -1
    if over >= 0:
        found.append(
            f"passed over, not comparable: CST {v.cst_um[over]} µm ({class_name(v, over)}) "
            f"on {saying.day(v, over)}"
        )
    start = int(v.offsets[v.eye[row]])
    if ref < 0 and int(v.breaks[row]) > int(v.breaks[start]):
        found.append("an eye event lies between this scan and earlier ones")
    return found


def noise_words(v: Visits, limits: Table, row: int, ref: int) -> str:
    """Return the class's measurement error beside the change, and whether it is exceeded."""
    name, found = class_name(v, row), ""
    for table in (limits, limits.others.get("thickening")):
        um = table.get(f"um_{name}") if table is not None else None
        permille = table.get(f"permille_{name}") if table is not None else None
        found = found or (f"{um} µm" if um is not None else "")
        found = found or (f"{permille / 10:g} %" if permille is not None else "")
    if not found:
        return "no published repeatability for this class"
    if ref < 0:
        return f"two scans of this class differ by up to {found} by chance"
    change, before = abs(int(v.cst_um[row]) - int(v.cst_um[ref])), int(v.cst_um[ref])
    size, unit = found.split(" ")
    exceeded = change > int(size) if unit == "µm" else 1000 * change > float(size) * 10 * before
    verb = "exceeds that" if exceeded else "doesn't exceed that"
    return f"two scans of this class differ by up to {found} by chance; the change {verb}"


def describe_change(v: Visits, judged: Judged, row: int, limit: str, limits: Table) -> Description:
    """Put one change of thickness into words."""
    ref, now = int(judged.ref[row]), int(v.cst_um[row])
    eye = saying.eye(v, row)
    if now == MISSING:
        return Description(f"{eye}: no CST recorded on {saying.day(v, row)}", limit=limit)
    if ref < 0:
        return Description(
            f"{eye}: CST {now} µm, nothing comparable before it",
            values=saying.values(v, row, ref, "cst_um"),
            limit=limit,
            unknowns=doubts(v, judged, row, ref),
        )
    before = int(v.cst_um[ref])
    change = now - before
    verb = "rose" if change > 0 else "fell" if change < 0 else "did not change"
    size = f" {abs(change)} µm" if change else ""
    percent = saying.percent(change, before)
    sentence = (
        f"{eye}: CST {verb}{size} ({before} to {now}, {percent})"
        f"{saying.since(v, row, ref)}{saying.treatment_gap(v, row)}{provisional(v, row)}"
    )
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "cst_um"),
        arithmetic=[
            f"({now} − {before}) / {before} = {percent}",
            f"{now} − {before} = {change} µm",
        ],
        limit=limit,
        noise=noise_words(v, limits, row, ref),
        unknowns=doubts(v, judged, row, ref),
        options=[
            "repeat the scan before the patient leaves, if the scan is doubtful",
            "weigh the change together with acuity, fluid and the regimen's reading",
            "no change, look again at the next visit",
        ],
        not_for=["scans of two classes or boundaries", "an eye operated on in between"],
        reference_value=before,
    )
