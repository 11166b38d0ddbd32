"""What every result is accompanied by: cautions, and the assumptions that the model makes for every truss."""

CAUTIONS = (
    "These results are a first estimate for pricing. A licensed engineer and the local building code decide what is "
    "built; have the design confirmed before anything is cut.",
    "Connections are not designed: no plates, nails, bolts, splices or heel joints are sized, and their slip and the "
    "timber they need are not in the numbers. They can call for larger members than those listed.",
    "Bracing is not designed. Restraint of the members across the truss is taken as the job says and has to be built "
    "so, together with the bracing that carries its forces and steadies the whole roof.",
    "Handling, lifting, erection and temporary bracing are not looked at; an unbraced truss can fail under its own "
    "weight.",
    "Anchors, walls, headers and foundations are not designed. The uplift and sideways reactions listed have to be "
    "held down and carried to the ground by others.",
    "Only the loads listed act. Drifts against higher walls or parapets, valleys, hips, sliding snow, ponding, solar "
    "panels, tanks, hoists, seismic load, tornado, fire and impact are left out unless the job gives them as loads.",
    "Wind is that on the structure as a whole. Pressures on components and cladding are higher near ridges, eaves and "
    "corners; where they apply to a truss, its tails, members and hold-downs need more than is listed. Wind on upright "
    "faces, such as walls and the end posts of a monopitch, is not laid on the trusses.",
    "Ground snow load and wind speed are as the job gives them; confirm them with the authority for the site.",
    "Timber is taken as graded, straight, undamaged and untreated, unless the job says otherwise; no allowance is made "
    "for notches, holes or cuts.",
    "'Met' says that the listed rules give a ratio of at most 1.00 under the listed loads; it is no approval.",
)

SHORT_CAUTIONS = (
    "A first estimate for pricing: a licensed engineer and the local building code decide what is built.",
    "Connections, bracing, handling and erection, anchors and foundations are not designed here.",
    "Read the sheets Cautions and Assumptions before this quote is used.",
)
# a terminal has no sheets to read
TERMINAL_CAUTIONS = (
    *SHORT_CAUTIONS[:2],
    "`rooftruss quote` writes all cautions and assumptions into the workbook: read them.",
)

MODEL_ASSUMPTIONS = (
    "Each truss is a plane frame of straight, uniform members on their centre lines; elastic, small movements.",
    "Chords run through over panel points. Webs are pinned at both ends. The top and bottom chord are pinned to each "
    "other at the heel, the two top chords at the peak; the members of a custom truss are pinned where the job says "
    "so.",
    "Where a heel is raised, its post stands on the bottom chord: the timber across the grain is checked over the "
    "bearing or the depth of the post, whichever is shorter.",
    "Deflections in the middle of chord panels are held against the limit of the whole span; the sag of a chord "
    "between its own panel points has no limit of its own.",
    "A chord piece longer than the longest stock is spliced at a panel point; the splice carries no moment.",
    "The tail (overhang) continues the top chord beyond the heel.",
    "Pin at the left bearing, roller at the right; a custom truss is held as the job says. Bearings count at the "
    "middle of the wall plates: the span of the analysis is the out-to-out span less one bearing length.",
    "Joints neither slip nor stand out of centre, and have no size; the wall plates do not settle.",
    "Dead load acts on the slope length, snow and roof live load on plan, wind normal to the surface, ceiling loads on "
    "the bottom chord; each truss carries a strip as wide as the spacing.",
    "Without an overhang, the roof over the outer half of the bearing loads the heel joint.",
    "Self-weight is the volume of the members on their centre lines times the density of their grade; connectors are "
    "left out.",
    "The least dead load (where the job gives one) is used where dead load resists uplift.",
    "All members of a group (top chord with tails, bottom chord, webs) have one size and grade; the worst of them "
    "governs.",
    "The largest axial force and the largest moment of a member under one combination are taken in one place, wherever "
    "along the member they are.",
    "Cases of one action exclude each other within a combination; point loads join every case of their action.",
    "Deflections are of the centre lines under the service combinations, shear deformation left out; sideways movement "
    "is that of the roller.",
    "The timber volume is that of the members on their centre lines, without cutting waste.",
)
