"""How wide text is in the font of the workbook, so that rows and columns are as large as their text needs."""

PIXELS = 96 / 72  # of a screen in a point
MARGIN = 8  # pixels at the sides of a cell that its text leaves free
INDENT = 9  # pixels
BOLD = 1.08  # bold letters are wider; the widest difference in running text
SHARES = {  # of the size of the letters, in thousandths: metrics of Helvetica, which Arial has too (from memory)
    "'": 191,
    "ijl": 222,
    " !,./:;I[]\\ft|": 278,
    "()-r`{}": 333,
    '"*^': 469,
    "Jcksvxyz": 500,
    "0123456789abdeghnopqu?_#$L": 556,
    "+<=>~": 584,
    "FTZ": 611,
    "&ABEKPSVXY": 667,
    "CDHNRUw": 722,
    "GOQ": 778,
    "Mm": 833,
    "%W": 944,
}
WIDEST = 1015  # for any other letter
_SHARE = {letter: share for letters, share in SHARES.items() for letter in letters}


def text_width(text: str, size: float = 9, *, bold: bool = False) -> float:
    """Width of one line of text in letters of a size in points, in pixels.

    >>> round(text_width("mid bottom 3"))
    69
    """
    shares = sum(_SHARE.get(letter, WIDEST) for letter in text) / 1000
    return shares * size * PIXELS * (BOLD if bold else 1.0)


def column_pixels(width: float) -> float:
    """Pixels of a column of a width in characters, as spreadsheets make it: 7 a character and 5 of margin."""
    return 7 * width + 5


def room(width: float, *, inset: bool = False) -> float:
    """Pixels for text in a column of a width in characters."""
    return column_pixels(width) - MARGIN - (INDENT if inset else 0)


def width_for(text: str, *, inset: bool = False) -> float:
    """Width in characters of the narrowest column that one line of text fits."""
    return (text_width(text) + MARGIN + (INDENT if inset else 0) - 5) / 7


def lines_of(text: str, pixels: float, *, bold: bool = False) -> int:
    """Lines that text takes where it is broken at its blanks; a longer word is cut.

    >>> lines_of("square to the surface", 80), lines_of("square to the surface", 200)
    (2, 1)
    """
    blank = text_width(" ", bold=bold)
    lines, used = 1, 0.0
    for word in text.split():
        needed = text_width(word, bold=bold)
        if used and used + blank + needed > pixels:
            lines, used = lines + 1, 0.0
        used += needed + (blank if used else 0.0)
        if used > pixels:
            lines += int(used / pixels)
            used %= pixels
    return lines
