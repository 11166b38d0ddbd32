"""Files that are written whole or not at all."""

import os
import tempfile
from collections.abc import Callable
from pathlib import Path

from rooftruss.errors import OutputError


def replace_file(path: Path, write: Callable[[Path], object]) -> None:
    """Call `write` with a new file beside `path`, then move that into its place.

    Raises OutputError; a half-written file is removed.
    """
    part = None
    if path.exists() and not path.is_file() and not path.is_dir():  # a rename would destroy a device or a pipe
        raise OutputError(f"{path} is not an ordinary file; write to another place")
    try:
        handle, name = tempfile.mkstemp(prefix=f".{path.stem[:40]}-", suffix=path.suffix, dir=path.parent)
        os.close(handle)
        part = Path(name)
        write(part)
        os.chmod(part, _mode(path))
        os.replace(part, path)
        part = None
    except OSError as error:
        raise OutputError(_told(path, error)) from error
    finally:
        if part is not None:
            part.unlink(missing_ok=True)


def _mode(path: Path) -> int:
    """Permissions of the file that is replaced, or those a new file gets."""
    if path.exists():
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def _told(path: Path, error: OSError) -> str:
    if not path.parent.is_dir():
        return f"{path}: there is no folder {path.parent}; make it first, or write to another place"
    if path.is_dir():
        return f"{path} is a folder; give the name of a file in it"
    if isinstance(error, PermissionError):
        return (
            f"{path} cannot be written: {error.strerror}. If it is open in a spreadsheet program, close it there; "
            "else write to another place"
        )
    return f"{path} cannot be written: {error.strerror or error}; write to another place"
