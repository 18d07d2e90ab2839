"""The declarations of all tables, by what they record; `fieldbook/tables.py` has them in their order."""
