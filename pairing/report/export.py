"""Writing an answer: for people, as CSV, as JSON; and putting a file in place whole."""

from __future__ import annotations

import csv
import io
import json
import os
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pairing.errors import OptionError

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from pairing.report.content import Answer


def to_json(answer: Answer) -> str:
    """One JSON document: `about`, `notes`, then the fields; numbers unrounded."""
    document = {"about": answer.about, "notes": list(answer.notes), **answer.fields}
    return json.dumps(document, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def to_csv(answer: Answer) -> str:
    """One CSV table; numbers unrounded, missing blank, booleans true and false."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(answer.csv_columns)
    writer.writerows([_csv_cell(cell) for cell in row] for row in answer.csv_rows)
    return out.getvalue()


def _csv_cell(value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, float) else str(value)


def to_text(answer: Answer) -> str:
    """The terminal's layout as plain text, without colour."""
    from pairing.report.terminal import plain_text

    out = io.StringIO()
    plain_text(answer, out)
    return out.getvalue()


WRITERS: dict[str, Callable[[Answer], str]] = {
    "table": to_text,
    "csv": to_csv,
    "json": to_json,
}
"""Kinds of output by name."""


def write_file(text: str, out: Path, *, inputs: Sequence[Path]) -> None:
    """Put `text` in place as `out`, whole or not at all; write into a device or pipe.

    Raises
    ------
    OptionError
        If `out` is an input of the call, a folder, or cannot be written.
    """
    clash = [path for path in inputs if _same_file(path, out)]
    if clash:
        raise OptionError(
            f"{out} is an input of this call and would be written over.",
            remedy="Give --out another name; records are never changed.",
        )
    if out.exists() and not out.is_file() and not out.is_dir():
        out.write_text(text, encoding="utf-8")
        return
    if out.is_dir():
        raise OptionError(f"{out} is a folder.", remedy="Give --out the name of a file in it.")
    try:
        handle, temporary = tempfile.mkstemp(dir=out.parent, prefix=f".{out.name}.")
        try:
            with os.fdopen(handle, "w", encoding="utf-8", newline="") as file:
                file.write(text)
            _usual_permissions(temporary)
            Path(temporary).replace(out)
        except BaseException:
            Path(temporary).unlink(missing_ok=True)
            raise
    except OSError as error:
        raise OptionError(
            f"{out} cannot be written ({error.strerror or error}).",
            remedy="Check that the folder exists and that you may write in it.",
        ) from None


def _same_file(first: Path, second: Path) -> bool:
    try:
        return first.samefile(second)
    except OSError:
        return first.resolve() == second.resolve()


def _usual_permissions(path: str) -> None:
    """Temporary files are private; a result should be readable as other files are."""
    mask = os.umask(0)
    os.umask(mask)
    Path(path).chmod(0o666 & ~mask)
