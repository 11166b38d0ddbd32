"""The job: everything the estimator gave, checked, in SI and frozen. `jobform` makes it from a file."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from rooftruss.basis.grades import Grade


@dataclass(frozen=True, slots=True, kw_only=True)
class Assumption:
    """A value the job file left open, and what was used for it."""

    place: str  # "[site] kzt" or "[[truss]] T1"
    text: str  # "topographic factor K_zt = 1.0 (flat ground; ASCE 7-22, 26.8)"


@dataclass(frozen=True, slots=True, kw_only=True)
class Restraint:
    """Lateral restraint of a member across the plane of the truss.

    kind: "sheathed" (outer edge held throughout), "spacing" (both edges held at `spacing` [m]),
    "midpoint", "third points", "none".
    """

    kind: str
    spacing: float | None = None

    def __str__(self) -> str:
        return f"{self.spacing:.4g} m" if self.kind == "spacing" and self.spacing else self.kind


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupTimber:
    """Allowed grades and sizes of one member group, in the order given (earlier is preferred at equal volume)."""

    grades: tuple[str, ...]
    sizes: tuple[str, ...]
    restraint: Restraint


@dataclass(frozen=True, slots=True, kw_only=True)
class TimberSpec:
    """Timber of one truss. `options` holds what only one timber standard asks for, by its job-file key
    (NDS: moisture, temperature, incised, repetitive, buckling_stiffness; EN: service_class)."""

    groups: Mapping[str, GroupTimber]  # "top chord", "bottom chord", "web"
    longest_stock: float  # [m]
    options: Mapping[str, object]
    own_grades: tuple[Grade, ...] = ()  # those of Job.grades


@dataclass(frozen=True, slots=True, kw_only=True)
class PointLoad:
    """A point load [N, downwards] on a chord at a horizontal distance [m] from the outside of the left bearing."""

    action: str  # "D", "L", "Lr", "S", "W"
    chord: str  # "top" or "bottom"
    position: float
    force: float
    note: str


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseLoad:
    """A uniform load of a case of the job's own: on chord members by name, or on a surface ("roof": all four of it).

    kind as in loads.roof.SurfaceLoad; pressure [Pa] or line load [N per m of what the kind measures], the other is
    None; x_from, x_to [m] from the outside of the left bearing, None: to the end of what carries it.
    """

    members: tuple[str, ...]
    surface: str
    kind: str
    pressure: float | None
    line: float | None
    x_from: float | None
    x_to: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class OwnCase:
    """A load case that the job gives itself. pattern "with": it joins every case of its action (see combinations)."""

    name: str
    action: str
    pattern: str
    loads: tuple[CaseLoad, ...]
    points: tuple[PointLoad, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadSpec:
    """Loads of one truss: area loads [Pa], roof dead on the slope, roof live on plan; point loads; loads that are
    walked along a chord [N], one place at a time; cases of the job's own.

    attic: the word of the job ("" where it says nothing); attic_storage_live [Pa] is zero without storage.
    scheme_options: options of the scheme that the attic of this truss changes.
    """

    roof_dead: float
    roof_dead_least: float
    ceiling_dead: float
    ceiling_dead_least: float
    roof_live: float
    ceiling_live: float
    points: tuple[PointLoad, ...] = ()
    cases: tuple[OwnCase, ...] = ()
    maintenance_load: float = 0.0
    ceiling_point_load: float = 0.0
    attic: str = ""
    attic_storage_live: float = 0.0
    scheme_options: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitSpec:
    """Deflection limits: kind of ceiling (row of the limits table) and the roller movement allowed [m]."""

    ceiling: str
    horizontal: float


@dataclass(frozen=True, slots=True, kw_only=True)
class CustomSpec:
    """Joints, members and bearings of a truss that is given one by one, as rows [m]; see shapes.custom."""

    nodes: tuple[tuple[str, float, float], ...]  # name, x, y
    members: tuple[tuple[str | None, str, str, str, str, bool, bool], ...]  # name, role, start, end, group, two pins
    supports: tuple[tuple[str, bool, bool, float | None], ...]  # node, held across, held up; bearing, None: the truss's


@dataclass(frozen=True, slots=True, kw_only=True)
class TrussSpec:
    """One [[truss]] of the job with every override applied. Lengths [m]; pitches as rise over run [-]."""

    mark: str
    shape: str
    quantity: int
    span: float  # out to out of bearings
    pitch: float
    spacing: float
    overhang: float  # horizontal, from the outside of the bearing to the tail end
    bearing: float  # length of each bearing along the span
    heel_height: float | None
    panels: int | None
    bottom_pitch: float | None
    plies: int
    loads: LoadSpec
    timber: TimberSpec
    custom: CustomSpec | None = None  # of the shape "custom"
    units: str = "US"  # of the job, for messages


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """A whole job file. `site` holds the load standard's own keys, SI numbers or words, every default filled in."""

    source: str  # file name for messages
    folder: Path  # of the file; paths in it (a scheme file) start there
    title: str
    client: str
    number: str
    units: str  # "US" or "metric"
    scheme: str
    scheme_options: Mapping[str, object]
    site: Mapping[str, object]
    limits: LimitSpec
    trusses: tuple[TrussSpec, ...]
    assumptions: tuple[Assumption, ...]
    grades: tuple[Grade, ...] = ()  # of the job itself, beside those of tables/grades
    given: Mapping[str, object] = field(default_factory=dict, repr=False)  # as written: a like job is read from it
