"""Laying out an answer for the terminal; nothing is decided here but the layout."""

from __future__ import annotations

import io
import os
from typing import TYPE_CHECKING, TextIO

from rich import box
from rich.cells import cell_len
from rich.console import Console
from rich.padding import Padding
from rich.table import Table as RichTable
from rich.text import Text

from pairing.report import appearance
from pairing.spelling import visible

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.report.content import Answer, Section, Table


def console_for(stream: TextIO) -> Console:
    """A console that colours only a terminal, honours NO_COLOR, and never guesses markup."""
    width = None
    if not stream.isatty() and "COLUMNS" not in os.environ:
        width = appearance.WIDTH_WITHOUT_TERMINAL
    plain = not stream.isatty()
    return Console(
        file=stream,
        width=width,
        highlight=False,
        markup=False,
        emoji=False,
        force_terminal=False if plain else None,
        color_system=None if plain else "auto",
    )


def plain_text(answer: Answer, stream: TextIO) -> None:
    """Write an answer to a file or pipe: no colour, no blanks at the ends of lines."""
    out = io.StringIO()
    print_answer(answer, console_for(out))
    stream.writelines(f"{line.rstrip()}\n" for line in out.getvalue().splitlines())


def print_answer(answer: Answer, console: Console) -> None:
    """Print an answer: the headline, every section, the cautions."""
    for number, sentence in enumerate(answer.headline):
        style = appearance.HEADLINE if number == 0 else ""
        console.print(_text(sentence, style))
    for section in answer.sections:
        _print_section(section, console)
    for caution in answer.cautions:
        console.print()
        console.print(_text(caution, appearance.CAUTION))


def _text(words: str, style: str = "") -> Text:
    return Text(visible(words), style=style)


def _print_section(section: Section, console: Console) -> None:
    console.print()
    console.print(_text(section.title, appearance.TITLE))
    for sentence in section.sentences:
        console.print(Padding(_text(sentence), (0, 0, 0, 2), expand=False))
    for table in section.tables:
        if table.rows:
            console.print(_laid_out(table, console.width))


def _laid_out(table: Table, width: int) -> Padding:
    """A table in the room there is: cells kept whole, else wrapped at words, else as a list."""
    room = width - 2 - 2 * (len(table.headings) - 1)
    columns = [[row[number] for row in table.rows] for number in range(len(table.headings))]
    for kept_whole in (appearance.KEPT_WHOLE, 0):
        least = [
            _least_width(heading, cells, number in table.numeric, kept_whole)
            for number, (heading, cells) in enumerate(zip(table.headings, columns, strict=True))
        ]
        if sum(least) <= room:
            widths = _shared_out(least, columns, table.headings, room)
            return Padding(_rich_table(table, widths), (0, 0, 0, 2), expand=False)
    return Padding(_as_list(table), (0, 0, 0, 2), expand=False)


def _shared_out(
    least: list[int], columns: list[list[str]], headings: Sequence[str], room: int
) -> list[int]:
    """Column widths: the least, and what room is left to the columns that wrap most."""
    wanted = [
        max(cell_len(text) for text in (heading, *cells))
        for heading, cells in zip(headings, columns, strict=True)
    ]
    widths = list(least)
    for _spare in range(room - sum(least)):
        tightest = max(range(len(widths)), key=lambda number: wanted[number] / widths[number])
        if wanted[tightest] <= widths[tightest]:
            break
        widths[tightest] += 1
    return widths


def _rich_table(table: Table, widths: list[int]) -> RichTable:
    headed = any(table.headings)
    rich_table = RichTable(
        box=box.SIMPLE_HEAD if headed else None,
        show_header=headed,
        header_style=appearance.TABLE_HEADING,
        pad_edge=False,
        show_edge=False,
        padding=(0, 1, 0, 0),
        collapse_padding=False,
    )
    for number, heading in enumerate(table.headings):
        rich_table.add_column(
            _text(heading),
            justify="right" if number in table.numeric else "left",
            width=widths[number],
            overflow="fold",
        )
    for row in table.rows:
        rich_table.add_row(*(_text(cell) for cell in row))
    return rich_table


def _least_width(heading: str, cells: Sequence[str], numeric: bool, kept_whole: int) -> int:
    """Columns a table column needs so that numbers stay whole and words are not cut."""
    words = [word for cell in cells for word in ([cell] if numeric else cell.split())]
    longest = max((cell_len(word) for word in [*words, *heading.split()]), default=1)
    whole = max((cell_len(cell) for cell in cells), default=1)
    return max(longest, whole if whole <= kept_whole else 0)


def _as_list(table: Table) -> Text:
    """Rows as short blocks of ``heading: cell`` for a narrow screen."""
    blocks = [
        "\n".join(
            f"{heading}: {cell}" if heading else cell
            for heading, cell in zip(table.headings, row, strict=True)
        )
        for row in table.rows
    ]
    return _text("\n\n".join(blocks))
