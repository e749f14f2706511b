"""Serving the demo on this machine: one worker, a few threads, loopback only."""

import os
import socket
import sys

from clinic.local import ROOT

HOST = "127.0.0.1"
# One small worker: the database allows one writer at a time anyway.
OPTIONS = ("--workers", "1", "--threads", "4", "--log-level", "warning", "--no-control-socket")


def port_is_free(port: int) -> bool:
    """Say whether this machine's loopback port can be taken."""
    with socket.socket(socket.AF_INET, socket.SOCK_STREAM) as probe:
        probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            probe.bind((HOST, port))
        except OSError:
            return False
    return True


def serve(port: int) -> None:
    """Become the server; what loading the demo left in memory is gone with this process."""
    server = [sys.executable, "-m", "gunicorn", "clinic.wsgi:application"]
    where = ["--bind", f"{HOST}:{port}", "--chdir", str(ROOT)]
    os.execv(sys.executable, [*server, *where, *OPTIONS])  # noqa: S606
