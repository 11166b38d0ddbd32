"""Saving a workbook: whole or not at all, and the same bytes for the same content."""

import os
import tempfile
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any
from zipfile import ZIP_DEFLATED, ZipFile, ZipInfo

from rooftruss.errors import OutputError

if TYPE_CHECKING:
    from openpyxl import Workbook

LONG_AGO = datetime(1980, 1, 1)  # the first date an archive can hold; stands for "not dated"


class _UndatedArchive(ZipFile):
    """An archive whose parts all have the same date."""

    def writestr(self, name: Any, data: Any, compress_type: int | None = None, compresslevel: int | None = None) -> None:
        info = ZipInfo(name if isinstance(name, str) else name.filename, LONG_AGO.timetuple()[:6])
        info.compress_type = ZIP_DEFLATED
        info.external_attr = 0o600 << 16
        super().writestr(info, data, compress_type, compresslevel)

    def write(self, filename: Any, arcname: Any = None, *_: Any, **__: Any) -> None:
        self.writestr(str(arcname or filename), Path(filename).read_bytes())


def save(book: "Workbook", path: Path) -> None:
    """Write a workbook to `path`. A file that is there stays as it is unless the new one is complete.

    Raises OutputError with the path and what to do.
    """
    from openpyxl.writer.excel import ExcelWriter

    book.properties.created = book.properties.modified = LONG_AGO
    replace_file(path, lambda part: ExcelWriter(book, _UndatedArchive(part, "w", ZIP_DEFLATED)).save())


def replace_file(path: Path, write: Any) -> None:
    """Call `write` with a new file beside `path`, then move that into its place.

    Raises OutputError; a half-written file is removed.
    """
    part = None
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
