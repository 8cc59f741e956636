"""`Records`: what the file said, row by row, under the names of our fields."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from pairing.records.findings import Finding


@dataclass(frozen=True, slots=True)
class Records:
    """One entry a row of the file, in the file's order. Nothing inferred, nothing lost.

    Attributes
    ----------
    name
        The file's own name, without its folder.
    reading
        How it was read: kind, encoding, delimiter, which columns became which fields.
    sha256
        Of the file's bytes.
    lines
        Line (or sheet row) of each entry, the header's included in the count.
    fields
        Field name to its cells, tidied (NFKC, trimmed, inner blanks folded).
    carried
        Every other column, untouched.
    columns
        Field name to the column's own spelling.
    findings
        Doubts about the table itself.
    joined_ids
        Ids that stand in the tables joined with it.
    """

    name: str
    reading: str
    sha256: str
    lines: Sequence[int]
    fields: Mapping[str, Sequence[str]]
    carried: Mapping[str, Sequence[str]]
    columns: Mapping[str, str]
    findings: tuple[Finding, ...]
    joined_ids: frozenset[str] = frozenset()

    def __len__(self) -> int:
        return len(self.lines)

    def column(self, field: str) -> Sequence[str]:
        """Cells of `field`, blank where the file has no such column."""
        return self.fields[field] if field in self.fields else ("",) * len(self.lines)
