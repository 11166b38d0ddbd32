"""Looks of cells: few, quiet, and readable in grey; one style object for all cells that look alike."""

import re
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from openpyxl import Workbook

INK, LINE, HEAD, FAIL = "FF22303C", "FFC3CBD2", "FFE6EBEF", "FFF2C4BE"
FONT = "Arial"  # fonts of the same widths stand in for it everywhere
FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "'")
CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f\ud800-\udfff\ufffe\uffff]")
LONGEST = 32_000  # characters of a cell; the file format ends at 32 767


class Looks:
    """Styles of one workbook by look.

    Looks: title, section, head (above units), heads (alone), unit, body, data, plain, words, strong, fail, note, total.
    """

    def __init__(self, book: "Workbook") -> None:
        self._sheet = book.worksheets[0]  # only lends the cells that styles are made with its workbook
        self._made: dict[tuple[str, str, str, bool], Any] = {}

    def style(self, look: str, number_format: str = "", align: str = "", *, quoted: bool = False) -> Any:
        """The style of a look; `align` "left", "inset" (left, clear of a number before it), "right", "lines"
        (left, on several lines) or "wrap" (inset, on several lines).

        quoted marks text that a spreadsheet would take for a formula when it is typed again.
        """
        key = (look, number_format, align, quoted)
        if key not in self._made:
            self._made[key] = self._make(*key)
        return self._made[key]

    def _make(self, look: str, number_format: str, align: str, quoted: bool) -> Any:
        from openpyxl.cell.cell import Cell
        from openpyxl.styles import Alignment, Border, Font, PatternFill, Side

        cell: Any = Cell(self._sheet, row=1, column=1)
        size = {"title": 14, "section": 11, "unit": 8, "note": 8}.get(look, 9)
        bold = look in ("title", "section", "head", "heads", "strong", "fail", "total")
        cell.font = Font(name=FONT, size=size, bold=bold, italic=look == "note", color=INK)
        if look in ("head", "heads", "unit"):
            cell.fill = PatternFill("solid", fgColor=HEAD)
        if look == "fail":
            cell.fill = PatternFill("solid", fgColor=FAIL)
        thin, hair = Side(style="thin", color=INK), Side(style="hair", color=LINE)
        lines = {
            "head": Border(top=thin),
            "heads": Border(top=thin, bottom=thin),
            "unit": Border(bottom=thin),
            "total": Border(top=thin, bottom=thin),
            "body": Border(bottom=hair),
            "words": Border(bottom=hair),
            "fail": Border(bottom=hair),
        }
        cell.border = lines.get(look, Border())
        cell.alignment = Alignment(
            horizontal="left" if align in ("wrap", "lines", "inset") else align or None,
            indent=1 if align in ("wrap", "inset") else 0,
            vertical={"head": "bottom", "heads": "bottom", "unit": "bottom", "words": "top"}.get(look, "center"),
            wrap_text=align in ("wrap", "lines") or look in ("head", "heads") or None,
        )
        if number_format:
            cell.number_format = number_format
        if quoted:
            cell.quotePrefix = True
        return cell._style


def plain(text: object) -> str:
    """Text without characters that a spreadsheet file cannot hold.

    >>> plain("a\\x07b")
    'ab'
    """
    return CONTROL.sub("", str(text))[:LONGEST]


def looks_like_formula(text: str) -> bool:
    """Whether a spreadsheet would take the text for a formula if a user typed it.

    >>> looks_like_formula("=1+1"), looks_like_formula("-"), looks_like_formula("T1")
    (True, False, False)
    """
    return len(text) > 1 and text.startswith(FORMULA_STARTS)
