"""The key file: which code a source id got. It links codes to people, so it stays outside.

Mode 0600, never in the database, written whole under another name first. Without it the next file
of the same people would enrol them a second time.
"""

import csv
import os
from pathlib import Path

from clinic.exchange.intake.refused import IntakeRefused

HEADER = ["source_id", "code"]


def read_keys(path: Path) -> dict[str, str]:
    """Return source id to code; refuse a file others may read or that holds anything else."""
    mode = path.stat().st_mode & 0o777
    if os.name != "nt" and mode & 0o077:
        raise IntakeRefused(
            "key file",
            f"mode {mode:04o}",
            "owner only (0600)",
            "Others on this machine could read who is who.",
            "Run chmod go= on it.",
        )
    keys: dict[str, str] = {}
    with path.open(encoding="utf-8", newline="") as lines:
        reader = csv.reader(lines)
        if next(reader, None) != HEADER:
            raise IntakeRefused(
                "key file", path.name, "columns " + ", ".join(HEADER), "", "Choose the right file."
            )
        for row in reader:
            if len(row) != 2 or row[0] in keys:
                raise IntakeRefused(
                    "key file",
                    f"line {reader.line_num}",
                    "one id and one code, each id once",
                    "Which code belongs to the id would be a guess.",
                    "Restore the file from a copy.",
                )
            keys[row[0]] = row[1]
    return keys


def half_name(path: Path) -> Path:
    """Return the name a key file has until it is put in its place."""
    return path.with_name(path.name + ".new")


def prepare_keys(path: Path, keys: dict[str, str]) -> None:
    """Write the new key file under another name (0600, flushed to disk).

    It is put in place by ``settle_keys`` after the database has taken the visits: if the machine
    stops in between, the codes are still on disk.
    """
    half = half_name(path)
    path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    half.unlink(missing_ok=True)
    handle = os.open(half, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
    with os.fdopen(handle, "w", encoding="utf-8", newline="") as lines:
        writer = csv.writer(lines)
        writer.writerow(HEADER)
        writer.writerows(sorted(keys.items()))
        lines.flush()
        os.fsync(lines.fileno())


def settle_keys(path: Path) -> None:
    """Put the prepared key file in its place."""
    os.replace(half_name(path), path)
