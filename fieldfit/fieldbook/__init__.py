"""What was recorded: field books of tables, read raw, typed to SI and checked whole.

``read_book`` reads a folder of CSV files or an Excel workbook; ``write_blank`` writes an empty one; ``TABLES``
declares every table and column.
"""

from fieldfit.fieldbook.book import Book, read_book
from fieldfit.fieldbook.tables import TABLES

__all__ = ["TABLES", "Book", "read_book"]
