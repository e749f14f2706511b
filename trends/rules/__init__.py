"""The rules, one file each; a rule is a module with ``INFO``, ``judge`` and ``describe``.

To add one: copy the shape of ``thickening.py``; give it a table in the limit sets with a source for
each number; add its module to ``registry.py`` at its place in the output order; write its cases in
``tests/trends/cases``.
"""
