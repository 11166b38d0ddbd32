"""Reads the bytes of a job file as TOML and says in one line why it cannot."""

import tomllib
from collections.abc import Mapping
from pathlib import Path

from rooftruss.errors import JobError

LARGEST_FILE = 1_000_000  # bytes


def read_toml(path: Path) -> Mapping[str, object]:
    """Tables of a TOML file. Raises JobError with one clear line for anything that is none."""
    try:
        if path.is_dir():
            raise JobError(f"{path.name}: is a folder; give the job file in it")
        size = path.stat().st_size
        if size > LARGEST_FILE:
            raise JobError(
                f"{path.name}: has {size:,} bytes; a job file has at most {LARGEST_FILE:,}. Is it another file?"
            )
        raw = path.read_bytes()
    except FileNotFoundError:
        raise JobError(f"{path}: there is no such file; `rooftruss new {path.name}` writes a fresh job form") from None
    except (OSError, ValueError) as error:
        raise JobError(f"{path}: cannot be read ({getattr(error, 'strerror', None) or error})") from None
    text = _text(path.name, raw)
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise JobError(f"{path.name}: brackets are nested too deeply for a job file") from None
    except ValueError as error:  # TOMLDecodeError, and integers of thousands of digits
        raise JobError(f"{path.name}: is not valid TOML: {error}; text and quantities stand in quotes") from None


def _text(name: str, raw: bytes) -> str:
    if not raw.strip():
        raise JobError(f"{name}: is empty; `rooftruss new FILE.toml` writes a fresh job form")
    if raw.startswith(b"PK"):
        raise JobError(f"{name}: is an Excel or zip file, not TOML; give an Excel form the ending .xlsx")
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise JobError(f"{name}: is not UTF-8 text (line {line}); save it as UTF-8 in the editor") from None
    if "\0" in text:
        raise JobError(f"{name}: holds zero bytes, so it is no text file; save it as UTF-8 in the editor")
    return text
