"""Workbook: tables as one .xlsx file (ECMA-376, SpreadsheetML), written as text: twenty times as fast as cell by cell.

Every sheet has a heading row that stays in sight, repeats on each printed page and filters; it prints landscape, as
wide as the paper, its title and page number at the foot. Nothing is a formula: texts are texts and numbers numbers.
"""

import io
import re
import zipfile
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from html import escape

__all__ = ["Cell", "Sheet", "workbook"]

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
LINKS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
KIND = "application/vnd.openxmlformats-officedocument.spreadsheetml"
START = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
ILLEGAL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")  # what XML 1.0 does not know
FOOT = 100  # characters: a spreadsheet refuses a foot longer than 255, signs doubled and codes among them
OWN_FORMATS = 164  # number formats from here on are a workbook's own
HEADING, WRAPPED, FIRST_NUMBER = 1, 2, 3  # cell styles, 0 being plain; a style for each number format follows


@dataclass(frozen=True, slots=True)
class Cell:
    """A number that is shown in a format (``0.00``) and keeps every digit."""

    value: float
    shown: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One table: rows under headings; ``widths`` in characters, ``foot`` is printed under each page."""

    title: str
    foot: str
    headings: Sequence[str]
    rows: Sequence[Sequence[str | Cell | int | bool | None]]
    widths: Sequence[float]
    longest: float


def workbook(sheets: Sequence[Sheet], time: datetime) -> bytes:
    """The sheets as the bytes of an .xlsx file."""
    formats = {
        shown: FIRST_NUMBER + number
        for number, shown in enumerate(
            sorted({cell.shown for sheet in sheets for row in sheet.rows for cell in row if isinstance(cell, Cell)})
        )
    }
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, text in _parts(sheets, formats, time):
            archive.writestr(zipfile.ZipInfo(name, time.timetuple()[:6]), START + text, zipfile.ZIP_DEFLATED)
    return out.getvalue()


def _parts(sheets: Sequence[Sheet], formats: Mapping[str, int], time: datetime) -> Iterator[tuple[str, str]]:
    """Every part of the package, by its name."""
    numbers = range(1, len(sheets) + 1)
    yield "[Content_Types].xml", _kinds(numbers)
    yield (
        "_rels/.rels",
        f'<Relationships xmlns="{PACKAGE}/relationships">'
        f'<Relationship Id="rId1" Type="{LINKS}/officeDocument" Target="xl/workbook.xml"/>'
        f'<Relationship Id="rId2" Type="{PACKAGE}/relationships/metadata/core-properties" Target="docProps/core.xml"/>'
        "</Relationships>",
    )
    yield "docProps/core.xml", _properties(time)
    yield "xl/workbook.xml", _contents(sheets)
    links = [f'<Relationship Id="rId{n}" Type="{LINKS}/worksheet" Target="worksheets/sheet{n}.xml"/>' for n in numbers]
    links.append(f'<Relationship Id="rId{len(sheets) + 1}" Type="{LINKS}/styles" Target="styles.xml"/>')
    yield (
        "xl/_rels/workbook.xml.rels",
        f'<Relationships xmlns="{PACKAGE}/relationships">{"".join(links)}</Relationships>',
    )
    yield "xl/styles.xml", _styles(formats)
    for number, sheet in zip(numbers, sheets, strict=True):
        yield f"xl/worksheets/sheet{number}.xml", _sheet(sheet, formats)


def _kinds(numbers: Sequence[int]) -> str:
    parts = [("/xl/workbook.xml", f"{KIND}.sheet.main+xml"), ("/xl/styles.xml", f"{KIND}.styles+xml")]
    parts += [(f"/xl/worksheets/sheet{n}.xml", f"{KIND}.worksheet+xml") for n in numbers]
    parts.append(("/docProps/core.xml", "application/vnd.openxmlformats-package.core-properties+xml"))
    overrides = "".join(f'<Override PartName="{name}" ContentType="{kind}"/>' for name, kind in parts)
    return (
        f'<Types xmlns="{PACKAGE}/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        f'<Default Extension="xml" ContentType="application/xml"/>{overrides}</Types>'
    )


def _properties(time: datetime) -> str:
    stamp = time.astimezone().strftime("%Y-%m-%dT%H:%M:%S%z")
    stamp = f"{stamp[:-2]}:{stamp[-2:]}"
    dates = "".join(f'<dcterms:{n} xsi:type="dcterms:W3CDTF">{stamp}</dcterms:{n}>' for n in ("created", "modified"))
    return (
        f'<cp:coreProperties xmlns:cp="{PACKAGE}/metadata/core-properties" xmlns:dc="http://purl.org/dc/elements/1.1/" '
        'xmlns:dcterms="http://purl.org/dc/terms/" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">'
        f"<dc:creator>fieldfit</dc:creator>{dates}</cp:coreProperties>"
    )


def _contents(sheets: Sequence[Sheet]) -> str:
    """The list of sheets, with the row that each repeats and the range that it filters."""
    listed = "".join(
        f'<sheet name="{_text(sheet.title)}" sheetId="{n}" r:id="rId{n}"/>' for n, sheet in enumerate(sheets, start=1)
    )
    filters = "".join(
        f'<definedName name="_xlnm._FilterDatabase" localSheetId="{n}" hidden="1">'
        f"'{_text(sheet.title)}'!$A$1:${_letters(len(sheet.headings))}${len(sheet.rows) + 1}</definedName>"
        for n, sheet in enumerate(sheets)
    )
    repeated = "".join(
        f'<definedName name="_xlnm.Print_Titles" localSheetId="{n}">\'{_text(sheet.title)}\'!$1:$1</definedName>'
        for n, sheet in enumerate(sheets)
    )
    return (
        f'<workbook xmlns="{MAIN}" xmlns:r="{LINKS}"><sheets>{listed}</sheets>'
        f"<definedNames>{filters}{repeated}</definedNames></workbook>"
    )


def _styles(formats: Mapping[str, int]) -> str:
    own = "".join(
        f'<numFmt numFmtId="{OWN_FORMATS + n}" formatCode="{_text(shown)}"/>' for n, shown in enumerate(formats)
    )
    own = f'<numFmts count="{len(formats)}">{own}</numFmts>' if formats else ""
    numbers = "".join(
        f'<xf numFmtId="{OWN_FORMATS + n}" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/>'
        for n in range(len(formats))
    )
    wrap, base = '<alignment vertical="top" wrapText="1"/>', 'fillId="0" borderId="0"'
    return (
        f'<styleSheet xmlns="{MAIN}">{own}'
        '<fonts count="2"><font><sz val="11"/><name val="Calibri"/><family val="2"/></font>'
        '<font><b/><sz val="11"/><name val="Calibri"/><family val="2"/></font></fonts>'
        '<fills count="3"><fill><patternFill patternType="none"/></fill>'
        '<fill><patternFill patternType="gray125"/></fill>'
        '<fill><patternFill patternType="solid"><fgColor rgb="FFF0F1F3"/></patternFill></fill></fills>'
        '<borders count="2"><border><left/><right/><top/><bottom/><diagonal/></border>'
        '<border><left/><right/><top/><bottom style="thin"/><diagonal/></border></borders>'
        '<cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs>'
        f'<cellXfs count="{FIRST_NUMBER + len(formats)}"><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/>'
        '<xf numFmtId="0" fontId="1" fillId="2" borderId="1" xfId="0" applyFont="1" applyFill="1" applyBorder="1" '
        f'applyAlignment="1">{wrap}</xf>'
        f'<xf numFmtId="0" fontId="0" {base} xfId="0" applyAlignment="1">{wrap}</xf>{numbers}</cellXfs>'
        '<cellStyles count="1"><cellStyle name="Normal" xfId="0" builtinId="0"/></cellStyles></styleSheet>'
    )


def _sheet(sheet: Sheet, formats: Mapping[str, int]) -> str:
    letters = [_letters(number) for number in range(1, len(sheet.headings) + 1)]
    whole = f"A1:{letters[-1]}{len(sheet.rows) + 1}"
    columns = "".join(
        f'<col min="{n}" max="{n}" width="{width:g}" customWidth="1"/>' for n, width in enumerate(sheet.widths, start=1)
    )
    head = "".join(_string(f"{letter}1", name, HEADING) for letter, name in zip(letters, sheet.headings, strict=True))
    rows = "".join(
        f'<row r="{number}">{"".join(_cells(row, letters, number, sheet.longest, formats))}</row>'
        for number, row in enumerate(sheet.rows, start=2)
    )
    foot = f"&amp;L{_text(sheet.foot[:FOOT].replace('&', '&&'))}&amp;R&amp;P of &amp;N"
    return (
        f'<worksheet xmlns="{MAIN}"><sheetPr><pageSetUpPr fitToPage="1"/></sheetPr><dimension ref="{whole}"/>'
        '<sheetViews><sheetView workbookViewId="0"><pane xSplit="1" ySplit="1" topLeftCell="B2" '
        'activePane="bottomRight" state="frozen"/></sheetView></sheetViews>'
        f'<cols>{columns}</cols><sheetData><row r="1">{head}</row>{rows}</sheetData><autoFilter ref="{whole}"/>'
        '<pageMargins left="0.5" right="0.5" top="0.6" bottom="0.7" header="0.3" footer="0.3"/>'
        '<pageSetup orientation="landscape" fitToWidth="1" fitToHeight="0"/>'
        f"<headerFooter><oddFooter>{foot}</oddFooter></headerFooter></worksheet>"
    )


def _cells(
    row: Sequence[str | Cell | int | bool | None],
    letters: Sequence[str],
    number: int,
    longest: float,
    formats: Mapping[str, int],
) -> Iterator[str]:
    for letter, value in zip(letters, row, strict=True):
        if isinstance(value, Cell):
            yield f'<c r="{letter}{number}" s="{formats[value.shown]}"><v>{value.value!r}</v></c>'
        elif value and isinstance(value, str):
            yield _string(f"{letter}{number}", value, WRAPPED if len(value) > longest else 0)
        elif value not in (None, ""):
            yield f'<c r="{letter}{number}"><v>{int(value)}</v></c>'


def _string(place: str, text: str, style: int) -> str:
    return f'<c r="{place}" s="{style}" t="inlineStr"><is><t xml:space="preserve">{_text(text)}</t></is></c>'


def _text(text: str) -> str:
    """Text escaped, what XML does not know replaced."""
    return escape(ILLEGAL.sub("\N{REPLACEMENT CHARACTER}", text))


def _letters(number: int) -> str:
    """Name of a column: A, B, ..., Z, AA, ..."""
    name = ""
    while number:
        number, rest = divmod(number - 1, 26)
        name = chr(65 + rest) + name
    return name
