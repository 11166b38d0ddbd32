"""Reads the bytes of a job file as TOML and says in one line why it cannot."""

import tomllib
from collections.abc import Mapping
from pathlib import Path

from rooftruss.errors import JobError

LARGEST_FILE = 1_000_000  # bytes


def read_toml(path: Path) -> Mapping[str, object]:
    """Tables of a TOML file. Raises JobError with one clear line for anything that is none."""
    raw = _bytes(path)
    if len(raw) > LARGEST_FILE:
        raise JobError(f"{path.name}: is too large; a job file has at most {LARGEST_FILE:,} bytes. Is it another file?")
    text = _text(path.name, raw)
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise JobError(f"{path.name}: brackets are nested too deeply for a job file") from None
    except ValueError as error:  # TOMLDecodeError, and integers of thousands of digits
        raise JobError(f"{path.name}: is not valid TOML: {error}; text and quantities stand in quotes") from None


def _bytes(path: Path) -> bytes:
    """Content of a file, cut off soon after the size a job file may have."""
    try:
        if path.is_dir():
            raise JobError(f"{path.name}: is a folder; give the job file in it")
        with path.open("rb") as file:
            return file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise JobError(
            f"{path.name}: there is no such file ({path}); `rooftruss new FILE` writes a fresh form"
        ) from None
    except OSError as error:
        raise JobError(f"{path.name}: cannot be read ({error.strerror})") from None


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
