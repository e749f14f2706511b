"""The same question asked the plain way: one eye after the other, one visit after the other.

Only a yardstick for the engine's speed; what counts is ``trends.rules.thickening``.
"""

from trends.limits import Table
from trends.visits import MISSING, Visits


def thickening_by_loop(v: Visits, limits: Table, eyes: int) -> int:
    """Return how many visits of the first ``eyes`` eyes are thicker than the scan before."""
    permille, least_um = limits.number("permille_SD-BM"), limits.number("um_SD-BM")
    cst, quality = v.cst_um.tolist(), v.scan_quality.tolist()
    starts = v.offsets.tolist()
    raised = 0
    for eye in range(eyes):
        reference = None
        for row in range(starts[eye], starts[eye + 1]):
            if cst[row] == MISSING:
                continue
            if reference is not None:
                rise = cst[row] - reference
                raised += 1000 * rise >= permille * reference and rise > least_um
            if quality[row] != 0:
                reference = cst[row]
    return raised
