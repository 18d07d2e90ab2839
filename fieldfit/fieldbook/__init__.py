"""What was recorded: field books of tables, read raw, typed to SI and checked whole.

``read_book`` reads a folder of CSV files or an Excel workbook; ``write_blank`` writes an empty one; ``TABLES``
declares every table and column; ``display`` brings an SI value back to the book's own unit; ``places_of``,
``numbered``, ``alike`` and ``first_rows`` tell rows that are alike.
"""

from fieldfit.fieldbook.blank import write_blank
from fieldfit.fieldbook.book import Book, read_book
from fieldfit.fieldbook.pairs import alike, first_rows, numbered, places_of
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.units import display

__all__ = ["TABLES", "Book", "alike", "display", "first_rows", "numbered", "places_of", "read_book", "write_blank"]
