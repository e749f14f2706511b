"""The server's bench: what start-up imports, and how much memory an idle server holds."""

import os
import re
import signal
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path

from clinic.management.bench.figures import Figure

HEAVY = ("pandas", "plotly", "reportlab", "openpyxl")
START = "import django; django.setup(); import clinic.urls, clinic.wsgi, sys; "
IDLE_GOAL_MB = 150
PATIENCE_S = 30
SERVER_ERROR = 500


def heavy_imports() -> list[str]:
    """Return which heavy packages a fresh process has imported once the app is ready."""
    code = START + f"print(*[name for name in {HEAVY!r} if name in sys.modules])"
    done = subprocess.run(  # noqa: S603 - this same Python, a fixed text
        [sys.executable, "-c", code], capture_output=True, text=True, check=True
    )
    return done.stdout.split()


def free_port() -> int:
    """Return a port of this machine that is free now."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def pss_mb(process: int) -> float:
    """Return the memory of a process and its children, shared pages counted once (Linux)."""
    total = _own_pss_mb(process)
    children = Path(f"/proc/{process}/task/{process}/children").read_text().split()
    return total + sum(pss_mb(int(child)) for child in children)


def _own_pss_mb(process: int) -> float:
    text = Path(f"/proc/{process}/smaps_rollup").read_text()
    found = re.search(r"^Pss:\s+(\d+) kB", text, re.MULTILINE)
    return int(found[1]) / 1024.0 if found else 0.0


def answers(port: int) -> bool:
    """Say whether the server answers at all."""
    try:
        urllib.request.urlopen(f"http://127.0.0.1:{port}/", timeout=5).close()  # noqa: S310
    except urllib.error.HTTPError as refused:
        if refused.code >= SERVER_ERROR:
            raise RuntimeError(f"the server answers with error {refused.code}") from refused
        return True
    except OSError:
        return False
    return True


def figures() -> Iterator[Figure]:
    """Measure and yield one figure after the other; memory only where Linux tells it."""
    found = heavy_imports()
    yield Figure(
        f"heavy packages imported at start-up ({' '.join(found) or 'none'})", len(found), "", 0
    )
    if not Path("/proc/self/smaps_rollup").exists():
        return
    port = free_port()
    code = f"from clinic import serving; serving.serve({port})"
    began = time.perf_counter()
    server = subprocess.Popen(  # noqa: S603 - this same Python, a fixed text
        [sys.executable, "-c", code], env=dict(os.environ), stderr=subprocess.DEVNULL
    )
    try:
        while not answers(port):
            if server.poll() is not None or time.perf_counter() - began > PATIENCE_S:
                raise RuntimeError("the server did not start")
            time.sleep(0.05)
        yield Figure("server answers after its start", time.perf_counter() - began, "s")
        yield Figure("idle server, all its processes", pss_mb(server.pid), "MB", IDLE_GOAL_MB)
    finally:
        server.send_signal(signal.SIGTERM)
        server.wait(timeout=PATIENCE_S)
