"""Sizes: for each group the option that makes the truss pass with the least timber.

All candidates go through the same stages as one batch, smallest volume first, in chunks.
"""

from itertools import product

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.design.design import LIMIT, Design, Outcome, outcome_of
from rooftruss.design.family import GROUPS, Choice, Family, Option, family_of, options_of, unbatched
from rooftruss.design.profile import deepest_chord
from rooftruss.design.stages import run
from rooftruss.shapes.forming import LEAST_HEEL, form, heel_offset
from rooftruss.units import shown

Array = NDArray[np.float64]
CHUNK = 48  # candidates per batch: wide enough to share the work, small enough to stop early


def size_truss(job: Job, spec: TrussSpec) -> Design:
    """Sizes of one truss: the least timber volume that passes every check; of equal volumes the options listed first.

    When nothing passes, the design with the fewest failing groups is returned (of those, the one with the smallest
    worst ratio), with a note that says so; its `failures` say what failed. Raises JobError and OutOfScopeError for
    input that does not fit.
    """
    family = unbatched(family_of(job, [spec]))
    options = options_of(spec)
    rows, low = _with_room(family, options, _every(options))
    rows, deep = _with_profile(family, options, rows)
    rows, notes = _by_volume(family, options, rows), (*low, *deep)
    nearest: tuple[tuple[float, float], NDArray[np.intp]] = ((np.inf, np.inf), rows[0])
    for start in range(0, len(rows), CHUNK):
        chunk = rows[start : start + CHUNK]
        outcome = outcome_of(run(family, _choice(options, chunk)))
        if np.any(outcome.passes):
            return finished(family, _choice(options, chunk[int(np.argmax(outcome.passes))]), notes)
        failing = _failing_groups(family, outcome)
        best = int(np.lexsort((outcome.worst, failing))[0])
        score = (float(failing[best]), float(outcome.worst[best]))
        if score < nearest[0]:
            nearest = (score, chunk[best])
    note = f"none of the {len(rows)} allowed combinations of sizes and grades passes; the nearest is shown"
    return finished(family, _choice(options, nearest[1]), (note, *notes))


def _every(options: dict[str, tuple[Option, ...]]) -> NDArray[np.intp]:
    """All choices (candidate, group) in the order the job lists them."""
    return np.array(list(product(*(range(len(options[g])) for g in GROUPS))))


def _with_room(
    family: Family, options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]
) -> tuple[NDArray[np.intp], tuple[str, ...]]:
    """The choices that a raised heel has room for, and a note on those left out; the shallowest where it has for none,
    for a message about the least that would do."""
    if not family.layout.raised_heel:
        return rows, ()
    depth = _depths(options, rows)
    room = heel_offset(family.size, depth["top chord"], depth["bottom chord"]) >= LEAST_HEEL
    if np.all(room):
        return rows, ()
    keep = np.flatnonzero(room) if np.any(room) else [int(np.argmin(depth["top chord"] + depth["bottom chord"]))]
    deepest = [float(depth[g].max()) for g in GROUPS[:2]]
    least = float(family.size.heel_height - heel_offset(family.size, *deepest)) + LEAST_HEEL
    return rows[keep], (
        f"the raised heel is too low for {len(rows) - len(keep)} of {len(rows)} combinations of sizes and grades, "
        f"which were left out; a heel of {shown(least, 'size', family.job.units)} has room for all",
    )


def _with_profile(
    family: Family, options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]
) -> tuple[NDArray[np.intp], tuple[str, ...]]:
    """The choices whose chords are shallow enough for the simplified analysis, where the job asks for it, and a note on
    those left out; all where none is, since the run says what is wrong."""
    rules = family.timber.simplified
    if rules is None:
        return rows, ()
    depth = _depths(options, rows)
    most = deepest_chord(form(family.layout, family.size, depth["top chord"], depth["bottom chord"]), rules)
    keep = np.flatnonzero(np.maximum(depth["top chord"], depth["bottom chord"]) < most)
    if len(keep) in (0, len(rows)):
        return rows, ()
    return rows[keep], (
        f"{len(rows) - len(keep)} of {len(rows)} combinations of sizes and grades have a chord too deep for the "
        f"simplified analysis ({rules.clause}(1)) and were left out",
    )


def _depths(options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]) -> dict[str, Array]:
    """Depth of each group in every choice (candidate,) [m]."""
    return {g: np.array([o.section.depth for o in options[g]])[rows[:, k]] for k, g in enumerate(GROUPS)}


def _failing_groups(family: Family, outcome: Outcome) -> Array:
    """Number of groups with a member over its limit, of each candidate; bearings and deflections count as one each."""
    groups = np.array(family.topology.groups)
    over = outcome.utilisation.value > LIMIT
    counts = [over[..., groups == group].any(axis=-1) for group in GROUPS]
    counts += [(outcome.bearing.value > LIMIT).any(axis=-1), (outcome.deflection.ratio > LIMIT).any(axis=-1)]
    return np.asarray(np.sum(counts, axis=0, dtype=float))


def _choice(options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]) -> Choice:
    return Choice(options=options, index={g: rows[..., k] for k, g in enumerate(GROUPS)})


def _by_volume(family: Family, options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]) -> NDArray[np.intp]:
    """Choices (candidate, group), least timber volume first; equal volumes stay in order.

    Raises JobError when no chord depth fits under a raised heel.
    """
    depth = _depths(options, rows)
    length = form(family.layout, family.size, depth["top chord"], depth["bottom chord"]).length
    groups = np.array(family.topology.groups)
    volume = np.zeros(len(rows))
    for k, group in enumerate(GROUPS):
        area = np.array([o.section.breadth * o.section.depth for o in options[group]])
        volume += area[rows[:, k]] * length[..., groups == group].sum(axis=-1)
    return rows[np.argsort(np.round(volume, 9), kind="stable")]


def finished(family: Family, choice: Choice, notes: tuple[str, ...]) -> Design:
    """The design of an unbatched family with an unbatched choice."""
    done = run(family, choice)
    return Design(spec=family.spec, run=done, outcome=outcome_of(done), notes=notes)
