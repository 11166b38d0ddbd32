"""Saving a workbook: the same bytes for the same content."""

from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any
from zipfile import ZIP_DEFLATED, ZipFile, ZipInfo

from rooftruss.output.saving import replace_file

if TYPE_CHECKING:
    from openpyxl import Workbook

LONG_AGO = datetime(1980, 1, 1)  # the first date an archive can hold; stands for "not dated"


class _UndatedArchive(ZipFile):
    """An archive whose parts all have the same date."""

    def writestr(
        self, name: Any, data: Any, compress_type: int | None = None, compresslevel: int | None = None
    ) -> None:
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
