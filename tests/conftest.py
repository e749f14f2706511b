"""What every test shares: no test reaches outside, and the append-only triggers are lifted for
teardown only."""

import os
import shutil
import socket
from collections.abc import Iterator
from pathlib import Path

import pytest
from django.db import connections
from django.test import TransactionTestCase

CHROMIUM = "/usr/bin/chromium"
IN_CI = os.environ.get("EBBLINE_CI") == "1"
LOCAL = {"127.0.0.1", "localhost", "::1", ""}


def pytest_configure(config: pytest.Config) -> None:
    """Derandomise hypothesis in CI."""
    from hypothesis import settings

    settings.register_profile("ci", derandomize=True, deadline=None)
    settings.register_profile("local", deadline=None)
    settings.load_profile("ci" if IN_CI else "local")


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Leave out browser tests where there is no Chromium; in CI its absence is an error."""
    if Path(CHROMIUM).exists():
        return
    if IN_CI:
        raise pytest.UsageError(f"{CHROMIUM} is missing; nothing may be left out here.")
    out = [item for item in items if item.get_closest_marker("browser")]
    if out:
        config.hook.pytest_deselected(items=out)
        items[:] = [item for item in items if item not in out]
        print(f"\n{len(out)} browser tests left out: {CHROMIUM} is not installed.")


@pytest.fixture(autouse=True)
def no_outside(monkeypatch: pytest.MonkeyPatch) -> None:
    """Refuse every socket but to this machine."""
    connect = socket.socket.connect

    def guarded(self: socket.socket, address: object) -> None:
        if isinstance(address, tuple) and str(address[0]) not in LOCAL:
            raise OSError(f"a test tried to reach {address!r}")
        connect(self, address)  # type: ignore[arg-type]

    monkeypatch.setattr(socket.socket, "connect", guarded)


@pytest.fixture(autouse=True, scope="session")
def triggers_lifted_for_teardown() -> Iterator[None]:
    """Let the flush after a transactional test empty the append-only tables."""
    from clinic import triggers

    usual = TransactionTestCase._fixture_teardown

    def teardown(self: TransactionTestCase) -> None:
        triggers.remove(connections["default"])
        try:
            usual(self)
        finally:
            triggers.install(connections["default"])

    TransactionTestCase._fixture_teardown = teardown  # type: ignore[method-assign]
    yield
    TransactionTestCase._fixture_teardown = usual  # type: ignore[method-assign]


def pytest_sessionfinish() -> None:
    """Remove the throw-away home."""
    home = os.environ.get("EBBLINE_HOME", "")
    if "ebbline-test-" in home:
        shutil.rmtree(home, ignore_errors=True)
