"""Spreadsheet files as archives, looked into before any of them is taken whole.

A workbook is a zip archive of XML. A few kilobytes of it can claim to be a table of billions
of cells, so the archive is unpacked once piece by piece, keeping nothing, before the reader
gets it: its true size counts, whatever the archive states.
"""

from __future__ import annotations

import copy
import io
import posixpath
import zipfile
import zlib
from typing import TYPE_CHECKING
from xml.parsers import expat

from pairing.errors import RecordsError
from pairing.records.files.binary_workbook import sheets_of_binary_workbook
from pairing.records.files.sheet_reach import (
    MOST_PLACES,
    Cells,
    Elements,
    Formats,
    Handler,
    SharedText,
    Sheet,
    Tables,
    place_name,
    plain_sheet,
)

if TYPE_CHECKING:
    from collections.abc import Iterator

SAVE_AS = "Save it from your spreadsheet as CSV or .xlsx and try again."

_MOST_UNPACKED = 2_000_000_000
_MOST_RATIO = 200
_SMALL_ENOUGH = 100_000_000
_PIECE = 1 << 20
_ENCRYPTED = "EncryptedPackage".encode("utf-16-le")


def examined(name: str, content: bytes) -> dict[str, Sheet]:
    """Sheets of a workbook by name, in order.

    Raises
    ------
    RecordsError
        If the file is damaged, cut short, protected by a password, no workbook at all, or
        would unpack to more than a table can need.
    """
    if not content.startswith(b"PK"):
        if _ENCRYPTED in content:
            raise _protected(name)
        return _examined_binary(name, content)
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as archive:
            members = archive.infolist()
            _refuse_bomb(name, members)
            names = {member.filename for member in members}
            if "xl/workbook.xml" in names:
                return _examined_xlsx(name, archive)
            if "content.xml" in names and _is_spreadsheet(archive, names):
                return _examined_ods(name, archive, names)
    except (zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, OSError):
        raise _damaged(name) from None
    except expat.ExpatError as error:
        raise _damaged(name, f"its XML is broken, {error}") from None
    except (RuntimeError, ValueError, OverflowError):
        raise _damaged(name) from None
    raise _other_kind(name, names)


def _examined_binary(name: str, content: bytes) -> dict[str, Sheet]:
    try:
        sheets = sheets_of_binary_workbook(content)
    except ValueError as error:
        raise _damaged(name, str(error)) from None
    _refuse_together_too_large(name, sheets)
    return sheets


def _refuse_together_too_large(name: str, sheets: dict[str, Sheet]) -> None:
    """Refuse where the reader takes all sheets of a workbook at once, so that all count."""
    whole = Sheet(letters=sum(sheet.letters for sheet in sheets.values()))
    if sum(sheet.places for sheet in sheets.values()) > MOST_PLACES or whole.too_large:
        largest = max(sheets, key=lambda title: (sheets[title].places, sheets[title].letters))
        raise sheet_too_large(name, largest, sheets[largest])


def _refuse_bomb(name: str, members: list[zipfile.ZipInfo]) -> None:
    """Refuse by the sizes the archive states; `_pieces` counts the true ones."""
    if sum(member.file_size for member in members) > _MOST_UNPACKED:
        raise _bomb(name)
    for member in members:
        if member.file_size > max(_SMALL_ENOUGH, _MOST_RATIO * member.compress_size):
            raise _bomb(name)


def _pieces(name: str, archive: zipfile.ZipFile, member: zipfile.ZipInfo) -> Iterator[bytes]:
    """A member's true bytes, whatever size the archive states for it."""
    unlimited = copy.copy(member)
    unlimited.file_size = _MOST_UNPACKED + 1
    most = max(_SMALL_ENOUGH, min(_MOST_UNPACKED, _MOST_RATIO * member.compress_size))
    size = 0
    with archive.open(unlimited) as unpacked:
        while piece := unpacked.read(_PIECE):
            size += len(piece)
            if size > most:
                raise _bomb(name)
            yield piece
    if size != member.file_size:
        raise _damaged(name)


def _parse(name: str, archive: zipfile.ZipFile, member: zipfile.ZipInfo, handler: Handler) -> None:
    parser = expat.ParserCreate()
    parser.buffer_text = True
    parser.StartElementHandler = handler.start
    parser.EndElementHandler = handler.end
    parser.CharacterDataHandler = handler.text
    for piece in _pieces(name, archive, member):
        parser.Parse(piece)
    parser.Parse(b"", True)


# Workbooks of the .xlsx kind


def _examined_xlsx(name: str, archive: zipfile.ZipFile) -> dict[str, Sheet]:
    members = {member.filename: member for member in archive.infolist()}
    by_folded = {filename.casefold(): filename for filename in members}
    book = Elements("sheet", "Relationship")
    workbook = "xl/workbook.xml"
    links = "xl/_rels/workbook.xml.rels"
    for filename in (workbook, links):
        if filename not in members:
            raise _damaged(name)
        _parse(name, archive, members[filename], book)
    targets = {
        found["Id"]: posixpath.normpath(posixpath.join("/xl", found.get("Target", ""))).lstrip("/")
        for found in book.found["Relationship"]
        if "Id" in found
    }
    shared = SharedText()
    for filename in members:
        if filename.casefold().endswith("sharedstrings.xml"):
            _parse(name, archive, members[filename], shared)
    formats = Formats()
    styles = {
        by_folded.get(targets.get(found.get("Id", ""), "").casefold(), "")
        for found in book.found["Relationship"]
        if found.get("Type", "").endswith("/styles")
    } - {"", workbook, links}
    for filename in styles:
        _parse(name, archive, members[filename], formats)
    sheets: dict[str, Sheet] = {}
    seen = {workbook, links, *styles}
    for found in book.found["sheet"]:
        target = targets.get(next((v for k, v in found.items() if k.endswith(":id")), ""), "")
        filename = by_folded.get(target.casefold(), "")
        if filename and filename not in seen:
            seen.add(filename)
            if found.get("name", "") in sheets:
                raise _damaged(name, "two sheets have one name")
            sheets[found.get("name", "")] = _examined_sheet(
                name, archive, members[filename], shared, formats.styles
            )
    for filename, member in members.items():
        if filename not in seen and not filename.casefold().endswith("sharedstrings.xml"):
            for _piece in _pieces(name, archive, member):
                pass
    return sheets


def _examined_sheet(
    name: str,
    archive: zipfile.ZipFile,
    member: zipfile.ZipInfo,
    shared: SharedText,
    padded: dict[int, int],
) -> Sheet:
    sheet = plain_sheet(_pieces(name, archive, member), shared.lengths, padded)
    if sheet is None or sheet.too_large:
        cells = Cells(shared.lengths, padded)
        _parse(name, archive, member, cells)
        return cells.sheet
    return sheet


# Workbooks of the .ods kind


def _is_spreadsheet(archive: zipfile.ZipFile, names: set[str]) -> bool:
    if "mimetype" not in names:
        return False
    with archive.open("mimetype") as kind:
        return b"opendocument.spreadsheet" in kind.read(200)


def _examined_ods(name: str, archive: zipfile.ZipFile, names: set[str]) -> dict[str, Sheet]:
    if "META-INF/manifest.xml" in names:
        manifest = Elements("encryption-data")
        _parse(name, archive, archive.getinfo("META-INF/manifest.xml"), manifest)
        if manifest.found["encryption-data"]:
            raise _protected(name)
    tables = Tables()
    for member in archive.infolist():
        if member.filename == "content.xml":
            _parse(name, archive, member, tables)
        else:
            for _piece in _pieces(name, archive, member):
                pass
    _refuse_together_too_large(name, tables.sheets)
    return tables.sheets


# Refusals


def sheet_too_large(name: str, title: str, sheet: Sheet) -> RecordsError:
    """The refusal of a sheet that would take more memory than a table can need."""
    if sheet.places <= MOST_PLACES:
        return RecordsError(
            f'{name}: the cells of sheet "{title}" hold more text than a table can need.',
            remedy="Save the sheet as CSV and try again.",
        )
    first = place_name(*(sheet.first or (0, 0)))
    last = place_name(*sheet.last)
    return RecordsError(
        f'{name}: sheet "{title}" is too large to be read as a workbook.',
        details=[
            f"Its filled cells reach from {first} to {last}, {sheet.places:,} places; "
            f"at most {MOST_PLACES:,} are read.",
        ],
        remedy="Delete what stands far from the table, or save the sheet as CSV and try again.",
    )


def damaged_workbook(name: str, why: str) -> RecordsError:
    """The refusal of a workbook that cannot be read; `why` fits in parentheses."""
    return RecordsError(f"{name}: the workbook cannot be read ({why}).", remedy=SAVE_AS)


def _damaged(name: str, why: str = "it is damaged or cut short") -> RecordsError:
    return damaged_workbook(name, why)


def _bomb(name: str) -> RecordsError:
    return RecordsError(
        f"{name}: the file unpacks to far more than a table of animals can need.",
        details=[
            f"At most {_MOST_UNPACKED // 10**9} GB are unpacked, and from {_SMALL_ENOUGH // 10**6} "
            f"MB on at most {_MOST_RATIO} times the packed size."
        ],
        remedy="Do not trust it unless you know where it comes from; save the table as CSV.",
    )


def _protected(name: str) -> RecordsError:
    return RecordsError(
        f"{name}: the workbook is protected by a password.",
        remedy="Open it in your spreadsheet, save a copy without a password and read the copy.",
    )


def _other_kind(name: str, names: set[str]) -> RecordsError:
    kinds = {
        "word/document.xml": "a text document (.docx)",
        "ppt/presentation.xml": "a presentation (.pptx)",
        "xl/workbook.bin": "a binary workbook (.xlsb)",
        "content.xml": "an OpenDocument file, but no spreadsheet",
    }
    kind = next((kinds[member] for member in kinds if member in names), "")
    if not kind:
        return RecordsError(
            f"{name}: this is a zip archive without a workbook.",
            remedy="Unpack it and name the table inside it.",
        )
    return RecordsError(f"{name}: this is {kind}.", remedy=SAVE_AS)
