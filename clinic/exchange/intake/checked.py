"""Every cell by the engine's own check: what the tidy file would refuse, intake refuses.

The words of the refusal name the file's row, column and value, not the tidy ones.
"""

from clinic.exchange.intake.mapped import Mapped
from clinic.exchange.intake.refused import RefusedCell
from clinic.exchange.intake.source import Source
from trends.errors import FrameRefused
from trends.visits import Visits


def checked(tidy: Mapped, source: Source, one_scanner: bool) -> Visits | list[RefusedCell]:
    """Return the typed visits, or every refused cell in the file's own terms."""
    import pandas as pd

    frame = pd.DataFrame(tidy.columns, dtype=str)
    try:
        return Visits.from_frame(frame, one_scanner_assumed=one_scanner)
    except FrameRefused as refused:
        headers = {header: place for place, header in enumerate(source.headers)}
        cells = []
        for cell in refused.cells:
            header = tidy.from_header.get(cell.column, cell.column)
            number = tidy.row_numbers[cell.row - 1]
            entered = cell.value
            if header in headers:
                entered = source.cells[tidy.places[cell.row - 1]][headers[header]]
            cells.append(RefusedCell(number, header, entered, cell.allowed, cell.reason))
        return cells
