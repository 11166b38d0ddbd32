"""A sheet that is filled from the top: titles, notes and grids; and how it prints."""

from collections.abc import Callable, Iterable, Sequence
from textwrap import wrap
from typing import TYPE_CHECKING, Any

from rooftruss.basis.job import Job
from rooftruss.output.schedule import NOTHING, Grid, ShownCell, ShownColumn, ShownGrid, shown_grid
from rooftruss.output.workbook.letters import MARGIN, column_pixels, lines_of, room
from rooftruss.output.workbook.styles import Looks, looks_like_formula, plain

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

LINE_HEIGHT = 12.75  # points, of a row, and of each line in it
PAPER = {"US": (8.5 * 72, 11 * 72), "metric": (210 / 25.4 * 72, 297 / 25.4 * 72)}  # letter, A4; points
SIDE, ABOVE, BELOW = 0.5, 0.7, 0.65  # margins [in]
Emphasis = Callable[[Sequence[ShownCell]], bool]
FORBIDDEN = str.maketrans("", "", "[]:*?/\\")
WIDEST_NAME = 31


def sheet_name(wanted: str, taken: Sequence[str]) -> str:
    """A name a sheet may have, unlike any other in the book whatever the case of the letters.

    >>> sheet_name("T1/a", ["Quote"]), sheet_name("t1", ["T1"]), sheet_name("'", [])
    ('T1a', 't1 (2)', 'Truss')
    """
    base = plain(wanted).translate(FORBIDDEN).strip().strip("'")[:WIDEST_NAME].strip() or "Truss"
    known = {t.casefold() for t in taken} | {"history"}
    name, count = base, 1
    while name.casefold() in known:
        count += 1
        ending = f" ({count})"
        name = base[: WIDEST_NAME - len(ending)] + ending
    return name


class Page:
    """Writes one worksheet from the top down; `row` is the next free row."""

    def __init__(self, sheet: "Worksheet", looks: Looks, units: str) -> None:
        self.sheet, self.looks, self.units = sheet, looks, units
        self.row = 1
        self._widths: tuple[float, ...] = ()
        self._page_starts = [1]
        sheet.sheet_view.showGridLines = False
        sheet.sheet_format.defaultRowHeight, sheet.sheet_format.customHeight = LINE_HEIGHT, True

    def widths(self, widths: Sequence[float]) -> None:
        """Widths of the columns from A on, in characters."""
        from openpyxl.utils import get_column_letter

        self._widths = tuple(widths)
        for k, width in enumerate(widths, start=1):
            self.sheet.column_dimensions[get_column_letter(k)].width = width

    @property
    def columns(self) -> int:
        """Number of columns that have a width, those that are printed."""
        return len(self._widths)

    def put(self, column: int, value: ShownCell, look: str = "body", number_format: str = "", align: str = "") -> None:
        """Write one cell of the current row; text stays text whatever it looks like."""
        cell: Any = self.sheet.cell(self.row, column)
        if isinstance(value, str):
            text = plain(value)
            cell.value = text
            cell.data_type = "s"
            cell._style = self.looks.style(look, "", align, quoted=looks_like_formula(text))
            return
        cell.value = value
        cell._style = self.looks.style(look, number_format, align)

    def line(self, text: str, look: str = "note", height: float | None = None) -> None:
        """One line of text over the columns to its right."""
        self.put(1, text, look)
        if height:
            self.sheet.row_dimensions[self.row].height = height
        self.row += 1

    def block(self, rows: int, repeated: int) -> None:
        """Begin a new landscape page where the next `rows` would not fit the rest of this one.

        repeated: rows that every page begins with.
        """
        from openpyxl.worksheet.pagebreak import Break

        depth, width = PAPER[self.units]
        scale = min(1.0, (width - 2 * SIDE * 72) / (self.width_cm / 2.54 * 72))
        room = (depth - (ABOVE + BELOW) * 72) / scale
        first = self._page_starts[-1]
        known = self.sheet.row_dimensions
        rows_used = (*range(1, repeated + 1), *range(first, self.row))
        heights = [(known[r].height if r in known else None) or LINE_HEIGHT for r in rows_used]
        if self.row > first and sum(heights) + rows * LINE_HEIGHT > room:
            self.sheet.row_breaks.append(Break(id=self.row - 1))
            self._page_starts.append(self.row)

    @property
    def width_cm(self) -> float:
        """Width of the columns on screen, 96 pixels an inch."""
        return sum(map(column_pixels, self._widths)) / 96 * 2.54

    def paragraph(self, text: str, look: str = "body") -> None:
        """Text over the whole width, on as many lines as it needs."""
        last = len(self._widths)
        self.sheet.merge_cells(start_row=self.row, end_row=self.row, start_column=1, end_column=last)
        self.put(1, text, look, align="lines")
        pixels = sum(map(column_pixels, self._widths)) - MARGIN
        self._height([lines_of(text, pixels, bold=look in ("strong", "fail"))])
        self.row += 1

    def grid(
        self,
        grid: Grid,
        slots: Sequence[int] = (),
        *,
        title: str | None = None,
        wrap: Sequence[int] = (),
        look: str = "body",
    ) -> None:
        """A grid with its title and headings; `slots` are the sheet columns of its columns, A on when left out.

        wrap: columns (of the grid, from 0) whose text may take several lines. look: "body", "words" for sentences, or
        "data" for long grids, with a line under every fifth row only, whose empty cells are not written.
        """
        shown = shown_grid(grid, self.units)
        slots = slots or range(1, len(shown.columns) + 1)
        heading = grid.title if title is None else title
        if heading:
            self.line(heading, "section", 18)
        self._headings(shown.columns, slots)
        self._rows(shown, slots, sorted(wrap), look)
        self.row += 1

    def _headings(self, columns: Sequence[ShownColumn], slots: Sequence[int]) -> None:
        place = dict(zip(slots, columns, strict=True))
        most = max(_lines(c.heading, self._widths[slot - 1]) for slot, c in place.items())
        units = any(c.unit for c in columns)
        lines = (("head" if units else "heads", 4 + 11 * most), *((("unit", 11),) if units else ()))
        for look, height in lines:
            for slot in range(1, max(slots) + 1):
                column = place.get(slot)
                text = "" if column is None else column.unit if look == "unit" else column.heading
                self.put(slot, text or None, look, align=_align(column, slot) if column else "")
            self.sheet.row_dimensions[self.row].height = height
            self.row += 1

    def _rows(self, shown: ShownGrid, slots: Sequence[int], wrap: Sequence[int], usual: str) -> None:
        aligned = [
            ("lines" if slot == 1 else "wrap") if k in wrap else _align(c, slot)
            for k, (c, slot) in enumerate(zip(shown.columns, slots, strict=True))
        ]
        formats = [c.number_format for c in shown.columns]
        fails = _not_met(shown.columns)
        gaps = sorted(set(range(1, max(slots) + 1)) - set(slots))
        for n, row in enumerate(shown.rows, start=1):
            look = "fail" if fails(row) else "body" if usual == "data" and n % 5 == 0 else usual
            for k, (slot, cell) in enumerate(zip(slots, row, strict=True)):
                if cell is not None or look != "data":
                    self.put(slot, cell, look, formats[k], "right" if cell == NOTHING else aligned[k])
            for slot in gaps if look != "data" else ():
                self.put(slot, None, look)
            self._height(
                lines_of(str(row[k]), room(self._widths[slots[k] - 1], inset=slots[k] > 1), bold=look == "fail")
                for k in wrap
                if row[k] is not None
            )
            self.row += 1

    def _height(self, counts: Iterable[int]) -> None:
        """Make the current row high enough for texts of these numbers of lines."""
        lines = max(counts, default=1)
        if lines > 1:
            self.sheet.row_dimensions[self.row].height = LINE_HEIGHT * lines + 1


def _lines(heading: str, width: float) -> int:
    """Lines that a heading takes in a column of a width in characters.

    >>> _lines("Span", 8), _lines("Worst ratio", 7), _lines("Limit and service combination", 11.5)
    (1, 2, 3)
    """
    return len(wrap(heading, max(int(width), 1), break_long_words=False, break_on_hyphens=False))


def _align(column: ShownColumn, slot: int) -> str:
    """Numbers right, but numbers that are names (in the first column) left as text is."""
    if column.number_format and not (slot == 1 and column.number_format == "0"):
        return "right"
    return "left" if slot == 1 else "inset"


def _not_met(columns: Sequence[ShownColumn]) -> Emphasis:
    """Rows whose result column says that a limit is not met."""
    at = [k for k, c in enumerate(columns) if c.heading == "Result"]
    return lambda row: any(str(row[k]).startswith("NOT") for k in at)


def for_print(page: Page, job: Job, *, landscape: bool, repeat: str = "", freeze: str = "") -> None:
    """Paper, margins, running lines, repeated rows ("1:3"), frozen panes ("B4"); all columns fit one page width."""
    from openpyxl.utils import get_column_letter
    from openpyxl.worksheet.properties import PageSetupProperties

    sheet = page.sheet
    sheet.page_setup.paperSize = sheet.PAPERSIZE_LETTER if job.units == "US" else sheet.PAPERSIZE_A4
    sheet.page_setup.orientation = "landscape" if landscape else "portrait"
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr = PageSetupProperties(fitToPage=True)
    margins = sheet.page_margins
    margins.left = margins.right = SIDE
    margins.top, margins.bottom, margins.header, margins.footer = ABOVE, BELOW, 0.35, 0.35
    sheet.print_options.horizontalCentered = True
    sheet.print_area = f"A1:{get_column_letter(page.columns)}{max(page.row - 1, 1)}"
    _running_lines(sheet, job)
    if repeat:
        sheet.print_title_rows = repeat
    if freeze:
        sheet.freeze_panes = freeze


def _running_lines(sheet: "Worksheet", job: Job) -> None:
    above: Any = sheet.oddHeader
    below: Any = sheet.oddFooter
    texts = {
        above.left: running(f"{job.number}  {job.title}".strip()),
        above.right: running(job.client),
        below.left: "&A",
        below.center: "A first estimate. Read the sheet Cautions.",
        below.right: "Page &P of &N",
    }
    for part, text in texts.items():
        part.text, part.size = text, 8


def running(text: str) -> str:
    """Text for a header or footer, where "&" begins a command and length is limited.

    >>> running("Barn & shed")
    'Barn && shed'
    """
    return plain(text).replace("\n", " ")[:90].replace("&", "&&")
