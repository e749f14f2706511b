"""Intake's bench: a file of 40,000 rows from reading to stored, and how long others had to wait."""

import csv
import datetime as dt
import random
import tempfile
import time
from collections.abc import Iterator
from contextlib import AbstractContextManager
from pathlib import Path
from types import TracebackType

from django.db import connection
from django.utils import timezone

from clinic.exchange.intake.mapping import mapping_from
from clinic.exchange.intake.plan import plan_intake
from clinic.exchange.intake.source import read_source
from clinic.exchange.intake.take_in import take_in
from clinic.management.bench.figures import Figure, peak_mb
from clinic.models import Site, User

ROWS, EACH = 40_000, 20
MAPPING = """
[columns]
person = "id"
eye = "eye"
date = "date"
cst_um = "cst"
acuity = "letters"
iop_mmhg = "iop"
agent = "agent"
regimen = "regimen"
[constants]
oct_class = "SD-BM"
acuity_notation = "etdrs_letters"
acuity_chart = "etdrs"
iop_method = "applanation"
cause = "diabetic"
sex = "f"
"""


class LockWatch(AbstractContextManager["LockWatch"]):
    """Measures how long the write lock is held: from the first write statement to the commit."""

    def __init__(self) -> None:
        self.since: float | None = None
        self.longest = 0.0

    def __enter__(self) -> "LockWatch":
        self.wrapper = connection.execute_wrapper(self.watch)
        self.wrapper.__enter__()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.done()
        self.wrapper.__exit__(kind, error, trace)

    def watch(self, execute, sql, params, many, context):  # type: ignore[no-untyped-def]
        """Note when a transaction is open."""
        if connection.in_atomic_block and self.since is None:
            self.since = time.perf_counter()
        elif not connection.in_atomic_block:
            self.done()
        return execute(sql, params, many, context)

    def done(self) -> None:
        """Close the running stretch."""
        if self.since is not None:
            self.longest = max(self.longest, time.perf_counter() - self.since)
        self.since = None


def write_file(path: Path) -> None:
    """Write an invented file of ``ROWS`` rows, two eyes a person."""
    draw = random.Random(3)  # noqa: S311 - invented values
    with path.open("w", newline="") as out:
        rows = csv.writer(out)
        rows.writerow(["id", "eye", "date", "cst", "letters", "iop", "agent", "regimen"])
        for number in range(ROWS):
            eye, visit = divmod(number, EACH)
            day = dt.date(2021, 1, 4) + dt.timedelta(days=29 * visit + eye % 7)
            values = [draw.randint(240, 480), draw.randint(40, 85), draw.randint(10, 21)]
            agent = draw.choice(["aflibercept", "ranibizumab", "none"])
            side = "RL"[eye % 2]
            rows.writerow([f"B{eye // 2:05}", side, day, *values, agent, "treat_and_extend"])


def figures() -> Iterator[Figure]:
    """Measure and yield one figure after the other, in a database of its own."""
    site = Site.objects.create(slug="intake", label="Bench", emergency_text="Bench")
    by = User.objects.create_user("intake")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "visits.csv"
        write_file(path)
        began = time.perf_counter()
        source = read_source(path)
        plan = plan_intake(
            source, mapping_from(MAPPING), day_zero=None, known={}, today=timezone.localdate()
        )
        checked = time.perf_counter() - began
        with LockWatch() as lock:
            take_in(
                plan,
                site=site,
                keys={},
                key_path=Path(folder) / "keys.csv",
                label="bench",
                by=by,
                at=timezone.now(),
                today=timezone.localdate(),
            )
        whole = time.perf_counter() - began
    yield Figure(f"intake of {ROWS:,} rows: read and check", checked, "s")
    yield Figure(f"intake of {ROWS:,} rows, whole", whole, "s", 60)
    yield Figure("its write lock", lock.longest, "s", 5)
    yield Figure("most memory of the process", peak_mb(), "MB", 1000)
