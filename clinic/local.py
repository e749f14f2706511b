"""Everything local lives in one folder (0700): database, secrets, key files, backups."""

import os
import secrets
import stat
from pathlib import Path
from urllib.parse import unquote, urlsplit

from django.core.exceptions import ImproperlyConfigured

ROOT = Path(__file__).resolve().parent.parent


def home() -> Path:
    """Return the local folder, made with mode 0700; refuse one that others may read."""
    folder = Path(os.environ.get("EBBLINE_HOME") or ROOT / ".ebbline")
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    refuse_open(folder)
    return folder


def refuse_open(path: Path) -> None:
    """Refuse a file or folder that group or others may read."""
    if os.name == "nt":
        return
    mode = stat.S_IMODE(path.stat().st_mode)
    if mode & 0o077:
        raise ImproperlyConfigured(
            f"{path.name} has mode {mode:04o}; others on this machine could read it. "
            f"Allowed: owner only. Run chmod go= on it, then start again."
        )


def secret(name: str, variable: str, *, length: int = 50) -> str:
    """Return a secret from the environment, or from its file (made on the first run, 0600)."""
    given = os.environ.get(variable, "")
    if given:
        if len(given) < length:
            raise ImproperlyConfigured(
                f"{variable} has {len(given)} characters; at least {length} are needed, because a "
                "short secret can be guessed. Leave it unset to have one made."
            )
        return given
    path = home() / name
    if not path.exists():
        # Written under another name first: a process killed midway leaves no half secret.
        half = path.with_suffix(".new")
        handle = os.open(half, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        with os.fdopen(handle, "w") as file:
            file.write(secrets.token_hex(32))
        try:
            os.link(half, path)
        except FileExistsError:
            pass
        half.unlink(missing_ok=True)
    refuse_open(path)
    return path.read_text().strip()


def database() -> dict[str, object]:
    """Return the database settings: SQLite in the local folder, or ``DATABASE_URL``.

    The SQLite options are those under which no write is lost with eight writers at once.
    """
    url = urlsplit(os.environ.get("DATABASE_URL", ""))
    if url.scheme in {"postgres", "postgresql"}:
        return {
            "ENGINE": "django.db.backends.postgresql",
            "NAME": unquote(url.path.lstrip("/")),
            "USER": unquote(url.username or ""),
            "PASSWORD": unquote(url.password or ""),
            "HOST": url.hostname or "",
            "PORT": str(url.port or ""),
            "OPTIONS": {"pool": True},
        }
    if url.scheme not in {"", "sqlite"}:
        raise ImproperlyConfigured(
            f"DATABASE_URL starts with {url.scheme}://; allowed: postgres:// or sqlite:///PATH, "
            "because Ebbline is tested on those two. Unset it to use the local file."
        )
    name = url.path if url.scheme == "sqlite" else str(home() / "ebbline.sqlite3")
    if name:
        # Made here, so that it is the owner's alone from its first byte on.
        os.close(os.open(name, os.O_RDWR | os.O_CREAT, 0o600))
    return {
        "ENGINE": "django.db.backends.sqlite3",
        "NAME": name,
        "OPTIONS": {
            "transaction_mode": "IMMEDIATE",
            "timeout": 20,
            "init_command": (
                "PRAGMA journal_mode=WAL; PRAGMA synchronous=FULL; "
                "PRAGMA temp_store=MEMORY; PRAGMA cache_size=-20000;"
            ),
        },
    }
