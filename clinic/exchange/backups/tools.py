"""The client tools of PostgreSQL, run against the database in use."""

import os
import shutil
import subprocess
from collections.abc import Sequence
from pathlib import Path

from django.db import connection

from clinic.exchange.backups.digests import refused


def run_tool(name: str, arguments: Sequence[str], database: str = "") -> None:
    """Run a tool of PostgreSQL against the database in use (or another on the same server)."""
    tool = shutil.which(name) or next(
        (str(one) for one in sorted(Path("/usr/lib/postgresql").glob(f"*/bin/{name}"))), None
    )
    if tool is None:
        raise refused(
            "backup", name, "the client tools of PostgreSQL", f"{name} isn't installed", "Install."
        )
    settings = connection.settings_dict
    own = {
        "PGHOST": settings["HOST"],
        "PGPORT": str(settings["PORT"]),
        "PGUSER": settings["USER"],
        "PGPASSWORD": settings["PASSWORD"],
        "PGDATABASE": database or settings["NAME"],
    }
    subprocess.run(  # noqa: S603  our own arguments, no shell
        [tool, *arguments],
        env={**os.environ, **{key: value for key, value in own.items() if value}},
        check=True,
        capture_output=True,
    )
