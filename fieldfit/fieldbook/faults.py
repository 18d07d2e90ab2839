"""The kinds of fault a field book can have, by name."""

from collections.abc import Mapping
from types import MappingProxyType

from fieldfit.errors import Fault

__all__ = ["FAULTS", "fault"]

FAULTS: Mapping[str, str] = MappingProxyType(
    {
        # the book and its files
        "no such book": "The path leads nowhere.",
        "not a book": "The path is neither a folder nor an .xlsx workbook.",
        "already there": "A blank book is never written over something.",
        "empty book": "No file or sheet is named for a table.",
        "table missing": "There is no members table.",
        "no members": "The members table has no rows.",
        "table twice": "Two files or sheets are named for one table.",
        "unknown table": "A file or sheet is named almost like a table.",
        "cannot be opened": "The system does not let a file be read.",
        "file too large": "A file is larger than any field book should be.",
        "too many files": "The folder holds more files than any field book should.",
        "too many sheets": "The workbook has more sheets than any field book should.",
        "too many cells": "A table has more columns or cells than is read.",
        "broken workbook": "The file is no workbook, or a damaged one.",
        "unsafe workbook": "The workbook is packed, nested or declared in a way that could exhaust the machine.",
        "not text": "A CSV file holds something else than text.",
        "broken quotes": "A quoted cell of a CSV file does not end, or goes on after its quote.",
        # headings
        "no headings": "A table has cells but no row of headings.",
        "unknown column": "A heading is none of its table.",
        "column missing": "A column that every row needs is not there.",
        "column twice": "A column stands twice.",
        "two forms of readings": "Readings are written a row a reading and a column a gauge at once.",
        "value without heading": "A cell has no heading over it.",
        "merged cells": "One cell spans several numbers or columns, so that it is not clear what it is the value of.",
        "unit missing": "A heading over numbers has no unit.",
        "unknown unit": "The text in square brackets is no unit.",
        "unit of another kind": "The unit measures something else than the column holds.",
        "unit of another row": "The unit measures something else than this row is of.",
        "unit not wanted": "A heading over words has a unit.",
        # cells
        "blank cell": "A cell that every row needs is blank.",
        "not a number": "A cell in a column of numbers holds something else.",
        "too large": "A number is larger than a computer can hold.",
        "beyond reason": "A number, in SI units, is above 1e18, or positive as it must be but below 1e-15.",
        "not positive": "A number that can only be positive is not.",
        "out of range": "A number lies outside what its quantity can be.",
        "ambiguous comma": "Nothing in the column tells a decimal comma from one that parts thousands.",
        "mixed decimal marks": "A column has decimal commas and decimal points.",
        "unit in the cell": "A unit stands beside the number instead of in the heading.",
        "date for a number": "A cell in a column of numbers holds a date or a time.",
        "spreadsheet error": "The spreadsheet shows an error value such as #DIV/0!.",
        "formula": "A cell holds a formula without its stored value.",
        "not a time": "A cell holds no date or time, or one that can be read two ways.",
        "not yes or no": "A cell says neither yes nor no.",
        "unknown word": "A cell holds none of the words its column allows.",
        "hidden character": "A text holds a character nobody can see.",
        "too long": "A text is longer than is read.",
        "stated twice": "One row states the same thing in two columns.",
        # names and rows
        "name twice": "Two rows are named alike.",
        "row twice": "A row repeats an earlier one.",
        "star not allowed": "* stands where one member must be named.",
        "unknown member": "No row of the members table has this name.",
        "unknown load case": "The member has no load case of this name.",
        "unknown stage": "The member has no stage of this name.",
        "unknown support": "The member has no support of this name.",
        "unknown gauge": "The member has no gauge of this name.",
        "unknown zone": "The member has no zone of this name.",
        "unknown span": "The member has no span of this name.",
        # members, supports, zones
        "no stiffness": "A member has neither EI nor both E and I.",
        "stiffness at odds": "EI is not E times I.",
        "depth missing": "A temperature difference needs the depth of its member.",
        "stiffness missing": "A spring has no stiffness.",
        "stiffness not wanted": "A support that is no spring has a stiffness.",
        "support holds nothing": "A support neither holds the member up nor restrains its rotation.",
        "same place": "Two supports, or two hinges, stand in one place.",
        "hinge at an end": "A hinge is at an end of the member, where it parts nothing.",
        "zones overlap": "A zone begins before the one to its left has ended.",
        "off the beam": "A station is not on the member.",
        "edges crossed": "A stretch ends where it begins, or before.",
        "taper without start": "A taper has an end but no start.",
        # loads, stages, what is imposed
        "no load": "A row of loads has no load.",
        "several loads": "A row of loads has more than one load.",
        "edge missing": "A spread load has no right edge.",
        "edge not wanted": "A moment has a right edge.",
        "stage without load": "A load stage has no load case.",
        "roles at odds": "The rows of one stage give it different roles.",
        "nothing to scale": "A factor or an offset stands without a load case.",
        "ends before start": "A stage ends before it begins.",
        "support missing": "A settlement is of no support.",
        "settlement missing": "A support is named but no settlement.",
        "expansion missing": "A temperature difference has no coefficient of expansion.",
        "nothing imposed": "A row of imposed movements has none.",
        # gauges and readings
        "sense of another kind": "The positive sense is one of another kind of gauge.",
        "distance missing": "A strain gauge has no distance below the neutral axis.",
        "distance not wanted": "A gauge that measures no strain has a distance below the neutral axis.",
        "two uncertainties": "Both u and plus or minus are given.",
        "coefficient alone": "A temperature coefficient stands without its uncertainty, or the other way round.",
        "temperature missing": "A gauge has a temperature coefficient, but its readings no temperature or no zero.",
        "uncertainty missing": "Nothing tells how sure a reading is, nor can the scatter of the others.",
        "no station": "A reading has neither a gauge nor a station.",
        "no value": "A row of readings has no value.",
        "several values": "A row of readings has more than one value.",
        "gauge of another kind": "A reading is not of what its gauge measures.",
        "strain without gauge": "A strain is read by no gauge of the gauges table.",
        "gauge in two places": "One gauge is at two stations.",
        "station on a jump": "What is read jumps at the station it is read at.",
        "channel of several gauges": "A column of a logger's file is that of several gauges.",
        # times
        "no stage": "A reading has neither a stage nor a time.",
        "no window": "A reading has a time and no stage, and its member has no stage with a start and an end.",
        "window open": "A stage has a start without an end, or the other way round, and readings have only their time.",
        "windows overlap": "A stage begins before the one before it has ended, and readings have only their time.",
        "times at odds": "Times are written in ways that cannot be compared: with and without date or offset from UTC.",
        "time backwards": "The time of a reading is before that of the reading above it.",
        # unknowns and limits
        "where missing": "An unknown does not say where it is.",
        "where not wanted": "An unknown of the whole member says where it is.",
        "stage missing": "An unknown does not say which stage it belongs to.",
        "expected alone": "An expected value stands without its uncertainty, or the other way round.",
        "expected out of bounds": "The expected value is not between low and high.",
        "value not wanted": "An unknown whose unit is that of its gauge has bounds or an expected value.",
        "bounds crossed": "The lower bound is not below the upper one.",
        "no limit": "A row of limits has no limit.",
    }
)


def fault(
    kind: str,
    table: str,
    expected: str,
    *,
    row: int | None = None,
    column: str | None = None,
    value: str | None = None,
    hint: str | None = None,
) -> Fault:
    """A fault of a declared kind; long values are shortened for the message."""
    shown = value if value is None or len(value) <= 60 else value[:57] + "..."
    return Fault(kind=kind, table=table, expected=expected, row=row, column=column, value=shown, hint=hint)
