"""Serving the demo on this machine: one worker, a few threads, loopback only."""

import socket
from typing import Any

HOST = "127.0.0.1"


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
    """Serve until stopped."""
    from django.core.wsgi import get_wsgi_application
    from gunicorn.app.base import BaseApplication

    class Local(BaseApplication):  # type: ignore[misc]
        """Gunicorn, configured here instead of by a file."""

        def load_config(self) -> None:
            """Set a single small worker; the database allows one writer at a time anyway."""
            options: dict[str, Any] = {
                "bind": f"{HOST}:{port}",
                "workers": 1,
                "threads": 4,
                "loglevel": "warning",
                "control_socket_disable": True,
            }
            for name, setting in options.items():
                if name in self.cfg.settings:
                    self.cfg.set(name, setting)

        def load(self) -> Any:
            """Return the application."""
            return get_wsgi_application()

    Local().run()
