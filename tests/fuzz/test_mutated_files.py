"""Twenty thousand damaged files: refused in plain words, or read without a row lost."""

from __future__ import annotations

import faulthandler
import multiprocessing
import os
import tempfile
import traceback
import warnings
from collections import Counter
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path

import pytest

from tests.fuzz.journey import SECONDS, Tables, in_time, travel
from tests.fuzz.mutations import made, seeds

FILES = 20_400
_TOGETHER = 100
_SECONDS_BEFORE_THE_END = 6 * SECONDS
_MOST_BYTES_SHOWN = 3_000
_MOST_FAILURES_SHOWN = 8


def warm_up() -> None:
    """Import and compile all that is needed, so that no file is blamed for it."""
    with tempfile.TemporaryDirectory() as name:
        travel(seeds()[0], Path(name), thorough=True, answers=True)


def tried(first: int, after: int) -> tuple[Counter[str], list[str]]:
    """How far the files with these numbers came, and what went wrong with each that failed."""
    reached: Counter[str] = Counter()
    failures = []
    warnings.simplefilter("error")
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        for number in range(first, after):
            # What hangs where no alarm is heard ends this process, with its place shown.
            faulthandler.dump_traceback_later(_SECONDS_BEFORE_THE_END, exit=True)
            tables = made(number)
            try:
                with in_time():
                    thorough, answers = number % 2 == 0, number % 10 == 0
                    reached[travel(tables, folder, thorough=thorough, answers=answers)] += 1
            except (KeyboardInterrupt, SystemExit):
                raise
            except BaseException:  # a panic inside a reader is no Exception
                reached["failed"] += 1
                failures.append(_told(number, tables))
    faulthandler.cancel_dump_traceback_later()
    return reached, failures


def _told(number: int, tables: Tables) -> str:
    """What went wrong, with the file that it went wrong with."""
    handle, path = tempfile.mkstemp(prefix=f"mutated-{number}-")
    with os.fdopen(handle, "wb") as file:
        file.write(tables.records)
    shown = tables.records[:_MOST_BYTES_SHOWN]
    return f"made({number}), saved as {path}:\n{shown!r}\n{traceback.format_exc()}"


@pytest.mark.slow
def test_damaged_files_are_refused_or_read_whole() -> None:
    """No damaged file ends in a traceback, takes long, or loses a row."""
    reached: Counter[str] = Counter()
    failures: list[str] = []
    # Started afresh: threads of the libraries do not survive a fork.
    context = multiprocessing.get_context("spawn")
    workers = min(4, os.cpu_count() or 1)
    with ProcessPoolExecutor(workers, mp_context=context, initializer=warm_up) as pool:
        starts = range(0, FILES, _TOGETHER)
        ends = range(_TOGETHER, FILES + _TOGETHER, _TOGETHER)
        for came, failed in pool.map(tried, starts, ends):
            reached += came
            failures += failed
    shown = "\n".join(sorted(failures, key=len)[:_MOST_FAILURES_SHOWN])
    assert not failures, f"{len(failures)} of {FILES} files failed.\n{shown}"
    assert sum(reached.values()) >= 20_000
    # Damage that only ever leads to a refusal would show nothing.
    assert reached["computed"] > 0.3 * FILES
    assert reached["stopped"] > 0.05 * FILES


def test_files_follow_from_their_number() -> None:
    """A failure can be repeated: the same number makes the same tables again."""
    first = [made(number) for number in range(40)]
    assert first == [made(number) for number in range(40)]
    assert len({tables.records for tables in first}) == 40


def test_sound_files_are_read_and_computed(tmp_path: Path) -> None:
    """The tables that damage sets out from are themselves without a fault that stops."""
    for tables in seeds():
        assert travel(tables, tmp_path, thorough=True, answers=True) == "computed"
