"""Unsafe settings refuse to start, each in a fresh process."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent.parent


def start(home: Path, **environment: str) -> subprocess.CompletedProcess[str]:
    home.mkdir(mode=0o700, exist_ok=True)
    clean = {k: v for k, v in os.environ.items() if not k.startswith(("EBBLINE", "DATABASE"))}
    return subprocess.run(
        [sys.executable, "-c", "import clinic.settings as s; print(s.SESSION_COOKIE_SECURE)"],
        cwd=ROOT,
        env={**clean, "EBBLINE_HOME": str(home), **environment},
        capture_output=True,
        text=True,
    )


def test_outside_the_demo_cookies_need_tls(tmp_path: Path) -> None:
    assert start(tmp_path / "home").stdout.strip() == "True"


def test_the_demo_runs_without_tls_on_this_machine_only(tmp_path: Path) -> None:
    assert start(tmp_path / "home", EBBLINE_DEMO="1").stdout.strip() == "False"
    other = start(tmp_path / "home", EBBLINE_DEMO="1", EBBLINE_HOSTS="clinic.example")
    assert other.returncode and "stays on this machine" in other.stderr


@pytest.mark.parametrize("hosts", ["*", ".example", " "])
def test_a_wildcard_or_empty_host_is_refused(tmp_path: Path, hosts: str) -> None:
    answer = start(tmp_path / "home", EBBLINE_HOSTS=hosts)
    assert answer.returncode and "whole host names" in answer.stderr


def test_a_short_secret_is_refused_and_not_printed(tmp_path: Path) -> None:
    answer = start(tmp_path / "home", EBBLINE_SECRET_KEY="hunter2hunter2")
    assert answer.returncode and "at least 50" in answer.stderr
    assert "RuntimeError" not in answer.stderr
    assert "can be guessed" in answer.stderr


def test_secrets_are_made_once_with_mode_0600(tmp_path: Path) -> None:
    home = tmp_path / "home"
    start(home)
    key = (home / "secret.key").read_text()
    assert (home / "secret.key").stat().st_mode & 0o777 == 0o600
    assert (home / "ledger.key").stat().st_mode & 0o777 == 0o600
    start(home)
    assert (home / "secret.key").read_text() == key and len(key) == 64


def test_a_folder_others_can_read_is_refused(tmp_path: Path) -> None:
    home = tmp_path / "home"
    home.mkdir()
    home.chmod(0o755)
    answer = start(home)
    assert answer.returncode and "chmod go=" in answer.stderr


def test_an_unknown_database_is_refused(tmp_path: Path) -> None:
    answer = start(tmp_path / "home", DATABASE_URL="mysql://x/y")
    assert answer.returncode and "mysql://" in answer.stderr


def test_starting_up_imports_no_pandas_plotly_or_reportlab(tmp_path: Path) -> None:
    home = tmp_path / "home"
    home.mkdir(mode=0o700)
    code = (
        "import django, sys; django.setup(); import clinic.urls; "
        "print([n for n in ('pandas', 'plotly', 'reportlab', 'scipy') if n in sys.modules])"
    )
    clean = {k: v for k, v in os.environ.items() if not k.startswith(("EBBLINE", "DATABASE"))}
    answer = subprocess.run(
        [sys.executable, "-c", code],
        cwd=ROOT,
        env={**clean, "EBBLINE_HOME": str(home), "DJANGO_SETTINGS_MODULE": "clinic.settings"},
        capture_output=True,
        text=True,
    )
    assert answer.stdout.strip() == "[]", answer.stderr
