"""Load combinations of ASCE 7, 2.3.1 and 2.4.1, written out; and how cases are put into them."""

from itertools import combinations as subsets

import numpy as np
import pytest

from rooftruss.analysis.combinations import CaseHead, combine, expression_count, expressions
from rooftruss.basis.schemes import load_scheme, parse_expression, scheme_from_mapping, schemes
from rooftruss.errors import JobError, TableError

ORDER = ("D", "L", "Lr", "S", "R", "W")

ASD_16 = [  # ASCE/SEI 7-16, 2.4.1, every "or" written out: D L Lr S R W
    (1, 0, 0, 0, 0, 0),
    (1, 1, 0, 0, 0, 0),
    (1, 0, 1, 0, 0, 0),
    (1, 0, 0, 1, 0, 0),
    (1, 0, 0, 0, 1, 0),
    (1, 0.75, 0.75, 0, 0, 0),
    (1, 0.75, 0, 0.75, 0, 0),
    (1, 0.75, 0, 0, 0.75, 0),
    (1, 0, 0, 0, 0, 0.6),
    (1, 0.75, 0.75, 0, 0, 0.45),
    (1, 0.75, 0, 0.75, 0, 0.45),
    (1, 0.75, 0, 0, 0.75, 0.45),
    (0.6, 0, 0, 0, 0, 0.6),
]
ASD_22 = [  # ASCE/SEI 7-22, 2.4.1, 1a to 7a
    (1, 0, 0, 0, 0, 0),
    (1, 1, 0, 0, 0, 0),
    (1, 0, 1, 0, 0, 0),
    (1, 0, 0, 0.7, 0, 0),
    (1, 0, 0, 0, 1, 0),
    (1, 0.75, 0.75, 0, 0, 0),
    (1, 0.75, 0, 0.525, 0, 0),
    (1, 0.75, 0, 0, 0.75, 0),
    (1, 0, 0, 0, 0, 0.6),
    (1, 0.75, 0.75, 0, 0, 0.45),
    (1, 0.75, 0, 0.525, 0, 0.45),
    (1, 0.75, 0, 0, 0.75, 0.45),
    (0.6, 0, 0, 0, 0, 0.6),
]
LRFD_16 = [  # ASCE/SEI 7-16, 2.3.1
    (1.4, 0, 0, 0, 0, 0),
    (1.2, 1.6, 0.5, 0, 0, 0),
    (1.2, 1.6, 0, 0.5, 0, 0),
    (1.2, 1.6, 0, 0, 0.5, 0),
    (1.2, 1, 1.6, 0, 0, 0),
    (1.2, 0, 1.6, 0, 0, 0.5),
    (1.2, 1, 0, 1.6, 0, 0),
    (1.2, 0, 0, 1.6, 0, 0.5),
    (1.2, 1, 0, 0, 1.6, 0),
    (1.2, 0, 0, 0, 1.6, 0.5),
    (1.2, 1, 0.5, 0, 0, 1),
    (1.2, 1, 0, 0.5, 0, 1),
    (1.2, 1, 0, 0, 0.5, 1),
    (0.9, 0, 0, 0, 0, 1),
]
LRFD_22 = [  # ASCE/SEI 7-22, 2.3.1, 1a to 5a
    (1.4, 0, 0, 0, 0, 0),
    (1.2, 1.6, 0.5, 0, 0, 0),
    (1.2, 1.6, 0, 0.3, 0, 0),
    (1.2, 1.6, 0, 0, 0.5, 0),
    (1.2, 1, 1.6, 0, 0, 0),
    (1.2, 0, 1.6, 0, 0, 0.5),
    (1.2, 1, 0, 1.0, 0, 0),
    (1.2, 0, 0, 1.0, 0, 0.5),
    (1.2, 1, 0, 0, 1.6, 0),
    (1.2, 0, 0, 0, 1.6, 0.5),
    (1.2, 1, 0.5, 0, 0, 1),
    (1.2, 1, 0, 0.3, 0, 1),
    (1.2, 1, 0, 0, 0.5, 1),
    (0.9, 0, 0, 0, 0, 1),
]
PRINTED = {"asce7-16-asd": ASD_16, "asce7-22-asd": ASD_22, "asce7-16-lrfd": LRFD_16, "asce7-22-lrfd": LRFD_22}


def vector(expression):
    return tuple(expression.factors.get(action, 0) for action in ORDER)


@pytest.mark.parametrize("name", PRINTED)
def test_rows_of_the_standard(name):
    scheme = load_scheme(name)
    found = [vector(e) for e in expressions(scheme) if e.kind == ""]
    assert np.array(found) == pytest.approx(np.array(PRINTED[name]), abs=1e-9)
    assert expression_count(scheme) == len(PRINTED[name])
    assert expression_count(scheme, with_rain=False) == sum(v[4] == 0 for v in PRINTED[name])


@pytest.mark.parametrize(
    ("name", "loads_psf", "most", "least"),
    [
        # 7-16 LRFD: row 3 with S and L, 1.2 x 20 + 1.6 x 25 + 10 = 74; row 5, 0.9 x 20 - 30 = -12
        ("asce7-16-lrfd", (20, 10, 20, 25, 0, -30), ("2.3.1, 3", 74.0), ("2.3.1, 5", -12.0)),
        # 7-22 ASD: row 4 with S, 20 + 7.5 + 0.525 x 40 = 48.5 over row 3, 48; row 7, 12 - 18 = -6
        ("asce7-22-asd", (20, 10, 20, 40, 0, -30), ("2.4.1, 4a", 48.5), ("2.4.1, 7a", -6.0)),
    ],
)
def test_largest_and_smallest_of_a_set_of_loads(name, loads_psf, most, least):
    strength = [e for e in expressions(load_scheme(name)) if e.kind == ""]
    sums = {(e.clause, e.text): np.dot(vector(e), loads_psf) for e in strength}
    high, low = max(sums, key=sums.__getitem__), min(sums, key=sums.__getitem__)
    assert (high[0], sums[high]) == (most[0], pytest.approx(most[1]))
    assert (low[0], sums[low]) == (least[0], pytest.approx(least[1]))


def head(action, short="", pattern="", name=""):
    return CaseHead(name=name or f"{action} {short}", short=short, action=action, pattern=pattern)


DEAD = [head("D", pattern="both")]
SNOW = [
    head("S", "balanced", "balanced"),
    head("S", "unbal. left", "unbalanced"),
    head("S", "unbal. right", "unbalanced"),
]
GABLE = [
    head("D", "roof", "most"),
    head("D", "least roof", "least"),
    head("D", "self", "both"),
    head("L"),
    *(head("Lr", half) for half in ("full", "left", "right")),
    *SNOW,
    *(head("W", f"wind {k}") for k in range(14)),
]


def test_relieving_load_is_left_out():
    # member forces D -500, L +300, S -900 lb; 7-16 ASD: D + S = -1400 with L absent, row 4 with both -950
    heads = [*DEAD, head("L"), SNOW[0]]
    found = combine(heads, load_scheme("asce7-16-asd"), {})
    forces = dict(zip(found.names, found.factors @ [-500.0, 300.0, -900.0], strict=True))
    strength = {name: force for name, force in forces.items() if not name.startswith("deflection")}
    assert min(strength, key=strength.__getitem__) == "D + S(balanced)"
    assert forces["D + S(balanced)"] == pytest.approx(-1400)
    assert forces["D + 0.75L + 0.75S(balanced)"] == pytest.approx(-950)


@pytest.mark.parametrize(
    ("name", "strength", "service"),
    [
        # ASD: D; L; Lr 3, S 3; row 4: L alone, (Lr 3, S 1) with and without L; W 14; row 6: 14 x 2 x (Lr 3, S 1, none);
        # row 7: 14 and 0.6D; 1 + 1 + 6 + 9 + 14 + 140 + 15 = 186.
        # Service: L, Lr 3; S 3, W 14; D with (L, none) x (Lr 3, none) 8, S 3; 4 + 17 + 11 = 32
        ("asce7-22-asd", 186, 32),
        ("asce7-16-asd", 186, 32),
        # LRFD: 1.4D; row 2: 2 x (Lr 3, S 1, none); row 3: (Lr 3, S 3, none) x (L, W 14, none) less 1.2D of row 2;
        # row 4: 14 x 2 x 5, and without W only L with Lr 3 or S 1 is new; row 5: 15; 1 + 10 + 111 + 144 + 15 = 281
        ("asce7-22-lrfd", 281, 32),
        ("asce7-16-lrfd", 281, 32),
    ],
)
def test_number_of_combinations_of_a_gable(name, strength, service):
    found = combine(GABLE, load_scheme(name), {})
    assert int(found.strength.sum()) == strength
    assert len(found.names) == strength + service
    assert found.factors.shape == (strength + service, len(GABLE))
    assert found.strength.tolist() == sorted(found.strength.tolist(), reverse=True)  # strength first


@pytest.mark.parametrize("name", PRINTED)
def test_names_are_unique_and_no_factors_repeat(name):
    found = combine(GABLE, load_scheme(name), {})
    assert len(set(found.names)) == len(found.names)
    keys = {(kind, tuple(row)) for kind, row in zip(found.kinds, found.factors.tolist(), strict=True)}
    assert len(keys) == len(found.names)


@pytest.mark.parametrize("name", PRINTED)
def test_every_subset_of_every_printed_row_is_there(name):
    heads = [*DEAD, head("L"), head("Lr"), SNOW[0], head("W", "a")]
    found = combine(heads, load_scheme(name), {})
    rows = {tuple(np.round(row, 9)) for row in found.factors[found.strength]}
    for printed in PRINTED[name]:
        D, L, Lr, S, _, W = printed
        acting = [k for k, factor in enumerate((L, Lr, S, W)) if factor]
        for size in range(len(acting) + 1):
            for kept in subsets(acting, size):
                assert (D, *(f if k in kept else 0 for k, f in enumerate((L, Lr, S, W)))) in rows


def test_names_and_clauses_read_as_the_standard():
    found = combine(GABLE, load_scheme("asce7-22-asd"), {})
    clause = dict(zip(found.names, found.clauses, strict=True))
    assert clause["D"] == "2.4.1, 1a"
    assert clause["D + 0.75L + 0.45W(wind 3) + 0.525S(balanced)"] == "2.4.1, 6a"
    assert clause["D + 0.75Lr(left)"] == "2.4.1, 4a"
    assert clause["0.6D(least) + 0.6W(wind 0)"] == "2.4.1, 7a"
    assert clause["deflection, wind or snow: 0.7S(unbal. left)"] == "IBC 2024 Table 1604.3"


def test_unbalanced_snow_does_not_accompany_unless_asked():
    scheme = load_scheme("asce7-22-asd")
    usual, wide = combine(GABLE, scheme, {}), combine(GABLE, scheme, {"companion_snow": "any"})
    assert "D + 0.7S(unbal. left)" in usual.names
    assert "D + 0.525S(unbal. left)" not in usual.names
    assert "D + 0.75L + 0.525S(unbal. left)" in wide.names
    assert set(usual.names) < set(wide.names)
    lrfd = combine(GABLE, load_scheme("asce7-16-lrfd"), {})
    assert "1.2D + 1.6S(unbal. left) + 0.5W(wind 0)" in lrfd.names  # principal snow, row 3
    assert not any("+ 0.5S(unbal." in name for name in lrfd.names)


def test_ice_at_the_eaves_stands_with_dead_load_only():
    heads = [*GABLE, head("S", "eaves", "eave")]
    for name in PRINTED:
        for options in ({}, {"companion_snow": "any"}):
            found = combine(heads, load_scheme(name), options)
            with_ice = found.factors[found.factors[:, -1] > 0]
            assert len(with_ice) > 0
            variable = [k for k, h in enumerate(heads[:-1]) if h.action != "D"]
            assert not np.any(with_ice[:, variable])


def test_cases_of_one_action_exclude_each_other():
    found = combine(GABLE, load_scheme("asce7-22-lrfd"), {})
    for action in ("Lr", "S", "W"):
        columns = [k for k, h in enumerate(GABLE) if h.action == action]
        assert np.all((found.factors[:, columns] > 0).sum(axis=1) <= 1)
    roof = [k for k, h in enumerate(GABLE) if h.action in ("Lr", "S")]
    assert np.all((found.factors[:, roof] > 0).sum(axis=1) <= 1)  # roof live load or snow


@pytest.mark.parametrize(("scheme", "factor"), [(n, 0.6 if n.endswith("asd") else 0.9) for n in PRINTED])
def test_dead_load_that_resists_is_the_least(scheme, factor):
    found = combine(GABLE, load_scheme(scheme), {})
    assert f"{factor}D(least)" in found.names
    for name, row in zip(found.names, found.factors, strict=True):
        expected = (0, factor, factor) if name.startswith(f"{factor}D") else (row[0], 0, row[0])
        assert tuple(row[:3]) == expected
    alike = combine([*DEAD, head("W", "a")], load_scheme("asce7-22-asd"), {})
    assert "0.6D + 0.6W(a)" in alike.names


def test_point_loads_join_every_alternative_of_their_action():
    heads = [*DEAD, *SNOW, head("S", "points", "with"), head("L", "points", "with"), head("D", "points", "most")]
    found = combine(heads, load_scheme("asce7-16-asd"), {})
    snow = found.factors[:, 1:4].sum(axis=1)
    assert found.factors[:, 4] == pytest.approx(snow)
    factors = dict(zip(found.names, found.factors.tolist(), strict=True))
    assert factors["D + L"] == [1, 0, 0, 0, 0, 1, 1]  # a point load without an area load of its action
    assert factors["0.6D"] == [0.6, 0, 0, 0, 0, 0, 0.6]
    only_a_point = combine([*DEAD, head("S", "points", "with")], load_scheme("asce7-16-asd"), {})
    assert "D + 0.75S" in only_a_point.names  # it accompanies too, though it is no balanced snow


def test_durations_follow_the_shortest_load():
    found = combine(GABLE, load_scheme("asce7-22-asd"), {})
    duration = dict(zip(found.names, found.durations, strict=True))
    # NDS 2018 Table 2.3.2: permanent dead, ten years occupancy, two months snow, seven days roof live, ten minutes wind
    assert duration["D"] == "permanent"
    assert duration["D + L"] == "ten years"
    assert duration["D + 0.75L + 0.525S(balanced)"] == "two months"
    assert duration["D + 0.75L + 0.75Lr(full)"] == "seven days"
    assert duration["D + 0.75L + 0.45W(wind 1) + 0.75Lr(full)"] == "ten minutes"


def test_time_effect_stays_with_the_row():
    found = combine(GABLE, load_scheme("asce7-16-lrfd"), {})
    effect = dict(zip(found.names, found.time_effects.tolist(), strict=True))
    # NDS 2018 Table N3; a row met twice keeps the smaller factor
    assert effect["1.4D"] == 0.6
    assert effect["1.2D"] == 0.8
    assert effect["1.2D + 1.6L + 0.5S(balanced)"] == 0.8
    assert effect["1.2D + 1.6S(unbal. left) + L"] == 0.8
    assert effect["1.2D + 0.5W(wind 0)"] == 0.8
    assert effect["1.2D + W(wind 0) + L + 0.5Lr(full)"] == 1.0
    assert effect["0.9D(least) + W(wind 0)"] == 1.0
    assert np.all(np.isnan(combine(GABLE, load_scheme("asce7-16-asd"), {}).time_effects))


def test_storage_above_the_ceiling_lowers_the_time_effect():
    found = combine(GABLE, load_scheme("asce7-22-lrfd"), {"ceiling_live_use": "storage"})
    effect = dict(zip(found.names, found.time_effects.tolist(), strict=True))
    assert effect["1.2D + 1.6L"] == 0.7
    assert effect["1.2D + 1.6Lr(full) + L"] == 0.8


def test_ceiling_live_load_can_stand_apart_from_roof_live_load():
    found = combine(GABLE, load_scheme("asce7-22-asd"), {"ceiling_live": "apart from roof live"})
    ceiling, roof = found.factors[:, 3], found.factors[:, 4:7].sum(axis=1)
    assert not np.any((ceiling > 0) & (roof > 0))
    assert np.any((ceiling > 0) & (found.factors[:, 7] > 0))  # with snow it still stands


def test_service_combinations_of_the_building_code():
    found = combine([*DEAD, head("L"), head("Lr"), SNOW[0], head("W", "a")], load_scheme("asce7-22-asd"), {})
    service = {
        (kind, tuple(row))
        for kind, row, strength in zip(found.kinds, found.factors.tolist(), found.strength, strict=True)
        if not strength
    }
    # IBC Table 1604.3: L or Lr; S (0.7S, note j) or 0.42W (note f); D + (L + Lr) by note d, and snow in its place
    assert service == {
        ("live", (0, 1, 0, 0, 0)),
        ("live", (0, 0, 1, 0, 0)),
        ("wind_snow", (0, 0, 0, 0.7, 0)),
        ("wind_snow", (0, 0, 0, 0, 0.42)),
        ("total", (1, 0, 0, 0, 0)),
        ("total", (1, 1, 0, 0, 0)),
        ("total", (1, 0, 1, 0, 0)),
        ("total", (1, 1, 1, 0, 0)),
        ("total", (1, 0, 0, 0.7, 0)),
    }


def test_same_short_names_fall_back_on_the_full_ones():
    heads = [*DEAD, head("Lr", "x", name="first"), head("Lr", "x", name="second")]
    found = combine(heads, load_scheme("asce7-16-asd"), {})
    assert "D + Lr(first)" in found.names
    assert "D + Lr(second)" in found.names


def test_shared_results_cannot_be_changed():
    found = combine(GABLE, load_scheme("asce7-16-asd"), {})
    assert found is combine(list(GABLE), load_scheme("asce7-16-asd"), {})
    with pytest.raises(ValueError, match="read-only"):
        found.factors[0, 0] = 2.0


def test_wrong_options_and_cases_are_told():
    scheme = load_scheme("asce7-22-asd")
    with pytest.raises(JobError, match="option 'companion_snw'; did you mean 'companion_snow'"):
        combine(GABLE, scheme, {"companion_snw": "any"})
    with pytest.raises(JobError, match="option companion_snow: 'some' is no choice; allowed: 'balanced', 'any'"):
        combine(GABLE, scheme, {"companion_snow": "some"})
    with pytest.raises(TableError, match=r"no combination with E \(load case 'E quake'\)"):
        combine([head("E", "quake")], scheme, {})


def test_catalogue_of_schemes():
    assert set(PRINTED) <= set(schemes())
    scheme = load_scheme("asce7-22-lrfd")
    assert (scheme.load_standard, scheme.timber_standard) == ("ASCE 7-22", "NDS 2018 LRFD")
    with pytest.raises(JobError, match="there is no scheme 'asce7-22-as'; did you mean 'asce7-22-asd'"):
        load_scheme("asce7-22-as")


OWN = """
title = "County rules"
load_standard = "ASCE 7-16"
timber_standard = "NDS 2018 ASD"
source = "county ordinance"
durations = [{ name = "permanent", actions = ["D"] }, { name = "two months", actions = ["S"] }]
[symbols]
G = "D"
S = "S"
[[strength]]
clause = "1"
expression = "1.35G + 1.5(0.5S)"
"""


def test_a_scheme_file_of_the_users_own(tmp_path):
    (tmp_path / "county.toml").write_text(OWN, "utf-8")
    scheme = load_scheme("county.toml", tmp_path)
    found = combine([*DEAD, SNOW[0]], scheme, {})
    assert found.names == ("1.35G", "1.35G + 0.75S(balanced)")
    assert found.factors.tolist() == [[1.35, 0.0], [1.35, 0.75]]
    with pytest.raises(JobError, match=r"no scheme file other\.toml; give its path from the folder of the job file"):
        load_scheme("other.toml", tmp_path)


def test_equal_factors_keep_the_smaller_time_effect(tmp_path):
    more = OWN + '\ntime_effect = 1.0\n[[strength]]\nclause = "2"\nexpression = "1.35G"\ntime_effect = 0.6\n'
    (tmp_path / "two.toml").write_text(more, "utf-8")
    found = combine(DEAD, load_scheme("two.toml", tmp_path), {})
    assert (found.names, found.clauses, found.time_effects.tolist()) == (("1.35G",), ("2",), [0.6])


@pytest.mark.parametrize(
    ("old", "new", "text"),
    [
        ("title", "titel", r"'titel' is not a key; did you mean 'title'"),
        ('clause = "1"', "clause = 1", r"\[\[strength\]\] 1: clause is missing or is not a short text"),
        ('G = "D"', 'G = "Dead"', r"\[symbols\] G: 'Dead' is not an action"),
        ("1.5(0.5S)", "1.5(0.5S", r"a bracket holds one product"),
        ("1.5(0.5S)", "1.5Q", r"'Q' is not an action; allowed: 'G', 'S'"),
        ("1.5(0.5S)", "0S", r"a factor must be greater than 0"),
        ("1.5(0.5S)", "S + 0.5S", r"S appears more than once"),
        ("+ 1.5(0.5S)", "1.5S", r"'\+' expected before '1.5'"),
        ("+ 1.5(0.5S)", "+", r"an action is missing at the end"),
        ("+ 1.5(0.5S)", "- S", r"'-' has no meaning in an expression"),
        ("1.35G + 1.5(0.5S)", "S", r"a strength row has the dead load in it"),
        ("1.35G + 1.5(0.5S)", "(G or S)", r"dead load always acts"),
        ('clause = "1"', 'clause = "1"\ndead = "none"', r"dead: 'none' is no choice; allowed: 'most', 'least'"),
        ('clause = "1"', 'clause = "1"\ntime_effect = 8', r"time_effect: 8 must be a number above 0, at most 2"),
        ('clause = "1"', 'clause = "1"\ncompanions = ["W"]', r"companions: 'W' is not allowed here"),
        ('actions = ["S"]', 'actions = ["W"]', r"durations: S must stand in exactly one of them, it is in 0"),
        ("[[strength]]", "[[deflection]]\nkind = 'live'", r"there is no \[\[strength\]\] row"),
        ("[[strength]]", "[options]\nsnow = ['any']\n[[strength]]", r"\[options\]: 'snow' is not a key"),
        ("[[strength]]", "[patterns.S]\nonly = ['a']\n[[strength]]", r"\[patterns\] S: 'only' is not a key"),
        ("[[strength]]", "[[strength]", r"is not valid TOML"),
    ],
)
def test_mistakes_in_a_scheme_file_are_told(tmp_path, old, new, text):
    (tmp_path / "wrong.toml").write_text(OWN.replace(old, new, 1), "utf-8")
    with pytest.raises(TableError, match=text) as caught:
        load_scheme("wrong.toml", tmp_path)
    assert "wrong.toml" in str(caught.value)


def test_files_that_are_no_scheme(tmp_path):
    (tmp_path / "binary.toml").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(TableError, match=r"binary\.toml is not a text file"):
        load_scheme("binary.toml", tmp_path)
    (tmp_path / "large.toml").write_bytes(b"#" * 300_000)
    with pytest.raises(TableError, match=r"large\.toml is too large for a scheme"):
        load_scheme("large.toml", tmp_path)
    with pytest.raises(TableError, match="durations: list them longest first"):
        scheme_from_mapping({"strength": [{"clause": "1", "expression": "D"}]}, "empty", "empty.toml")


def test_nested_products_multiply():
    actions = {action: action for action in ORDER}
    terms = parse_expression("D + 0.75(0.6W) + 0.75(Lr or 0.7S or R)", actions)
    found = [[(f.symbol, f.factor) for f in term] for term in terms]
    assert found == [[("D", 1.0)], [("W", 0.45)], [("Lr", 0.75), ("S", 0.525), ("R", 0.75)]]
