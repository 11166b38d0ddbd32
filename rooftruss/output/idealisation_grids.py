"""Pin-jointed forces beside the frame's, case by case."""

from rooftruss.design.design import Design
from rooftruss.design.idealisations import idealisations
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Column, Grid


def idealisations_grid(design: Design, numbering: Numbering) -> Grid:
    """Every case and member of one truss: axial force with pinned joints, in the frame, and the bending left out."""
    found = idealisations(design)
    names = design.run.members.names
    rows = tuple(
        (
            numbering.cases[head.name],
            head.name if k == 0 else "",
            name,
            float(found.pin_jointed[c, k]),
            float(found.frame[c, k]),
            float(found.moment[c, k]),
        )
        for c, head in enumerate(design.run.cases.heads)
        for k, name in enumerate(names)
    )
    columns = (
        Column("Case", "count"),
        Column("Load case"),
        Column("Member"),
        Column("Axial, pin-jointed", "force"),
        Column("Axial, frame", "force"),
        Column("Bending left out by pins", "moment"),
    )
    return Grid(f"Pin-jointed {design.spec.mark}", columns, rows)
