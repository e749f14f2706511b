"""The invented clinic's staff: one person of each role, members of both sites but the reader."""

from dataclasses import dataclass


@dataclass(frozen=True)
class StaffRow:
    """One invented colleague. The sign-in name is the role, easy to remember for a try-out."""

    username: str
    display_name: str
    roles: tuple[str, ...]
    sites: tuple[str, ...]


STAFF = (
    StaffRow("recorder", "Ines Calloway", ("recorder",), ("harbour", "moorland")),
    StaffRow("clinician", "Tomas Verrill", ("clinician",), ("harbour", "moorland")),
    StaffRow("steward", "Odile Marchbank", ("steward",), ("harbour", "moorland")),
    StaffRow("reader", "Piers Anholt", ("reader",), ("harbour",)),
)
