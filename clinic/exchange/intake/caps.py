"""How large a file of past visits may be. Larger ones are refused before they are unpacked."""

MEGABYTE = 1024 * 1024
FILE_BYTES = 64 * MEGABYTE
UNPACKED_BYTES = 512 * MEGABYTE
# Sheets of numbers pack about 5 to 20 times; a bomb packs a thousand times.
UNPACKED_TIMES = 200
ROWS = 500_000
COLUMNS = 200
CELLS = 10_000_000
CELL_CHARACTERS = 1_000
