"""Shape families: one module each, and one row in the table of `table.py`."""
