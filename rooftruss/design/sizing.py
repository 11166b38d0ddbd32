"""Sizes: for each group the option that makes the truss pass with the least timber.

All candidates go through the same stages as one batch, smallest volume first, in chunks.
"""

from itertools import product

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.design.design import LIMIT, Design, Outcome, outcome_of
from rooftruss.design.family import GROUPS, Choice, Family, Option, family_of, options_of, unbatched
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
    rows = _candidates(family, options)
    low = _low_heel(family, options, len(rows))
    nearest: tuple[tuple[float, float], NDArray[np.intp]] = ((np.inf, np.inf), rows[0])
    for start in range(0, len(rows), CHUNK):
        chunk = rows[start : start + CHUNK]
        outcome = outcome_of(run(family, _choice(options, chunk)))
        if np.any(outcome.passes):
            return finished(family, _choice(options, chunk[int(np.argmax(outcome.passes))]), low)
        failing = _failing_groups(family, outcome)
        best = int(np.lexsort((outcome.worst, failing))[0])
        score = (float(failing[best]), float(outcome.worst[best]))
        if score < nearest[0]:
            nearest = (score, chunk[best])
    note = f"none of the {len(rows)} allowed combinations of sizes and grades passes; the nearest is shown"
    return finished(family, _choice(options, nearest[1]), (note, *low))


def _low_heel(family: Family, options: dict[str, tuple[Option, ...]], left: int) -> tuple[str, ...]:
    """Note on the choices that a raised heel is too low for."""
    every = int(np.prod([len(options[g]) for g in GROUPS]))
    if left == every:
        return ()
    deepest = [max(o.section.depth for o in options[g]) for g in GROUPS[:2]]
    least = float(family.size.heel_height - heel_offset(family.size, *deepest)) + LEAST_HEEL
    return (
        f"the raised heel is too low for {every - left} of {every} combinations of sizes and grades, which were left "
        f"out; a heel of {shown(least, 'size', family.job.units)} has room for all",
    )


def _failing_groups(family: Family, outcome: Outcome) -> Array:
    """Number of groups with a member over its limit, of each candidate; bearings and deflections count as one each."""
    groups = np.array(family.topology.groups)
    over = outcome.utilisation.value > LIMIT
    counts = [over[..., groups == group].any(axis=-1) for group in GROUPS]
    counts += [(outcome.bearing.value > LIMIT).any(axis=-1), (outcome.deflection.ratio > LIMIT).any(axis=-1)]
    return np.asarray(np.sum(counts, axis=0, dtype=float))


def _choice(options: dict[str, tuple[Option, ...]], rows: NDArray[np.intp]) -> Choice:
    return Choice(options=options, index={g: rows[..., k] for k, g in enumerate(GROUPS)})


def _candidates(family: Family, options: dict[str, tuple[Option, ...]]) -> NDArray[np.intp]:
    """All choices (candidate, group), least timber volume first; equal volumes in the order the job lists them.

    Raises JobError when no chord depth fits under a raised heel.
    """
    rows = np.array(list(product(*(range(len(options[g])) for g in GROUPS))))
    depth = {g: np.array([o.section.depth for o in options[g]])[rows[:, k]] for k, g in enumerate(GROUPS)}
    if family.layout.raised_heel:
        room = heel_offset(family.size, depth["top chord"], depth["bottom chord"]) >= LEAST_HEEL
        shallow = np.argmin(depth["top chord"] + depth["bottom chord"])  # for a message about the least that would do
        keep = np.flatnonzero(room) if np.any(room) else np.array([shallow])
        rows, depth = rows[keep], {g: d[keep] for g, d in depth.items()}
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
