"""Many trusses at once: order, grouping, executors, messages, data frame."""

import multiprocessing
from concurrent.futures import ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import fields, replace

import numpy as np
import pytest

from rooftruss.basis.grades import find_grade
from rooftruss.basis.job import GroupTimber, Restraint, TrussSpec
from rooftruss.basis.sections import find_section
from rooftruss.design import batch
from rooftruss.design.batch import Report, check_many
from rooftruss.design.design import outcome_of
from rooftruss.design.family import Choice, Option, family_of, unbatched
from rooftruss.design.stages import run
from rooftruss.errors import JobError, OutOfScopeError
from tests.en_jobs import EN_SIZES, barn, en_spec
from tests.jobs import SIZES, house, spec

SPARE = {"top chord": ("2x8", "SPF SS"), "bottom chord": ("2x4", "SPF SS"), "web": ("2x6", "SPF Stud")}


def mixed(count: int = 14) -> list[TrussSpec]:
    """Trusses of several layouts, one with a point load, in an order that keeps none together."""
    kinds = (
        lambda k: spec("T1", span=7.0 + 0.1 * k, pitch=0.4 + 0.01 * k),
        lambda k: spec("T2", span=6.0 + 0.2 * k),
        lambda k: spec("T1", shape="howe", panels=6, overhang=0.0, span=9.0 + 0.05 * k),
        lambda k: spec("T3", heel_height=0.4, spacing=0.4 + 0.01 * k),
        lambda k: spec("T1", points=True, span=8.0 + 0.01 * k),
    )
    return [replace(kinds[k % 5](k), mark=f"B{k}") for k in range(count)]


def mixed_sizes(count: int) -> list[dict[str, tuple[str, str]]]:
    return [SIZES if k % 3 else SPARE for k in range(count)]


def equal(one: Report, other: Report) -> bool:
    """Whether two reports agree: names exactly, numbers to the last digits but three."""
    for f in fields(Report):
        a, b = getattr(one, f.name), getattr(other, f.name)
        if isinstance(a, np.ndarray):
            np.testing.assert_allclose(a, b, rtol=1e-12, atol=1e-9, err_msg=f.name)
        else:
            assert a == b, f.name
    return True


@pytest.fixture(scope="module")
def report() -> Report:
    return check_many(house(), mixed(), mixed_sizes(14))


def test_rows_are_in_the_order_given(report):
    assert report.mark == tuple(f"B{k}" for k in range(14))


def test_a_batch_gives_what_each_truss_gives_alone(report):
    for k, truss in enumerate(mixed()):
        alone = check_many(house(), [truss], [mixed_sizes(14)[k]])
        for f in fields(Report):
            a, b = getattr(report, f.name)[k], getattr(alone, f.name)[0]
            assert a == (b if isinstance(b, str) else pytest.approx(b, rel=1e-11, abs=1e-9)), (truss.mark, f.name)


def test_a_report_tells_what_the_stages_found(report):
    for k in (0, 1, 4):
        truss, sizes = mixed()[k], mixed_sizes(14)[k]
        options = {g: (Option(find_section(size), find_grade(grade)),) for g, (size, grade) in sizes.items()}
        done = run(
            unbatched(family_of(house(), [truss])), Choice(options=options, index={g: np.array(0) for g in sizes})
        )
        found = outcome_of(done)
        member = int(found.utilisation.value.argmax())
        assert report.member[k] == done.members.names[member]
        assert report.utilisation[k] == pytest.approx(float(found.utilisation.value[member]))
        assert report.combination[k] == done.combinations.names[int(found.utilisation.combination[member])]
        assert report.rule[k] == done.checks.rules[int(found.rule[member])].name
        assert report.worst[k] == pytest.approx(float(found.worst))
        assert report.down[k] == pytest.approx(float(found.reactions.down.value.max()))
        assert report.mass[k] == pytest.approx(float(found.mass))
        assert bool(report.passes[k]) == bool(found.passes)


@pytest.mark.parametrize("length", [1, 2, 5])
def test_the_length_of_chunks_changes_nothing(report, length, monkeypatch):
    monkeypatch.setattr(batch, "LARGEST_CHUNK", length)
    assert equal(check_many(house(), mixed(), mixed_sizes(14)), report)


def test_threads_give_the_same(report, monkeypatch):
    monkeypatch.setattr(batch, "LARGEST_CHUNK", 2)
    with ThreadPoolExecutor(2) as executor:
        assert equal(check_many(house(), mixed(), mixed_sizes(14), executor=executor), report)


def test_processes_give_the_same(report):
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as executor:
        assert equal(check_many(house(), mixed(), mixed_sizes(14), executor=executor), report)


def test_one_set_of_sizes_does_for_all():
    trusses = mixed(5)
    assert equal(check_many(house(), trusses, [SIZES]), check_many(house(), trusses, [SIZES] * 5))


def test_progress_is_told_after_every_chunk(monkeypatch):
    monkeypatch.setattr(batch, "LARGEST_CHUNK", 2)
    told: list[tuple[int, int]] = []
    check_many(house(), mixed(), [SIZES], progress=lambda done, count: told.append((done, count)))
    done = [d for d, _ in told]
    assert done == sorted(done)
    assert len(set(done)) == len(done) > 5
    assert told[-1] == (14, 14)


def test_a_frame_has_one_row_per_truss_under_its_mark(report):
    frame = report.frame()
    assert list(frame.index) == list(report.mark)
    assert frame.loc["B3", "worst"] == report.worst[3]
    assert frame["passes"].dtype == bool
    assert list(frame.columns) == [f.name for f in fields(Report) if f.name != "mark"] + ["passes"]


def test_no_trusses_give_an_empty_report():
    empty = check_many(house(), [], [SIZES])
    assert empty.mark == ()
    assert len(empty.passes) == len(empty.frame()) == 0


def test_what_does_not_fit_is_said():
    with pytest.raises(JobError, match="sizes for 2 trusses were given, 3 trusses; give one for each, or one for all"):
        check_many(house(), mixed(3), [SIZES, SPARE])
    wrong = replace(mixed(1)[0], mark="B77", panels=5)
    with pytest.raises(JobError, match="truss B77: panels: 5 top-chord panels"):
        check_many(house(), [*mixed(3), wrong], [SIZES])
    with pytest.raises(JobError, match="section '2x44' is not in tables/sections"):
        check_many(house(), mixed(1), [SIZES | {"web": ("2x44", "SPF SS")}])


@pytest.mark.parametrize("field", ["quantity", "spacing", "restraint", "moisture", "plies"])
def test_trusses_that_differ_in_a_setting_are_not_run_as_one(field):
    """Each of these decides about a factor for the truss, so a neighbour must not lend its own."""
    first = spec("T1")
    changes = {
        "quantity": {"quantity": 2},
        "spacing": {"spacing": 1.2},
        "plies": {"plies": 2},
        "moisture": {"timber": replace(first.timber, options={**first.timber.options, "moisture": "wet"})},
        "restraint": {"timber": replace(first.timber, groups=_unsheathed(first))},
    }[field]
    other = replace(first, mark="T9", **changes)
    together = check_many(house(), [first, other], [SIZES])
    alone = [check_many(house(), [s], [SIZES]) for s in (first, other)]
    assert together.worst == pytest.approx([float(a.worst[0]) for a in alone], rel=1e-12)
    assert together.worst[0] != pytest.approx(together.worst[1], rel=1e-4)


def test_point_loads_stand_where_each_truss_has_them():
    """Two trusses of one mark, their loads on different members of the bottom chord."""
    first = spec("T1", points=True)
    (point,) = first.loads.points
    moved = replace(first.loads, points=(replace(point, position=7.0, force=5000.0),))
    pair = [first, replace(first, loads=moved)]
    together = check_many(house(), pair, [SIZES])
    alone = [check_many(house(), [s], [SIZES]) for s in pair]
    assert together.worst == pytest.approx([float(a.worst[0]) for a in alone], rel=1e-12)


def _unsheathed(truss: TrussSpec) -> dict[str, GroupTimber]:
    groups = dict(truss.timber.groups)
    groups["top chord"] = replace(groups["top chord"], restraint=Restraint(kind="spacing", spacing=1.2))
    return groups


def test_what_a_standard_refuses_names_the_truss():
    spec = en_spec()
    timber = replace(spec.timber, options={**spec.timber.options, "truss_analysis": "simplified"})
    specs = [replace(spec, mark=f"T{k}", pitch=p, timber=timber) for k, p in enumerate((0.5, 0.55, 0.25, 0.5))]
    with pytest.raises(OutOfScopeError, match=r"^truss T2: EN 1995-1-1, 5\.4\.3\(1\)"):
        check_many(barn(), specs, [EN_SIZES])


def test_round_off_is_no_effect_of_the_envelope():
    # the tail of the barn hangs or stands beyond the heel under every load: the tension along it never turns
    options = {g: (Option(find_section(size), find_grade(grade)),) for g, (size, grade) in EN_SIZES.items()}
    choice = Choice(options=options, index={g: np.array(0) for g in EN_SIZES})
    done = run(unbatched(family_of(barn(), [barn().trusses[0]])), choice)
    tail = done.members.names.index("tail 1")
    envelope = done.envelope
    assert (envelope.compression.value[tail], envelope.compression.combination[tail]) == (0.0, -1)
    assert envelope.tension.combination[tail] >= 0
    assert np.all(envelope.compression.combination[[done.members.names.index(n) for n in ("top 1", "web 1")]] >= 0)
