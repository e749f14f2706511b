"""The engine on the command line: ``python -m trends``."""

import argparse
import datetime as dt
import os
import sys
from collections.abc import Iterator, Sequence
from pathlib import Path

from trends import ENGINE_VERSION, cells, limits, sources, summary, tidy
from trends.citations import citation
from trends.errors import EbblineError, FrameRefused
from trends.notice import NOTICE
from trends.printed import WIDTH, sourced
from trends.review import review
from trends.reviewable import verdict_file
from trends.visits import Visits, day_date
from trends.wording import VerdictRow, verdict_rows

REFUSED = 2
SHOWN_CELLS = 50
ROWS_AT_ONCE = 1000


def iso_date(text: str) -> dt.date:
    """Return an ISO date; argparse shows the sentence when it isn't one."""
    try:
        return day_date(cells.day(text))
    except EbblineError as error:
        raise argparse.ArgumentTypeError(
            f"{text!r} is no date; allowed: a date such as 2026-03-04"
        ) from error


def parser() -> argparse.ArgumentParser:
    """Return the command's parser."""
    top = argparse.ArgumentParser(
        prog="python -m trends",
        description="Run Ebbline's rules on a tidy file of visits. " + NOTICE,
    )
    top.add_argument("--version", action="version", version=ENGINE_VERSION)
    commands = top.add_subparsers(dest="command", required=True)
    one = commands.add_parser(
        "review",
        help="judge every visit of VISITS.csv",
        description="Read a tidy file (one row an eye-visit), run a limit set, write one row a "
        "rule and eye-visit. Exit 2 with row, column, value, allowed range and reason when a cell "
        "can't be taken; nothing is written then.",
    )
    one.add_argument("visits", type=Path, metavar="VISITS.csv")
    one.add_argument("--limit-set", required=True, metavar="NAME", help="a shipped set's name")
    one.add_argument("--as-of", required=True, type=iso_date, metavar="DATE", help="2026-03-04")
    one.add_argument("--out", required=True, type=Path, metavar="VERDICTS.csv")
    one.add_argument(
        "--all-working", action="store_true", help="write the working of every outcome"
    )
    one.add_argument(
        "--one-scanner-per-eye",
        action="store_true",
        help="compare scans without a class within the eye; each working says it was assumed",
    )
    one.add_argument(
        "--summary",
        action="store_true",
        help="print the shares of visits raised by rank and rule, per 30-eye day, and how many "
        "raises of thickness and letters were back within noise at the next visit",
    )
    sets = commands.add_parser("limit-sets", help="list the shipped limit sets with sources")
    sets.add_argument("--brief", action="store_true", help="names and versions only")
    said = commands.add_parser(
        "sources",
        help="print every rule, regimen, limit and formula with its source and a worked example",
        description="Print what each number rests on: the rule in a clinician's words, its limits "
        "with citation, place, population and strength, numbers marked 'from memory, check the "
        "original', and invented examples worked out by the engine now.",
    )
    said.add_argument(
        "--rule", metavar="NAME", help="only this rule, regimen, formula or range; see --names"
    )
    said.add_argument("--names", action="store_true", help="print the names only")
    said.add_argument(
        "--verdicts",
        type=Path,
        metavar="FILE",
        help="write the rendered verdicts of every example to FILE instead",
    )
    return top


def run_sources(options: argparse.Namespace) -> int:
    """Print sources, their names, or write the file of rendered verdicts; returns the exit code."""
    known = sources.by_name()
    if options.rule is not None and options.rule not in known:
        print(f"--rule {options.rule}: allowed: {', '.join(known)}", file=sys.stderr)
        return REFUSED
    if options.verdicts is not None:
        try:
            options.verdicts.write_text(verdict_file(), encoding="utf-8")
        except OSError as error:
            print(f"{options.verdicts} can't be written: {error}", file=sys.stderr)
            return REFUSED
        print(f"rendered verdicts written to {options.verdicts}")
        return 0
    try:
        for one in [known[options.rule]] if options.rule else known.values():
            print(one.name if options.names else "\n".join(sourced(one)) + "\n" + "-" * WIDTH)
        sys.stdout.flush()
    except BrokenPipeError:
        # A reader such as a pager was closed early; Python would complain once more at its end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return 0


def worded(
    visits: Visits, chosen: limits.LimitSet, options: argparse.Namespace
) -> Iterator[VerdictRow]:
    """Yield every verdict in words, person by person, so that a large file needs little memory."""
    for part in visits.by_persons(ROWS_AT_ONCE):
        yield from verdict_rows(
            review(part, chosen, options.as_of), all_working=options.all_working
        )


def run_review(options: argparse.Namespace) -> int:
    """Judge a file; returns the exit code."""
    if options.out.resolve() == options.visits.resolve():
        print(
            f"--out {options.out}: verdicts can't replace the visits they rest on", file=sys.stderr
        )
        return REFUSED
    try:
        chosen = limits.shipped(options.limit_set)
        visits = tidy.read(
            options.visits, options.as_of, one_scanner_assumed=options.one_scanner_per_eye
        )
    except FrameRefused as refused:
        for cell in refused.cells[:SHOWN_CELLS]:
            print(cell, file=sys.stderr)
        more = len(refused.cells) - SHOWN_CELLS
        if more > 0:
            print(f"and {more} more refused cells", file=sys.stderr)
        return REFUSED
    except (EbblineError, OSError) as error:
        print(error, file=sys.stderr)
        return REFUSED
    try:
        count = tidy.write(options.out, worded(visits, chosen, options))
    except OSError as error:
        print(f"{options.out} can't be written: {error}", file=sys.stderr)
        return REFUSED
    print(f"{count} verdicts on {len(visits)} visits written to {options.out}. {NOTICE}")
    if options.summary:
        print(summary.text(review(visits, chosen, options.as_of)))
    return 0


def run_limit_sets(options: argparse.Namespace) -> int:
    """List the shipped sets; returns the exit code."""
    for name in limits.shipped_names():
        chosen = limits.shipped(name)
        print(f"{name}, version {chosen.version}: {chosen.title}; for {', '.join(chosen.causes)}")
        if options.brief:
            continue
        for table, entry_name, entry in chosen.entries():
            mark = " [from memory, check the original]" if entry.memory else ""
            place = f", {entry.place}" if entry.place else ""
            print(f"  {table}.{entry_name} = {entry.value} {entry.unit}{mark}")
            print(f"      {citation(entry.cite).text}{place}")
            if entry.note:
                print(f"      {entry.note}")
    return 0


RUN = {"review": run_review, "limit-sets": run_limit_sets, "sources": run_sources}


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns the exit code."""
    options = parser().parse_args(arguments)
    return RUN[options.command](options)


if __name__ == "__main__":
    sys.exit(main())
