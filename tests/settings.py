"""Settings of the suite: the app's own, with a throw-away home and a fast password hasher."""

import os
import tempfile

_home = tempfile.mkdtemp(prefix="ebbline-test-")
os.environ["EBBLINE_HOME"] = _home
os.environ["EBBLINE_DEMO"] = "1"
os.environ.setdefault("DJANGO_ALLOW_ASYNC_UNSAFE", "true")

from clinic.settings import *  # noqa: E402, F403
from clinic.settings import DATABASES  # noqa: E402

PASSWORD_HASHERS = ["django.contrib.auth.hashers.MD5PasswordHasher"]
ALLOWED_HOSTS = ["127.0.0.1", "localhost", "testserver"]
if DATABASES["default"]["ENGINE"].endswith("sqlite3"):
    # A file, not memory: the browser tests' server thread and WAL behave as in the app.
    DATABASES["default"]["TEST"] = {"NAME": os.path.join(_home, "test.sqlite3")}
