"""How delimited text begins: comments above the header, and the delimiter."""

from __future__ import annotations

import csv
import re
from collections import Counter

from pairing.records.files.raw import ANIMALS, Sought, known_columns

DELIMITERS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "pipe"}
_LINE = re.compile(r"([^\r\n]*)(?:\r\n|\r|\n|$)")


def without_comments(text: str, sought: Sought = ANIMALS) -> tuple[str, int]:
    """The text from its header on, and how many lines stood before it.

    A line beginning with # is a comment, unless it names our columns and the line below
    does not: then it is the header.
    """
    skipped = start = 0
    while start < len(text):
        line, below_starts = _line(text, start)
        line = line.strip()
        if line and not line.startswith("#"):
            break
        header = line.removeprefix("#")
        if _headings(header, sought) >= 2 > _headings(_line(text, below_starts)[0], sought):
            return f"{header}\n{text[below_starts:]}", skipped
        start = below_starts
        skipped += 1
    return text[start:], skipped


def _line(text: str, start: int) -> tuple[str, int]:
    """The line that begins at `start`, and where the next one begins."""
    found = _LINE.match(text, start)
    return (found.group(1), found.end()) if found else ("", len(text))


def _headings(line: str, sought: Sought) -> int:
    """How many cells of a line are known headings, whatever separates them."""
    return known_columns(re.split(r"[,;\t|]", line), sought)


def find_delimiter(text: str, sought: Sought = ANIMALS) -> str:
    """The delimiter by which a row has most known headings, else the one that splits best.

    A comma's table may hold lists with pipes in its cells, so the header is asked first.
    """
    sample = text[:65536].splitlines()[:20]

    def promise(delimiter: str) -> tuple[int, bool, int, int]:
        try:
            rows = [row for row in csv.reader(sample, delimiter=delimiter) if row]
        except csv.Error:
            return (0, False, 0, 0)
        named = max((known_columns(row, sought) for row in rows if len(row) > 1), default=0)
        width = Counter(map(len, rows)).most_common(1)[0][0] if rows else 0
        return (
            named,
            bool(rows) and len(rows[0]) > 1,
            width if width > 1 else 0,
            sum(len(row) == width for row in rows),
        )

    return max(DELIMITERS, key=promise)
