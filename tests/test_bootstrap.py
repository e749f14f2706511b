"""The entry point makes its own environment, and says in a clear sentence what stops it."""

import importlib.util
import os
import socket
import subprocess
import sys
from pathlib import Path
from types import ModuleType

import pytest

ROOT = Path(__file__).parent.parent


@pytest.fixture
def entry(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    spec = importlib.util.spec_from_file_location("entry", ROOT / "manage.py")
    assert spec and spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    for kind, name in (("run", "requirements.lock"), ("test", "requirements-test.lock")):
        (tmp_path / name).write_text(f"{kind} lock\n")
        monkeypatch.setitem(module.LOCKS, kind, tmp_path / name)
    monkeypatch.setattr(module, "ROOT", tmp_path)
    monkeypatch.setattr(module, "VENV", tmp_path / ".venv")
    monkeypatch.setattr(module, "STAMP", tmp_path / ".venv" / "stamp")
    monkeypatch.delenv("EBBLINE_OWN_ENV", raising=False)
    monkeypatch.delenv(module.GUARD, raising=False)
    return module


def stamp(entry: ModuleType, text: str) -> None:
    entry.VENV.mkdir(exist_ok=True)
    entry.STAMP.write_text(text + "\n")


def test_the_test_lock_also_serves_for_running(entry: ModuleType) -> None:
    assert not entry.is_ready("run")
    stamp(entry, entry.stamp_for("test"))
    assert entry.is_ready("run") and entry.is_ready("test")


def test_a_run_lock_does_not_serve_for_tests(entry: ModuleType) -> None:
    stamp(entry, entry.stamp_for("run"))
    assert entry.is_ready("run") and not entry.is_ready("test")


def test_a_changed_lock_is_installed_anew(entry: ModuleType) -> None:
    stamp(entry, entry.stamp_for("run"))
    entry.LOCKS["run"].write_text("another lock\n")
    assert not entry.is_ready("run")


def test_a_missing_venv_module_is_told_and_leaves_no_stamp(
    entry: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    failed = subprocess.CompletedProcess([], 1)
    monkeypatch.setattr(entry.subprocess, "run", lambda *a, **k: failed)
    with pytest.raises(SystemExit, match="python3-venv"):
        entry.build("run")
    assert not entry.STAMP.exists() and not (entry.ROOT / ".venv-building").exists()


def test_packages_that_cannot_be_had_are_told(
    entry: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    codes = iter([0, 1])
    answer = lambda *a, **k: subprocess.CompletedProcess([], next(codes))  # noqa: E731
    monkeypatch.setattr(entry.subprocess, "run", answer)
    with pytest.raises(SystemExit, match="package mirror"):
        entry.build("run")
    assert not entry.STAMP.exists()


def test_an_environment_that_does_not_start_itself_is_no_loop(
    entry: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    stamp(entry, entry.stamp_for("run"))
    monkeypatch.setenv(entry.GUARD, "1")
    with pytest.raises(SystemExit, match=r"Delete \.venv"):
        entry.enter_environment("run")


def test_an_own_environment_is_left_alone(
    entry: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("EBBLINE_OWN_ENV", "1")
    entry.enter_environment("run")
    assert not entry.VENV.exists()


def test_a_wrong_python_is_named(entry: ModuleType, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(entry, "LEAST_PYTHON", (99, 0))
    with pytest.raises(SystemExit, match="needs Python 3.11 or newer; this is Python"):
        entry.main()


def demo(home: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    clean = {
        k: v for k, v in os.environ.items() if not k.startswith(("EBBLINE", "DATABASE", "DJANGO"))
    }
    return subprocess.run(
        [sys.executable, "manage.py", "demo", *arguments],
        cwd=ROOT,
        env={**clean, "EBBLINE_HOME": str(home), "EBBLINE_OWN_ENV": "1"},
        capture_output=True,
        text=True,
    )


def test_a_taken_port_is_told_before_anything_is_made(tmp_path: Path) -> None:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        port = taken.getsockname()[1]
        answer = demo(tmp_path / "home", "--port", str(port))
    assert answer.returncode == 1
    assert f"Port {port} on 127.0.0.1 is taken" in answer.stderr
    assert "--port" in answer.stderr
    assert (tmp_path / "home" / "ebbline.sqlite3").stat().st_size == 0


def test_a_second_start_keeps_data_and_new_passwords_are_asked_for(tmp_path: Path) -> None:
    home = tmp_path / "home"
    first = demo(home, "--no-serve")
    assert first.returncode == 0, first.stderr
    for role in ("Recorder", "Clinician", "Steward", "Reader"):
        assert role in first.stdout
    assert home.stat().st_mode & 0o777 == 0o700
    second = demo(home, "--no-serve")
    assert second.returncode == 0 and "Recorder" not in second.stdout
    third = demo(home, "--no-serve", "--new-passwords")
    assert "Recorder" in third.stdout

    def passwords(text: str) -> set[str]:
        return {word for word in text.split() if word.count("-") == 3}

    assert len(passwords(first.stdout)) == 4
    assert not passwords(first.stdout) & passwords(third.stdout)
