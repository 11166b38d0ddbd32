"""The sheets of the quote workbook, each written by one function."""

from collections.abc import Sequence
from math import atan, degrees

from rooftruss.basis.job import Job
from rooftruss.design.design import Design
from rooftruss.design.idle import idle_members
from rooftruss.output.case_grids import cases_grids
from rooftruss.output.cautions import SHORT_CAUTIONS
from rooftruss.output.idealisation_grids import idealisations_grid
from rooftruss.output.job_grids import assumptions_grid, cautions_grid, combinations_grid, quote_grid
from rooftruss.output.numbering import Numbering
from rooftruss.output.picture import picture
from rooftruss.output.schedule import Grid, shown_grid
from rooftruss.output.truss_grids import (
    deflections_grid,
    loading_grid,
    members_grid,
    named_combinations_grid,
    reactions_grid,
)
from rooftruss.output.workbook.chart import PointSheet, elevation, frame_of
from rooftruss.output.workbook.letters import width_for
from rooftruss.output.workbook.sheet import LINE_HEIGHT, Page, for_print
from rooftruss.units import shown

QUOTE_WIDTHS = (7, 8.5, 10, 7, 7, 8, 9, 15.5, 15.5, 15.5, 9, 9.5, 9.5, 10, 8.5, 8.5, 7, 17)
TRUSS_WIDTHS = (11, 12, 9, 16.5, 7.5, 8.5, 5.5, 11.5, 5.5, 8.5, 5.5, 8.5, 5.5, 10.5, 5.5, 9, 24.5, 15.5, 9.5)
REACTION_SLOTS = (1, 2, 5, 6, 7, 8, 9, 10, 11, 14, 15, 16, 17)
DEFLECTION_SLOTS = (1, 2, 3, 4, 6, 7, 17, 8)  # the result last, so that the names of combinations have room
LOADING_SLOTS = (1, 2, 5, 6, 8, 10, 12, 14, 17)
NAMED_SLOTS = (1, 2, 12, 17)
HEAD_ROWS = 5  # title, headings, units and a free row of a grid
FAILURES_SHOWN = 3  # of each truss on the quote
SIGNS = (
    "Tension, bending with tension in the lower edge, and movement up or to the right are positive. "
    "Comb. is the number on the sheet Combinations, a dash where nothing acts."
)
TALLEST_DRAWING = 9.5  # cm, so that drawing and members stand on one page
ROW_HEIGHT = LINE_HEIGHT / 72 * 2.54  # cm, of a row as the spreadsheet makes it


def quote_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """The summary: who and what, one row per truss, what is not met, cautions."""
    page.widths(QUOTE_WIDTHS)
    page.line(job.title or "Roof trusses", "title", 24)
    page.line(
        "   ".join(t for t in (job.client and f"Client: {job.client}", job.number and f"Job: {job.number}") if t),
        "strong",
    )
    scheme = designs[0].run.family.scheme if designs else None
    if scheme:
        page.line(
            f"{scheme.title}. Loads: {scheme.load_standard}. Timber: {designs[0].run.family.timber.name}. "
            "Reactions are those of the combinations of this scheme, load factors included.",
            "note",
        )
    page.row += 1
    grid = quote_grid(designs)
    page.grid(grid, title="", wrap=(7, 8, 9, 17))
    page.row -= 1
    _totals(page, grid)
    _not_met(page, designs)
    page.line("Before you use this quote", "section", 18)
    for text in SHORT_CAUTIONS:
        page.line(text, "strong")
    for_print(page, job, landscape=True, freeze="B7")


def _not_met(page: Page, designs: Sequence[Design]) -> None:
    """The worst failures of each truss that has some."""
    failed = [d for d in designs if not d.passes]
    if not failed:
        return
    page.line("Not met", "section", 18)
    for design in failed:
        for text in (*design.notes, *design.failures[:FAILURES_SHOWN]):
            page.line(f"{design.spec.mark}: {text}", "plain")
        if len(design.failures) > FAILURES_SHOWN:
            page.line(f"{design.spec.mark}: and {len(design.failures) - FAILURES_SHOWN} more, see its sheet", "plain")
    page.row += 1


def _totals(page: Page, grid: Grid) -> None:
    """Sums of quantity, timber and weight over the job."""
    whole = shown_grid(grid, page.units)
    for k, column in enumerate(whole.columns):
        if k in (1, 11, 13):
            page.put(k + 1, sum(float(row[k] or 0) for row in whole.rows), "total", column.number_format, "right")
        else:
            page.put(k + 1, "All" if k == 0 else None, "total")
    page.row += 2


def truss_page(page: Page, points: PointSheet, job: Job, design: Design, numbering: Numbering) -> None:
    """Everything about one truss: elevation, members, reactions, deflections, loading, combinations named."""
    page.widths(TRUSS_WIDTHS)
    page.line(f"Truss {design.spec.mark}", "title", 24)
    page.line(_facts(job, design), "strong")
    page.paragraph(_result(design), "strong" if design.passes else "fail")
    _drawing(page, points, design)
    page.grid(members_grid(design, numbering, idle_members(design)))
    for grid, slots in (
        (reactions_grid(design, numbering), REACTION_SLOTS),
        (deflections_grid(design, numbering), DEFLECTION_SLOTS),
        (loading_grid(design, numbering), LOADING_SLOTS),
        (named_combinations_grid(design, numbering), NAMED_SLOTS),
    ):
        page.block(len(grid.rows) + HEAD_ROWS, repeated=2)
        page.grid(grid, slots)
    page.row -= 1
    page.line(SIGNS)
    for_print(page, job, landscape=True, repeat="1:2", freeze="B3")


def _facts(job: Job, design: Design) -> str:
    spec = design.spec
    parts = [
        f"{spec.quantity} off",
        spec.shape,
        f"span {shown(spec.span, 'length', job.units)}",
        f"pitch {_pitch(spec.pitch, job.units)}",
        f"spacing {shown(spec.spacing, 'size', job.units)}",
        f"overhang {shown(spec.overhang, 'size', job.units)}",
        f"bearing {shown(spec.bearing, 'size', job.units)}",
    ]
    if spec.bottom_pitch is not None:
        parts.insert(4, f"bottom pitch {_pitch(spec.bottom_pitch, job.units)}")
    if spec.heel_height is not None:
        parts.append(f"heel height {shown(spec.heel_height, 'size', job.units)}")
    if spec.plies > 1:
        parts.append(f"{spec.plies} plies")
    return "   ".join(parts)


def _pitch(rise_over_run: float, units: str) -> str:
    """Pitch as the trade of the job writes it.

    >>> _pitch(0.5, "US"), _pitch(0.5, "metric")
    ('6/12', '26.57 deg')
    """
    return f"{12 * rise_over_run:.4g}/12" if units == "US" else f"{degrees(atan(rise_over_run)):.4g} deg"


def _result(design: Design) -> str:
    worst = f"largest ratio {float(design.outcome.worst):.2f}"
    if design.passes:
        return f"All checks met, {worst}."
    return "; ".join((f"NOT met, {worst}", *design.notes, *design.failures[:2]))


def _drawing(page: Page, points: PointSheet, design: Design) -> None:
    drawn = picture(design)
    frame = frame_of(drawn, page.width_cm, TALLEST_DRAWING)
    points.page.line(f"Truss {design.spec.mark}", "section", 18)
    chart = elevation(drawn, points, frame)
    page.sheet.add_chart(chart, f"A{page.row}")
    page.row += int(frame.height / ROW_HEIGHT) + 2


def combinations_page(page: Page, job: Job, designs: Sequence[Design], numbering: Numbering) -> None:
    """Every combination of the job once."""
    grid = combinations_grid(numbering, designs)
    wide: dict[str, float] = {
        "No.": 6,
        "Clause": 18,
        "Combination": 54,
        "Limit state": 22,
        "Load duration": 14,
        "Trusses": 14,
    }
    for k, column in enumerate(grid.columns):
        if column.heading in ("Clause", "Limit state", "Load duration"):  # their words go by the standard
            texts = {str(row[k]) for row in grid.rows}
            wide[column.heading] = max(wide[column.heading], *(width_for(text, inset=True) for text in texts))
    page.widths([wide.get(c.heading, 9) for c in grid.columns])
    page.line(grid.title, "title", 24)
    page.line(
        "A factor multiplies the cases beside it (numbers of the sheet Cases). Cases of one action exclude each other."
    )
    page.row += 1
    page.grid(grid, title="", look="data")
    for_print(page, job, landscape=True, repeat="4:4", freeze="A5")


def cases_page(page: Page, job: Job, designs: Sequence[Design], numbering: Numbering) -> None:
    """All load cases: the values they come from with their clauses, and the loads on the surfaces."""
    grids = cases_grids(designs, numbering)
    abreast = max((len(g.columns) - 5 for g in grids), default=1)
    page.widths((7, 44, 30, 8, *(11,) * abreast, 36))
    page.line("Cases", "title", 24)
    page.line("Characteristic loads, before any factor. Pressure towards the surface, or down, is positive.")
    page.row += 1
    for grid in grids:
        page.grid(grid, title="", wrap=(1, 2, len(grid.columns) - 1), look="data")
    for_print(page, job, landscape=True, repeat="4:4", freeze="A5")


def idealisations_page(page: Page, job: Job, design: Design, numbering: Numbering) -> None:
    """Pin-jointed forces of one truss beside the frame's, case by case."""
    grid = idealisations_grid(design, numbering)
    page.widths((7, 46, 12, 16, 16, 16))
    page.line(grid.title, "title", 24)
    page.line(
        "Unfactored, tension positive. Loads of the pin-jointed truss act at its joints; tails are no part of it."
    )
    page.row += 1
    page.grid(grid, title="", look="data")
    for_print(page, job, landscape=False, repeat="4:5", freeze="A6")


def words_page(page: Page, job: Job, grid: Grid, first: float) -> None:
    """A sheet of sentences: assumptions or cautions."""
    page.widths((first, 100 - first))
    page.line(grid.title, "title", 24)
    page.row += 1
    page.grid(grid, title="", wrap=(0, 1), look="words")
    for_print(page, job, landscape=False, repeat="3:3", freeze="A4")


def assumptions_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """What the job left open and what was taken for it; the model."""
    words_page(page, job, assumptions_grid(job, designs), 26)


def cautions_page(page: Page, job: Job) -> None:
    """The cautions in full."""
    words_page(page, job, cautions_grid(), 6)


def points_page(page: Page, job: Job) -> None:
    """Head of the sheet that holds the points of the drawings."""
    page.widths((12, 9, 9, 2, 12, 9, 9, 2, 14, 9, 9, 2, 9, 9, 9))
    page.line("Geometry", "title", 24)
    page.line("Points of the drawings, on centre lines; x from the middle of the left bearing, y up from it.")
