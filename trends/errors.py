"""One base for every refusal: what, the value, the allowed range, why, and what to do."""

from collections.abc import Sequence
from dataclasses import dataclass


class EbblineError(ValueError):
    """Something typed or read can't be taken. Nothing was stored."""

    def __init__(self, what: str, value: object, allowed: str, why: str, todo: str) -> None:
        self.what, self.value, self.allowed = what, value, allowed
        self.why, self.todo = why, todo
        super().__init__(f"{what}: {value!r} was given; allowed: {allowed}. {why} {todo}")


class LimitSetRefused(EbblineError):
    """A limit set's text can't be read as one."""


@dataclass(frozen=True)
class RefusedCell:
    """One cell that can't be taken; ``row`` counts from 1 for the first row of data."""

    row: int
    column: str
    value: str
    allowed: str
    reason: str

    def __str__(self) -> str:
        shown = self.value if self.value else "(blank)"
        return (
            f"row {self.row}, column {self.column}: {shown!r}; "
            f"allowed: {self.allowed}; {self.reason}"
        )


class FrameRefused(EbblineError):
    """A table of visits can't be taken; ``cells`` names every refused cell."""

    def __init__(self, cells: Sequence[RefusedCell]) -> None:
        self.cells = tuple(cells)
        super().__init__(
            "table of visits",
            f"{len(self.cells)} refused cell(s)",
            "see each cell",
            "; ".join(str(cell) for cell in self.cells[:5]),
            "Correct the cells and read the file again; nothing was taken.",
        )
