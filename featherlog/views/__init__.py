"""What a person is shown: one record for each screen, page and JSON document.

Paper, terminal and JSON are drawn from the same record, so they cannot disagree. Records are plain
frozen data with units in their names; they import no numerical library.
"""
