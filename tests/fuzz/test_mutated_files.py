"""Twenty thousand damaged files: refused in plain words, or read without a row lost."""

from __future__ import annotations

import dataclasses
import faulthandler
import multiprocessing
import os
import tempfile
import time
import traceback
import warnings
from collections import Counter
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path

import pytest

from tests.fuzz.journey import in_time, travel
from tests.fuzz.mutations import made

FILES = 20_400
_TOGETHER = 100
_SECONDS_BEFORE_THE_END = 60
_MOST_SHOWN = 2_000


def tried(first: int, after: int) -> tuple[Counter[str], list[str]]:
    """How far the files with these numbers came, and what went wrong with each that failed."""
    reached: Counter[str] = Counter()
    failures = []
    warnings.simplefilter("error")
    with tempfile.TemporaryDirectory() as folder:
        for number in range(first, after):
            # What hangs where no alarm is heard ends this process, with its place shown.
            faulthandler.dump_traceback_later(_SECONDS_BEFORE_THE_END, exit=True)
            tables = made(number)
            try:
                with in_time():
                    came = travel(
                        tables,
                        Path(folder),
                        thorough=number % 2 == 0,
                        answers=number % 10 == 0,
                    )
                reached[came] += 1
            except Exception:
                failures.append(f"made({number}):\n{traceback.format_exc()}")
            except BaseException as error:
                # A panic inside a reader is no Exception.
                if isinstance(error, KeyboardInterrupt | SystemExit):
                    raise
                failures.append(f"made({number}):\n{traceback.format_exc()}")
    faulthandler.cancel_dump_traceback_later()
    return reached, failures
