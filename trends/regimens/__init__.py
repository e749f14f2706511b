"""What an eye's own regimen says at each visit, one regimen a file.

To add one: a module with ``INFO`` (a ``RegimenInfo``) and ``judge(v, limits, c, covered)``; its
table in the limit sets under ``regimens``; its place in ``registry.py``; its courses in
``tests/trends/cases``.
"""
