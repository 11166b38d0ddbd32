"""The job: everything the estimator gave, checked, in SI and frozen. `jobform` makes it from a file."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path


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


@dataclass(frozen=True, slots=True, kw_only=True)
class PointLoad:
    """A point load [N, downwards] on a chord at a horizontal distance [m] from the outside of the left bearing."""

    action: str  # "D", "L", "Lr", "S", "W"
    chord: str  # "top" or "bottom"
    position: float
    force: float
    note: str


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadSpec:
    """Area loads [Pa] and point loads of one truss; roof dead on the slope, roof live on plan."""

    roof_dead: float
    roof_dead_least: float
    ceiling_dead: float
    ceiling_dead_least: float
    roof_live: float
    ceiling_live: float
    points: tuple[PointLoad, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitSpec:
    """Deflection limits: kind of ceiling (row of the limits table) and the roller movement allowed [m]."""

    ceiling: str
    horizontal: float


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
    given: Mapping[str, object] = field(default_factory=dict, repr=False)  # as written: a like job is read from it
