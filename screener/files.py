"""Writing files whole: each appears complete or not at all."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from screener.records import InputError


@contextmanager
def whole_file(path: str | Path) -> Iterator[Path]:
    """Write to a temporary neighbour that takes the file's place when the block ends well."""
    target = Path(path)
    try:
        handle, name = tempfile.mkstemp(dir=target.parent, prefix=f".{target.stem}.", suffix=target.suffix)
    except OSError as problem:
        raise InputError(f"{target}: can't be written ({problem.strerror})") from None
    os.close(handle)
    os.unlink(name)  # some writers refuse a file that exists
    try:
        yield Path(name)
        os.replace(name, target)
    except PermissionError as problem:
        raise InputError(f"{target}: can't be written; is it open in another program? ({problem.strerror})") from None
    finally:
        for leftover in (name, f"{name}-journal", f"{name}-wal", f"{name}-shm"):
            if os.path.exists(leftover):
                os.unlink(leftover)


def write_text(path: str | Path, text: str) -> None:
    with whole_file(path) as temporary:
        temporary.write_text(text, encoding="utf-8")
