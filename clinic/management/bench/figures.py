"""One measured figure, its goal, and how the two are printed."""

import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Figure:
    """A measured number with its unit; ``goal`` is the most allowed (``at_least``: the least)."""

    what: str
    number: float
    unit: str
    goal: float | None = None
    at_least: bool = False

    def met(self) -> bool | None:
        """Say whether the goal is met; None when there is none."""
        if self.goal is None:
            return None
        return self.number >= self.goal if self.at_least else self.number <= self.goal

    def line(self) -> str:
        """Return the figure as one line."""
        text = f"{self.what:<62} {shown(self.number):>10} {self.unit:<8}"
        if self.goal is None:
            return text.rstrip()
        sign = ">=" if self.at_least else "<="
        verdict = "met" if self.met() else "NOT MET"
        share = f" ({self.number / self.goal:.2f} of it)" if self.goal else ""
        return f"{text} goal {sign} {shown(self.goal)} {self.unit}".rstrip() + f"{share}: {verdict}"


def shown(number: float) -> str:
    """Return a number with about three digits."""
    return f"{number:,.0f}" if abs(number) >= 100 else f"{number:.3g}"


def seconds(work: Callable[[], object]) -> float:
    """Return how long one run takes, in seconds."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def median_ms(work: Callable[[], object], times: int = 15, warm: int = 3) -> float:
    """Return the median of several warm runs, in milliseconds."""
    for _ in range(warm):
        work()
    return 1000.0 * statistics.median(seconds(work) for _ in range(times))


def peak_mb() -> float:
    """Return the most memory this process has held so far, in MB (Linux counts in kB)."""
    import resource
    import sys

    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return peak / (1024.0 * 1024.0) if sys.platform == "darwin" else peak / 1024.0
