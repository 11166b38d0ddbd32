"""`explain` for deflections: every place of every demo job, the words that name one, what is said of other words."""

import re

import pytest

from rooftruss.cli import main
from rooftruss.design.design import Design
from rooftruss.errors import JobError
from rooftruss.output.explain_grids import explanation
from rooftruss.output.explain_names import asked_text
from rooftruss.output.numbering import numbering_of
from rooftruss.output.schedule import Grid, Measure
from tests.end_to_end.demo import DEMO_JOBS, HOUSE, REPOSITORY, designed

STORE = REPOSITORY / "demo_jobs" / "elder_bank_store.toml"  # Germany
CHAPEL = REPOSITORY / "demo_jobs" / "tarn_ridge_chapel.toml"  # Finland
every_demo = pytest.mark.parametrize("path", DEMO_JOBS, ids=lambda path: path.stem)


def steps(grid: Grid) -> list[tuple[str, float]]:
    """(symbol, value) of every line."""
    out = []
    for row in grid.rows:
        assert isinstance(row[1], Measure)
        out.append((str(row[0]), row[1].value))
    return out


def summed(found: list[tuple[str, float]], word: str) -> float:
    """Sum of the deflections of the cases, each times the factor on the line below it."""
    return sum(w * found[k + 1][1] for k, (s, w) in enumerate(found) if re.match(word, s))


@every_demo
def test_every_deflection_ends_with_its_share_of_the_limit(path):
    for design in designed(path).designs:
        found, numbering = design.outcome.deflection, numbering_of([design])
        for k, place in enumerate(found.places):
            heading, grid = explanation(design, asked_text(place), numbering)
            lines = steps(grid)
            assert lines[-1][1] == pytest.approx(float(found.ratio[k]), rel=1e-9), place
            assert heading.startswith(f"{design.spec.mark} {asked_text(place)}, {found.about(k)}; combination ")
            assert heading.endswith(f"{design.combination(int(found.combination[k]))}, governing")
            assert (lines[-3][0] == "l") == (place.direction == "vertical")
            assert lines[-2][1] == pytest.approx(float(found.limit[k]), rel=1e-9)


@every_demo
def test_the_lines_add_up(path):
    """EN 1995-1-1, eq. (7.2): w_fin = w_inst + w_creep, w_creep = k_def w_inst,qp; NDS 2018, eq. 3.5-1."""
    for design in designed(path).designs:
        found, numbering = design.outcome.deflection, numbering_of([design])
        for k, place in enumerate(found.places):
            lines = steps(explanation(design, asked_text(place), numbering)[1])
            told, value = dict(lines), float(found.value[k])
            if "Delta_ST" in told:
                assert summed(lines, r"Delta_(D|L|Lr|S|W)$") == pytest.approx(
                    told["Delta_ST"] + told.get("Delta_LT", 0.0)
                )
                assert value == pytest.approx(told.get("Delta_T", told["Delta_ST"]))
                assert told.get("Delta_T", value) == pytest.approx(
                    told.get("K_cr", 1.0) * told.get("Delta_LT", 0.0) + told["Delta_ST"]
                )
                continue
            total = told.get("w_inst", told.get("w_inst(Q)"))
            assert summed(lines, r"w_inst,[GQ]") == pytest.approx(total)
            if "w_creep" in told:
                assert told["w_creep"] == pytest.approx(told["k_def"] * told["w_inst,qp"])
                assert told["w_fin"] == pytest.approx(total + told["w_creep"])
            assert value == pytest.approx(told.get("w_fin", total))


def first(path) -> Design:
    return designed(path).designs[0]


def test_the_roller_of_a_scissor_truss():
    design = first(CHAPEL)
    roller = next(p for p in design.outcome.deflection.places if p.direction == "horizontal")
    numbering = numbering_of([design])
    asked = [
        explanation(design, word + roller.name, numbering) for word in ("sideways movement at ", "deflection at ", "")
    ]
    assert asked[0] == asked[1] == asked[2]
    heading, grid = asked[0]
    assert heading.startswith(f"C1 sideways movement at {roller.name}, final w_net,fin; combination ")
    assert [row[0] for row in grid.rows][-2] == "limit"
    assert grid.rows[-2][2] == "[deflection] horizontal"


@pytest.mark.parametrize(
    ("path", "asked"),
    [(HOUSE, "B"), (HOUSE, "deflection at B"), (HOUSE, "Deflection at b"), (STORE, "deflection at top 1")],
)
def test_words_for_a_deflection(path, asked, capsys):
    assert main(["explain", str(path), first(path).spec.mark, asked]) == 0
    place = asked.casefold().removeprefix("deflection at ")
    assert f"deflection at {place}" in capsys.readouterr().out.splitlines()[0].casefold()


def test_a_service_combination_by_number_and_name():
    design = first(STORE)
    made, numbering = design.run.combinations, numbering_of([design])
    k = next(k for k, kind in enumerate(made.kinds) if kind == "frequent")
    number = numbering.combinations_of(design)[k]
    for word in (str(number), made.names[k]):
        heading, grid = explanation(design, "deflection at C", numbering, word)
        assert f"frequent w_inst, no limit; combination {number} (6.5.3, 6.15b): deflection, frequent: " in heading
        assert not heading.endswith("governing")
        assert grid.rows[-1][3] == "no limit is in force for it"
        assert {"psi_1,1"} <= {row[0] for row in grid.rows}


def test_lasting_deflection_of_germany_in_letters():
    # quasi-permanent combination with creep, l/300 (German annex, from memory): w_fin = (1 + k_def) w_inst
    design = first(STORE)
    made, numbering = design.run.combinations, numbering_of([design])
    k = next(k for k, kind in enumerate(made.kinds) if kind == "quasi-permanent")
    heading, grid = explanation(design, "deflection at C", numbering, made.names[k])
    assert "quasi-permanent w_net,fin, l/300; combination" in heading
    told = dict(steps(grid))
    assert told["w_fin"] == pytest.approx((1 + told["k_def"]) * told["w_inst"])
    assert told["w_net,fin/(l/300)"] == pytest.approx(abs(told["w_fin"]) / told["l/300"])
    assert told["l/300"] == pytest.approx(told["l"] / 300)


@pytest.mark.parametrize(
    ("asked", "message"),
    [
        ("A", r"truss T1: 'A' is held; ask for 'bearing A'"),
        ("deflection at web 1", r"truss T1: no deflection is taken in the middle of 'web 1', which is no chord member"),
        ("deflection at Z", r"truss T1 has no deflection at 'Z'; deflections are taken at B, C, .*, top 1, "),
        ("deflection at topp 1", r"truss T1 has no deflection at 'topp 1'; did you mean 'top 1'\?"),
        ("sideways movement at B", r"truss T1 has no sideways movement at 'B'; deflections are taken at D"),
        (
            "deflecton at B",
            r"no member, bearing, deflection or load case 'deflecton at B'; did you mean 'deflection at B'\?",
        ),
        (
            "quoin",
            r"truss T1 has no member, bearing, deflection or load case 'quoin'; write a member \('top 1' to 'top 4', "
            r".*\), 'bearing A' or 'bearing D', a deflection \('deflection at B', 'deflection at top 1', "
            r"'sideways movement at D'\), or a load case by its name \(the sheet Cases of the workbook and "
            r"`rooftruss inspect` list them\)$",
        ),
    ],
)
def test_other_words_are_told_what_there_is(asked, message):
    design = first(HOUSE)
    with pytest.raises(JobError, match=message):
        explanation(design, asked, numbering_of([design]))


def test_an_unknown_word_does_not_list_every_load_case():
    design = first(STORE)
    with pytest.raises(JobError) as told:
        explanation(design, "qqq", numbering_of([design]))
    assert len(str(told.value)) < 500
    assert not any(name in str(told.value) for name in design.run.cases.names)


@pytest.mark.parametrize(("asked", "number", "kind"), [("B", "1", "service"), ("top 1", "200", "strength")])
def test_a_combination_of_the_other_kind_is_refused(asked, number, kind):
    design = first(HOUSE)
    with pytest.raises(JobError, match=rf"no {kind} combination '{number}'; numbers \d+ to \d+; `rooftruss envelope`"):
        explanation(design, asked, numbering_of([design]), number)
