"""What every page is given without asking: the notice, the version, the idle time."""

from typing import Any

from django.conf import settings
from django.http import HttpRequest

import clinic
from clinic.notice import NOTICE


def page(request: HttpRequest) -> dict[str, Any]:
    """Return the context every template may use."""
    return {
        "NOTICE": NOTICE,
        "VERSION": clinic.__version__,
        "DEMO": settings.DEMO,
        "IDLE_SECONDS": settings.IDLE_SECONDS,
        "IDLE_WARN_SECONDS": settings.IDLE_WARN_SECONDS,
    }
