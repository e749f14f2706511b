"""Taking in a file of past visits: read, map, check every cell, show each row's fate, store.

``source`` opens CSV and Excel as text; ``mapping`` reads the mapping; ``mapped`` turns source rows
into tidy ones; ``checked`` types every cell by the same rules as the engine's tidy file; ``keys``
remembers which code a source id got; ``plan`` says each row's fate; ``store`` writes all or
nothing; ``account`` writes the refused cells.
"""
