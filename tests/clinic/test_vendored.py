"""What is vendored is what its account says, and fits the library of the lock."""

import hashlib
import re
from pathlib import Path

from plotly.offline import get_plotlyjs_version

VENDOR = Path(__file__).parents[2] / "clinic" / "static" / "vendor"


def test_the_chart_bundle_is_the_version_the_python_package_is_made_for() -> None:
    (bundle,) = VENDOR.glob("plotly-basic-*.min.js")
    assert bundle.name == f"plotly-basic-{get_plotlyjs_version()}.min.js"
    assert f"v{get_plotlyjs_version()}" in bundle.read_text(encoding="utf-8")[:200]


def test_every_vendored_script_has_its_digest_and_its_licence() -> None:
    account = (VENDOR / "VENDOR.txt").read_text()
    scripts = list(VENDOR.glob("*.js"))
    assert scripts
    for script in scripts:
        assert script.name in account
        assert hashlib.sha256(script.read_bytes()).hexdigest() in account
    for licence in re.findall(r"\S+-LICENSE\.txt", account):
        assert (VENDOR / licence).exists()
