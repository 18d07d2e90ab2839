"""A small broken book for every kind of fault: what the reference page shows and the tests read.

``write_broken`` makes a sound little book with the one change that the kind of fault stands for.
"""

import io
import zipfile
from collections.abc import Callable, Mapping
from pathlib import Path
from types import MappingProxyType

import openpyxl

from fieldfit.fieldbook import csv_files, files, workbook

__all__ = ["BROKEN", "write_broken"]

Files = Mapping[str, str | None]  # text by file name, None for a file left out

_MEMBERS = "member,length [m],EI [kN m2]\n"
_SUPPORTS = "member,support,at [m],vertical,rotation\n"
_SPRINGS = "member,support,at [m],vertical,bearing stiffness [kN/mm]\n"
_ZONES = "member,zone,from [m],to [m],EI [kN m2],EI end [kN m2]\n"
_LOADS = "member,load case,from [m],to [m],force [kN],intensity [kN/m],moment [kN m]\n"
_STAGES = "member,stage,load case,factor,role\n"
_TIMES = "member,stage,load case,start,end\n"
_IMPOSED = "member,stage,support,settlement [mm],top minus bottom [K],expansion [1/K]\n"
_GAUGES = "member,gauge,at [m],measures,positive sense,below neutral axis [mm]\n"
_READINGS = "member,stage,gauge,at [m],deflection [mm]\n"
_LEVELS = "member,stage,set-up,sight,point,staff [m],distance [m]\n"
_TIMED = "member,gauge,time,deflection [mm]\n"
_UNKNOWNS = "member,unknown,where,stage,low,high,expected,expected u\n"
_LIMITS = "member,limit,where,at least,at most\n"
_NOTES = "member,length [m],EI [kN m2],note\n"

SOUND: Files = {
    "members.csv": _MEMBERS + "B1,6,20000\n",
    "loads.csv": _LOADS + "B1,P,3,,50,,\n",
    "gauges.csv": _GAUGES + "B1,D,3,deflection,down,\n",
    "readings.csv": _READINGS + "B1,P,D,,8.4\n",
}


def _members(text: str) -> Files:
    return {"members.csv": text}


def _loads(rows: str) -> Files:
    return {"loads.csv": _LOADS + rows}


def _readings(text: str) -> Files:
    return {"readings.csv": text}


def _levels(rows: str, levelling: str = "u [mm]\n0.1\n") -> Files:
    """A level book on the sound one, whose gauge is then a point that is levelled."""
    return {
        "gauges.csv": _GAUGES + "B1,L,3,level,,\n",
        "readings.csv": None,
        "levels.csv": _LEVELS + rows,
        "levelling.csv": levelling,
    }


CHANGES: Mapping[str, Files] = {
    "empty book": dict.fromkeys(SOUND),
    "table missing": {"members.csv": None},
    "no members": _members(_MEMBERS),
    "table twice": {"loads.tsv": "member\tload case\n"},
    "unknown table": {"support.csv": _SUPPORTS},
    "broken quotes": _members(_MEMBERS + 'B1,"6,20000\n'),
    "no headings": {"loads.csv": "50 kN at midspan\n"},
    "unknown column": _members("member,lenght [m],length [m],EI [kN m2]\nB1,6,6,20000\n"),
    "column missing": _members("member,EI [kN m2]\nB1,20000\n"),
    "column twice": _members("member,length [m],length [ft],EI [kN m2]\nB1,6,20,20000\n"),
    "two forms of readings": _readings("member,stage,gauge,D [mm]\nB1,P,D,8.4\n"),
    "value without heading": _members(_MEMBERS + "B1,6,20000,15\n"),
    "unit missing": _members("member,length,EI [kN m2]\nB1,6,20000\n"),
    "unknown unit": _members("member,length [metre],EI [kn m2]\nB1,6,20000\n"),
    "unit of another kind": _members("member,length [kN],EI [kN m2]\nB1,6,20000\n"),
    "unit of another row": {"gauges.csv": "member,gauge,at [m],measures,u [mrad]\nB1,D,3,deflection,0.1\n"},
    "unit not wanted": _members("member [1],length [m],EI [kN m2]\nB1,6,20000\n"),
    "blank cell": _members(_MEMBERS + "B1,n/a,20000\n"),
    "not a number": _members(_MEMBERS + "B1,six,20000\n"),
    "too large": _members(_MEMBERS + "B1,6,1e999\n"),
    "beyond reason": _members(_MEMBERS + "B1,6,2e-154\n"),
    "not positive": _members(_MEMBERS + "B1,6,-20000\n"),
    "out of range": {"unknowns.csv": _UNKNOWNS + "B1,rotational restraint,A,,,1.2,,\n"},
    "ambiguous comma": _members(_MEMBERS + 'B1,6,"20,000"\n'),
    "mixed decimal marks": _members(_MEMBERS + 'B1,"6,5",20000\nB2,7.25,20000\n'),
    "unit in the cell": _members(_MEMBERS + "B1,6 m,20000\n"),
    "date for a number": _members(_MEMBERS + "B1,2024-06-01,20000\n"),
    "spreadsheet error": _members(_MEMBERS + "B1,6,#DIV/0!\n"),
    "formula": _members(_MEMBERS + "B1,=2*3,20000\n"),
    "not a time": {"stages.csv": _TIMES + "B1,P,P,03/04/2024,\n"},
    "not yes or no": _readings("member,stage,gauge,deflection [mm],use\nB1,P,D,8.4,maybe\n"),
    "unknown word": {"supports.csv": _SUPPORTS + "B1,A,0,rigd,free\nB1,B,6,rigid,free\n"},
    "hidden character": _members(_NOTES + "B1,6,20000,left\N{ZERO WIDTH SPACE}girder\n"),
    "too long": _members(_MEMBERS + "B" * 101 + ",6,20000\n"),
    "stated twice": {"gauges.csv": "member,gauge,at [m],u [mm],u [in]\nB1,D,3,0.1,0.004\n"},
    "name twice": _members(_MEMBERS + "B1,6,20000\nB1,7,20000\n"),
    "row twice": _readings(_READINGS + "B1,P,D,,8.4\nB1,P,D,,8.4\n"),
    "star not allowed": _readings(_READINGS + "*,P,D,,8.4\n"),
    "unknown member": _loads("B1,P,3,,50,,\nB7,P,3,,50,,\n"),
    "unknown load case": {"stages.csv": _STAGES + "B1,P,Q,1,\n"},
    "unknown stage": _readings(_READINGS + "B1,full load,D,,8.4\n"),
    "unknown support": {"imposed.csv": _IMPOSED + "B1,P,C,2,,\n"},
    "unknown gauge": _readings(_READINGS + "B1,P,D1,,8.4\n"),
    "unknown zone": {"unknowns.csv": _UNKNOWNS + "B1,EI,middle,,,,,\n"},
    "unknown span": {"limits.csv": _LIMITS + "B1,deflection,2,,20\n"},
    "no stiffness": _members("member,length [m],E [GPa],I [cm4]\nB1,6,200,\n"),
    "length at odds": {
        "members.csv": "member,length [mm],EI [kN m2]\nB1,6,20000\n",
        "gauges.csv": _GAUGES + "B1,C,1.5,deflection,down,\nB1,D,3,deflection,down,\n",
    },
    "stiffness at odds": _members("member,length [m],EI [kN m2],E [GPa],I [cm4]\nB1,6,20000,200,5000\n"),
    "depth missing": {"imposed.csv": _IMPOSED + "B1,P,,,10,0.000012\n"},
    "stiffness missing": {"supports.csv": _SPRINGS + "B1,A,0,spring,\nB1,B,6,rigid,\n"},
    "stiffness not wanted": {"supports.csv": _SPRINGS + "B1,A,0,rigid,50\nB1,B,6,rigid,\n"},
    "support holds nothing": {"supports.csv": _SUPPORTS + "B1,A,0,none,free\nB1,B,6,rigid,fixed\n"},
    "same place": {"supports.csv": _SUPPORTS + "B1,A,0,rigid,free\nB1,B,0,rigid,free\n"},
    "hinge at an end": {"hinges.csv": "member,at [m]\nB1,6\n"},
    "zones overlap": {"zones.csv": _ZONES + "B1,left,0,3,,\nB1,right,2.5,6,,\n"},
    "off the beam": _readings(_READINGS + "B1,P,,6.5,8.4\n"),
    "edges crossed": _loads("B1,P,4,2,,5,\n"),
    "taper without start": {"zones.csv": _ZONES + "B1,left,0,3,,15000\n"},
    "no load": _loads("B1,P,3,,,,\n"),
    "several loads": _loads("B1,P,3,,50,,10\n"),
    "edge missing": _loads("B1,P,3,,,5,\n"),
    "edge not wanted": _loads("B1,P,3,4,,,10\n"),
    "stage without load": {"stages.csv": _STAGES + "B1,P,,,load\n"},
    "roles at odds": {"stages.csv": _STAGES + "B1,P,P,1,load\nB1,P,P,0.5,hold\n"},
    "cycles at odds": {"stages.csv": "member,stage,load case,cycle\nB1,P,P,1\nB1,P,P,2\n"},
    "nothing to scale": {"stages.csv": _STAGES + "B1,P,,0.5,zero\n"},
    "ends before start": {"stages.csv": _TIMES + "B1,P,P,2024-05-14T11:00,2024-05-14T10:30\n"},
    "support missing": {"imposed.csv": _IMPOSED + "B1,P,,2,,\n"},
    "settlement missing": {"imposed.csv": _IMPOSED + "B1,P,B,,,\n"},
    "expansion missing": {
        "members.csv": "member,length [m],EI [kN m2],depth [mm]\nB1,6,20000,400\n",
        "imposed.csv": _IMPOSED + "B1,P,,,10,\n",
    },
    "difference missing": {
        "imposed.csv": "member,stage,settlement [mm],support,top minus bottom [K],top minus bottom u [K]\nB1,P,2,B,,1\n"
    },
    "two curvatures": {
        "members.csv": "member,length [m],EI [kN m2],depth [mm]\nB1,6,20000,400\n",
        "imposed.csv": "member,stage,curvature [1/km],top minus bottom [K],expansion [1/K]\nB1,P,0.2,10,0.00001\n",
    },
    "nothing imposed": {"imposed.csv": _IMPOSED + "B1,P,,,,\n"},
    "sense of another kind": {"gauges.csv": _GAUGES + "B1,D,3,deflection,sagging,\n"},
    "distance missing": {"gauges.csv": _GAUGES + "B1,D,3,deflection,,\nB1,S,2,strain,,\n"},
    "distance not wanted": {"gauges.csv": _GAUGES + "B1,D,3,deflection,,200\n"},
    "two uncertainties": {"gauges.csv": "member,gauge,at [m],u [mm],plus or minus [mm]\nB1,D,3,0.1,0.2\n"},
    "no station": _readings(_READINGS + "B1,P,,,8.4\n"),
    "no value": _readings(_READINGS + "B1,P,D,,\n"),
    "several values": _readings("member,stage,at [m],deflection [mm],level [m]\nB1,P,3,8.4,99.2\n"),
    "gauge of another kind": _readings("member,stage,gauge,rotation [mrad]\nB1,P,D,2.1\n"),
    "strain without gauge": _readings("member,stage,at [m],strain [microstrain]\nB1,P,3,210\n"),
    "gauge in two places": _readings(_READINGS + "B1,P,D,2,8.4\n"),
    "backsight missing": _levels("B1,P,1,intermediate,L,1.6,20\n,P,1,foresight,BM,1.2,20\n"),
    "two backsights": _levels(",P,1,backsight,BM,1.2,20\n,P,1,backsight,TP,1.1,20\nB1,P,1,intermediate,L,1.6,20\n"),
    "sighted twice": _levels(
        ",P,1,backsight,BM,1.2,20\nB1,P,1,intermediate,L,1.601,20\nB1,P,1,intermediate,L,1.613,20\n"
    ),
    "length of sight missing": _levels(",P,1,backsight,BM,1.2,20\nB1,P,1,foresight,L,1.6,\n", "u per km [mm]\n0.3\n"),
    "not connected": _levels(",P,1,backsight,BM,1.2,20\n,P,1,foresight,TP,1.4,20\nB1,P,2,backsight,L,1.6,20\n"),
    "channel of several gauges": {
        "members.csv": _MEMBERS + "B1,6,20000\nB2,6,20000\n",
        "stages.csv": _TIMES + "*,P,P,2024-05-14T10:00,2024-05-14T11:00\n",
        **_loads("*,P,3,,50,,\n"),
        "gauges.csv": "member,gauge,at [m]\n*,D,3\n",
        **_readings("time,D [mm]\n2024-05-14T10:30,8.4\n"),
    },
    "no stage": _readings(_READINGS + "B1,,D,,8.4\n"),
    "no window": _readings(_TIMED + "B1,D,2024-05-14T10:30,8.4\n"),
    "reset without log": {
        "gauges.csv": "member,gauge,at [m]\nB1,D,3\n",
        "resets.csv": "member,gauge,time\nB1,D,2024-05-14T10:30\n",
        **_readings(_READINGS + "B1,P,D,,8.4\n"),
    },
    "window open": {
        "stages.csv": _TIMES + "B1,P,P,2024-05-14T10:00,2024-05-14T11:00\nB1,Q,P,2024-05-14T11:00,\n",
        **_readings(_TIMED + "B1,D,2024-05-14T10:30,8.4\n"),
    },
    "windows overlap": {
        "stages.csv": _TIMES + "B1,P,P,2024-05-14T10:00,2024-05-14T11:00\nB1,Q,P,2024-05-14T10:50,2024-05-14T11:30\n",
        **_readings(_TIMED + "B1,D,2024-05-14T10:30,8.4\n"),
    },
    "times at odds": {
        "stages.csv": _TIMES + "B1,P,P,2024-05-14T10:00,2024-05-14T11:00\n",
        **_readings(_TIMED + "B1,D,2024-05-14T10:30+02:00,8.4\n"),
    },
    "time backwards": {
        "stages.csv": _TIMES + "B1,P,P,2024-10-27T01:00,2024-10-27T04:00\n",
        **_readings(_TIMED + "B1,D,2024-10-27T02:59:50,8.4\nB1,D,2024-10-27T02:00,8.4\n"),
    },
    "coefficient alone": {
        "gauges.csv": "member,gauge,at [m],temperature coefficient [mm/K]\nB1,D,3,0.002\n",
    },
    "value not wanted": {"unknowns.csv": _UNKNOWNS + "B1,temperature coefficient,D,,0,,,\n"},
    "temperature missing": {
        "gauges.csv": "member,gauge,at [m],u [mm],temperature coefficient [mm/K],temperature coefficient u [mm/K]\n"
        "B1,D,3,0.1,0.002,0.001\n",
        "stages.csv": _STAGES + "B1,z,,,zero\nB1,P,P,1,load\n",
        **_readings("member,stage,gauge,deflection [mm],temperature [degC]\nB1,z,D,0.1,15\nB1,P,D,8.4,\n"),
    },
    "where missing": {"unknowns.csv": _UNKNOWNS + "B1,rotational restraint,,,,,,\n"},
    "where not wanted": {"unknowns.csv": _UNKNOWNS + "B1,datum shift,A,P,,,,\n"},
    "stage not wanted": {"unknowns.csv": _UNKNOWNS + "B1,EI,,P,,,,\n"},
    "stage missing": {"unknowns.csv": _UNKNOWNS + "B1,datum shift,,,,,,\n"},
    "expected alone": {"unknowns.csv": _UNKNOWNS + "B1,EI,,,,,0.9,\n"},
    "expected out of bounds": {"unknowns.csv": _UNKNOWNS + "B1,EI,,,0.5,0.8,0.9,0.1\n"},
    "bounds crossed": {"unknowns.csv": _UNKNOWNS + "B1,EI,,,2,0.5,,\n"},
    "no limit": {"limits.csv": _LIMITS + "B1,deflection,,,\n"},
    "unknown number": {"limits.csv": _LIMITS + "B1,IS 456:2000,recovry,0.8,\n"},
    "number not named": {"limits.csv": _LIMITS + "B1,IS 456:2000,,0.8,\n"},
    "number missing": {"limits.csv": _LIMITS + "B1,IS 456:2000,recovery,,\n"},
    "wrong side": {"limits.csv": _LIMITS + "B1,IS 456:2000,recovery,,0.8\n"},
    "natures at odds": {
        "loads.csv": "member,load case,from [m],force [kN],nature\nB1,P,3,50,live\nB1,P,4,50,roof\n",
    },
    "station on a jump": {
        "loads.csv": _LOADS + "B1,P,3,,,,10\n",
        "gauges.csv": _GAUGES + "B1,D,3,curvature,,\n",
        "readings.csv": "member,stage,gauge,curvature [1/km]\nB1,P,D,0.2\n",
    },
    "uncertainty missing": _readings("member,stage,at [m],deflection [mm],u [mm]\nB1,P,2,7.1,0.1\nB1,P,3,8.4,\n"),
}


def _write(folder: Path, changes: Files) -> Path:
    """The sound book with some of its files changed, added or left out."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, text in {**SOUND, **changes}.items():
        if text is not None:
            (folder / name).write_text(text, encoding="utf-8")
    return folder


def _no_book(folder: Path) -> Path:
    return folder / "nowhere"


def _letter(folder: Path) -> Path:
    (folder / "letter.txt").write_text("dear")
    return folder / "letter.txt"


def _picture(folder: Path) -> Path:
    (_write(folder, {}) / "loads.csv").write_bytes(b"\x89PNG\r\n\0\0")
    return folder


def _wide(folder: Path) -> Path:
    return _write(folder, {"loads.csv": "," * csv_files.WIDEST + "\n"})


def _many_files(folder: Path) -> Path:
    for number in range(files.MOST_FILES):
        (folder / f"photo {number}.jpg").touch()
    return _write(folder, {})


def _large_file(folder: Path) -> Path:
    """A file of only a length: it takes no room on the disk."""
    with (_write(folder, {}) / "loads.csv").open("r+b") as file:
        file.truncate(files.LARGEST + 1)
    return folder


def _damaged(folder: Path) -> Path:
    (folder / "book.xlsx").write_bytes(b"PK\3\4 cut off")
    return folder / "book.xlsx"


def _workbook(folder: Path, change: Callable[[openpyxl.Workbook], object]) -> Path:
    """The members as a workbook, with something done to it."""
    book = openpyxl.Workbook()
    sheet = book.create_sheet("members", 0)
    for row in (["member", "length [m]", "EI [kN m2]"], ["B1", 6, 20000], ["B2", 6, 20000]):
        sheet.append(row)
    change(book)
    book.save(folder / "book.xlsx")
    return folder / "book.xlsx"


def _merged(folder: Path) -> Path:
    return _workbook(folder, lambda book: book["members"].merge_cells("B2:B3"))


def _many_sheets(folder: Path) -> Path:
    return _workbook(folder, lambda book: [book.create_sheet() for _ in range(workbook.MOST_SHEETS)])


def _bomb(folder: Path) -> Path:
    """A workbook one part of which unpacks to a thousand times its packed size."""
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("xl/worksheets/sheet1.xml", b" " * 2_000_000)
    (folder / "book.xlsx").write_bytes(packed.getvalue())
    return folder / "book.xlsx"


_MADE: Mapping[str, Callable[[Path], Path]] = {
    "no such book": _no_book,
    "not a book": _letter,
    "not text": _picture,
    "too many cells": _wide,
    "too many files": _many_files,
    "file too large": _large_file,
    "broken workbook": _damaged,
    "merged cells": _merged,
    "too many sheets": _many_sheets,
    "unsafe workbook": _bomb,
}

#: The kinds of fault of which there is a broken book.
BROKEN = MappingProxyType(dict.fromkeys([*_MADE, *CHANGES]))


def write_broken(kind: str, folder: Path) -> Path:
    """Write the broken book of a kind of fault into an empty folder; where to read it."""
    return _MADE[kind](folder) if kind in _MADE else _write(folder, CHANGES[kind])
