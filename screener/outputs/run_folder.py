"""A run's folder: making it, stamping it, finding it again."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path

from screener.files import whole_file, write_text
from screener.records import InputError

__all__ = ["file_hash", "make_folder", "read_run", "whole_file", "write_json", "write_text"]


def make_folder(path: str | Path) -> Path:
    """The folder, made if needed; InputError where that can't be."""
    folder = Path(path)
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except (FileExistsError, NotADirectoryError):
        raise InputError(f"{folder}: is a file, not a folder; give another --out") from None
    except OSError as problem:
        raise InputError(f"{folder}: the output folder can't be made ({problem.strerror})") from None
    return folder


def write_json(path: Path, content: dict) -> None:
    write_text(path, json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n")


def file_hash(path: str | Path) -> str:
    """SHA-256 of a file, in pieces; of a folder's files by name where the path is a folder."""
    path = Path(path)
    digest = hashlib.sha256()
    for part in sorted(p for p in path.rglob("*") if p.is_file()) if path.is_dir() else [path]:
        with open(part, "rb") as stream:
            while piece := stream.read(1 << 20):
                digest.update(piece)
    return digest.hexdigest()


def read_run(folder: str | Path) -> dict:
    """run.json of a run; InputError when the folder is not a run."""
    path = Path(folder) / "run.json"
    try:
        return json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise InputError(f"{folder}: not a run; a run is a folder made by 'joint-screener screen' (no run.json in it)") from None
    except (json.JSONDecodeError, UnicodeDecodeError):
        raise InputError(f"{path}: is damaged; screen the inventory again") from None
