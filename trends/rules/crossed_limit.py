"""The center-involved limit of the class and sex was crossed upward, by more than noise.

Raised at the first scan at or above the limit that exceeds the last comparable scan below it by
more than the class's µm repeatability; then "still above" until a scan below. A first scan already
above can't be told. Source: network limits by class and sex (limit set). Population: diabetic
macular edema only. It would rather miss a crossing within noise. Unknown sex: the men's limit.

Raised: woman, SD-BM (305): 280 then 320. Not: 300 then 310 (10 µm is within noise).
"""

from trends import crossing
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.visits import Visits

INFO = RuleInfo(
    id="crossed_limit",
    version=1,
    title="Center-involved limit crossed upward",
    needs=("cst_um", "oct_class", "cause", "sex"),
    cites=("chalam-2012", "nct01909791"),
    leans="would rather miss a crossing within noise than raise on noise",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; unknown sex counts as the higher (men's) limit."""
    return crossing.judge(v, c, limits, crossing.limit_by_sex(v, limits, unknown="m"))


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    return crossing.describe(v, judged, row, limits, unknown="m")
