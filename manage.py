#!/usr/bin/env python3
"""Ebbline's entry point; makes ``.venv`` from the hash lock and runs itself there.

``python3 manage.py demo`` and ``python3 manage.py test`` work on a machine that has only Python
3.11 and git. Set EBBLINE_OWN_ENV=1 to manage the environment yourself.
"""

import contextlib
import hashlib
import os
import subprocess  # noqa: S404 - only ever runs this same Python and its own pip
import sys
import time
from collections.abc import Iterator
from pathlib import Path

ROOT = Path(__file__).resolve().parent
VENV = ROOT / ".venv"
STAMP = VENV / "ebbline-stamp"
LOCKS = {"run": ROOT / "requirements.lock", "test": ROOT / "requirements-test.lock"}
LEAST_PYTHON = (3, 11)
GUARD = "EBBLINE_INSIDE_VENV"


def stamp_for(kind: str) -> str:
    """Return the line that stands in the stamp once the lock of this kind is installed."""
    digest = hashlib.sha256(LOCKS[kind].read_bytes()).hexdigest()
    return f"{kind} {digest} {sys.version_info.major}.{sys.version_info.minor}"


def is_ready(kind: str) -> bool:
    """Say whether ``.venv`` holds this lock; the test lock is a superset of the run lock."""
    if not STAMP.exists():
        return False
    lines = STAMP.read_text().splitlines()
    return stamp_for(kind) in lines or (kind == "run" and stamp_for("test") in lines)


def venv_python() -> Path:
    """Return the environment's own Python."""
    folder = "Scripts" if os.name == "nt" else "bin"
    return VENV / folder / ("python.exe" if os.name == "nt" else "python")


@contextlib.contextmanager
def only_one_builder() -> Iterator[None]:
    """Hold a lock file, so that two starts at once don't build one environment together."""
    lock = ROOT / ".venv-building"
    for _ in range(600):
        try:
            handle = os.open(lock, os.O_CREAT | os.O_EXCL | os.O_WRONLY)
            break
        except FileExistsError:
            # A builder that was killed leaves its file behind; ten minutes is far beyond a build.
            if time.time() - lock.stat().st_mtime > 600:
                lock.unlink(missing_ok=True)
            time.sleep(1)
    else:
        sys.exit(f"Another start is still building .venv. If none is, delete {lock.name}.")
    try:
        yield
    finally:
        os.close(handle)
        lock.unlink(missing_ok=True)


def build(kind: str) -> None:
    """Make ``.venv`` and install the lock, writing the stamp last."""
    with only_one_builder():
        if is_ready(kind):
            return
        print("Preparing .venv (once; it takes about a minute) ...", file=sys.stderr, flush=True)
        STAMP.unlink(missing_ok=True)
        made = subprocess.run([sys.executable, "-m", "venv", str(VENV)], check=False)
        if made.returncode:
            sys.exit(
                "Python could not make a virtual environment: its venv module is missing or "
                "broken. On Debian or Ubuntu install the package python3-venv, then run this again."
            )
        pip = [str(venv_python()), "-m", "pip", "install", "--quiet"]
        pip += ["--disable-pip-version-check", "--require-hashes", "-r", str(LOCKS[kind])]
        if subprocess.run(pip, check=False).returncode:
            sys.exit(
                "The packages could not be installed (see above). Ebbline needs them once from "
                "the internet or from your own package mirror; run this again when it is reachable."
            )
        STAMP.write_text(stamp_for(kind) + "\n")


def enter_environment(kind: str) -> None:
    """Run this command inside ``.venv``, making it first if needed."""
    if os.environ.get("EBBLINE_OWN_ENV") == "1":
        return
    if not is_ready(kind):
        build(kind)
    # Compared by prefix: a venv's python is a link to the system's, so paths would mislead.
    if Path(sys.prefix).resolve() == VENV.resolve():
        return
    if os.environ.get(GUARD) == "1":
        sys.exit("Ebbline's .venv does not start its own Python. Delete .venv and run this again.")
    os.environ[GUARD] = "1"
    python = str(venv_python())
    os.execv(python, [python, str(ROOT / "manage.py"), *sys.argv[1:]])  # noqa: S606


def run_tests(arguments: list[str]) -> int:
    """Run pytest with the given arguments; caught before Django loads."""
    os.chdir(ROOT)
    try:
        import pytest
    except ModuleNotFoundError:
        print("pytest is missing: install requirements-test.lock first.", file=sys.stderr)
        return 2
    return int(pytest.main(arguments))


def main() -> None:
    """Check the Python, enter the environment, then hand over to pytest or Django."""
    if sys.version_info < LEAST_PYTHON:
        have = ".".join(str(part) for part in sys.version_info[:3])
        sys.exit(f"Ebbline needs Python 3.11 or newer; this is Python {have} ({sys.executable}).")
    command = sys.argv[1] if len(sys.argv) > 1 else ""
    enter_environment("test" if command == "test" else "run")
    if command == "test":
        sys.exit(run_tests(sys.argv[2:]))
    if command == "demo":
        os.environ.setdefault("EBBLINE_DEMO", "1")
    os.environ.setdefault("DJANGO_SETTINGS_MODULE", "clinic.settings")
    try:
        from django.core.management import execute_from_command_line
    except ModuleNotFoundError:
        sys.exit("Django is missing: install requirements.lock, or unset EBBLINE_OWN_ENV.")
    execute_from_command_line(sys.argv)


if __name__ == "__main__":
    main()
