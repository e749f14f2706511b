"""The only place where rows become a ``Visits`` and verdicts become rows. Imports no pandas.

A ``Loaded`` is many patients' current records as columns, with the visit and eye behind each row.
Withdrawn records are blank. Status, cause and course are those in force on the visit's day.
"""

from clinic.adapters.columns import from_records, load
from clinic.adapters.loaded import UNMEASURED, Loaded, Place, with_assumed
from clinic.adapters.records import AHEAD, BREAKING, MEASURED, TREATED, Records, read

__all__ = [
    "AHEAD",
    "BREAKING",
    "MEASURED",
    "TREATED",
    "UNMEASURED",
    "Loaded",
    "Place",
    "Records",
    "from_records",
    "load",
    "read",
    "with_assumed",
]
