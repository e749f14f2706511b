"""An acuity as typed becomes the acuity columns of a measured record."""

from typing import Any

from trends.measures import acuity


def acuity_columns(text: str, notation: str, chart: str, correction: str) -> dict[str, Any]:
    """Return the columns; letters and logMAR (1/10,000) stay empty off the chart.

    Raises ``acuity.AcuityRefused`` when the text can't be read in its notation.
    """
    if not text:
        return {}
    read = acuity.checked(notation, text, chart)
    return {
        "acuity": read.text,
        "acuity_notation": notation,
        "acuity_chart": chart,
        "acuity_correction": correction,
        "acuity_distance": read.distance,
        "letters": read.letters,
        "logmar_e4": read.logmar_e4,
    }
