"""How intake says no: to a whole file or mapping, or to single cells."""

from collections.abc import Sequence
from dataclasses import dataclass

from trends.errors import EbblineError


@dataclass(frozen=True)
class RefusedCell:
    """One cell that can't be taken in. ``row`` is the row of the file, the header being row 1."""

    row: int
    column: str
    value: str
    allowed: str
    reason: str

    def sentence(self) -> str:
        """Return the refusal as one line for a terminal."""
        where = f"row {self.row}, column {self.column}"
        return f"{where}: {self.value!r} refused. Allowed: {self.allowed}. {self.reason}"


class IntakeRefused(EbblineError):
    """The file, the mapping or the key file can't be used; nothing was stored."""


class CellsRefused(ValueError):
    """Some cells can't be taken in, so nothing was stored; all of them are listed."""

    def __init__(self, cells: Sequence[RefusedCell]) -> None:
        self.cells = list(cells)
        super().__init__(f"{len(self.cells)} cells refused; nothing was stored.")
