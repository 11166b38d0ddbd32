"""Combinations of EN 1990:2002+A1:2005 as the schemes hold them, against published and hand values."""

import itertools

import numpy as np
import pytest

from rooftruss.analysis.combinations import CaseHead, combine
from rooftruss.basis.scheme_values import resolved
from rooftruss.basis.schemes import load_scheme
from rooftruss.errors import JobError, TableError
from rooftruss.timber.ec5 import ec5_standard
from rooftruss.timber.ec5_tables import modification_factor

PSI_0 = {"S": 0.5, "W": 0.6, "L": 0.7, "Lr": 0.0}  # Table A1.1, sites up to 1000 m, loft as category A
EXCLUDED = ({"Lr", "S"}, {"Lr", "W"})  # EN 1991-1-1, 3.3.2(1)


def heads(*actions: str) -> list[CaseHead]:
    """A dead load that is the same at its most and least, and one case of each action; "S S" are two alternatives."""
    numbers: dict[str, int] = {}
    out = [CaseHead(name="G", short="", action="D", pattern="both")]
    for action in actions:
        numbers[action] = numbers.get(action, 0) + 1
        name = f"{action}{numbers[action]}"
        out.append(CaseHead(name=name, short=name, action=action, pattern=""))
    return out


def found(scheme: str, *actions: str, kind: str = "", site: dict | None = None) -> set[tuple[float, ...]]:
    """Factors of the combinations of one kind ("": strength), in the order G, then `actions`."""
    made = combine(heads(*actions), load_scheme(scheme, site=site), {})
    rows = [k for k, other in enumerate(made.kinds) if other == kind]
    return {tuple(round(float(f), 6) for f in made.factors[k]) for k in rows}


def expected_610(gammas: tuple[float, ...], actions: tuple[str, ...], gamma_Q: float = 1.5) -> set[tuple[float, ...]]:
    """(6.10) by its definition: each action leading in turn, every subset of the compatible others with psi_0."""
    out = set()
    for gamma_G, size in itertools.product(gammas, range(len(actions) + 1)):
        for acting in itertools.combinations(actions, size):
            if any(pair <= set(acting) for pair in EXCLUDED):
                continue
            for leading in acting or ("",):
                factors = {a: gamma_Q * (1.0 if a == leading else PSI_0[a]) for a in acting}
                out.add((gamma_G, *(round(factors.get(a, 0.0), 6) for a in actions)))
    return out


UPLIFT = (0.9, 0, 1.5, 0)  # Table A1.2(A): 0.9 G + 1.5 W


@pytest.mark.parametrize("loft", [(), ("L",)])
def test_6_10_holds_exactly_what_the_rule_says(loft):
    actions = ("S", "W", *loft, "Lr")
    uplift = tuple(0.9 if n == 0 else 1.5 if a == "W" else 0.0 for n, a in enumerate(("G", *actions)))
    assert found("en1990-6.10", *actions) == expected_610((1.35, 1.0), actions) | {uplift}


def test_the_twelve_combinations_of_snow_wind_and_maintenance():
    # EN 1990, (6.10) by hand: G | S | S+0.9W | W | W+0.75S | Q_H for each of the two factors on G
    twelve = {
        (g, *rest)
        for g in (1.35, 1.0)
        for rest in ((0, 0, 0), (1.5, 0, 0), (1.5, 0.9, 0), (0, 1.5, 0), (0.75, 1.5, 0), (0, 0, 1.5))
    }
    assert found("en1990-6.10", "S", "W", "Lr") == twelve | {UPLIFT}


@pytest.mark.parametrize("gamma_G", [1.35, 1.0])
def test_number_of_combinations_of_many_arrangements(gamma_G):
    # by hand, 3 arrangements of snow, 18 of wind, 3 of the imposed load: 1 + 3 + 18 + 3 x 18 x 2 + 3 = 133 for each G
    many = ["S"] * 3 + ["W"] * 18 + ["Lr"] * 3
    made = combine(heads(*many), load_scheme("en1990-6.10"), {})
    rows = np.flatnonzero(made.strength & (made.factors[:, 0] == gamma_G))
    assert len(rows) == 133
    uplift = np.flatnonzero(made.strength & (made.factors[:, 0] == 0.9))  # Table A1.2(A), each wind once
    assert len(uplift) == 18
    assert made.strength.sum() == 2 * 133 + 18


def test_what_lasts_is_the_quasi_permanent_combination():
    """EN 1990, 6.16b: G + psi_2 Q. Final deflection takes k_def times it (EN 1995-1-1, 2.2.3(3)), so the growth of the
    final deflection over the characteristic combination must be k_def times (6.16b)."""
    quasi_permanent = {  # by hand from EN 1990, Table A1.1: S, W, loft of category A
        300.0: (1.0, 0.0, 0.0, 0.3),
        1200.0: (1.0, 0.2, 0.0, 0.3),
    }
    for altitude, expected in quasi_permanent.items():
        scheme = load_scheme("en1990-6.10", site={"altitude": altitude})
        made = combine(heads("S", "W", "L"), scheme, {})
        rows = [k for k, kind in enumerate(made.kinds) if kind == "characteristic" and made.factors[k].all()]
        assert len(rows) == 3  # each of the three leads once
        code = ec5_standard("EN 1995-1-1", {"service_class": 2})  # k_def = 0.8
        final = code.service_factors(
            made.factors[rows],
            actions=("D", "S", "W", "L"),
            kinds=("final",) * len(rows),
            lasting=dict(scheme.lasting),
        )
        for grown in final - made.factors[rows]:
            assert grown == pytest.approx(0.8 * np.array(expected))


def test_published_factors():
    # Steel Buildings in Europe (2010), Multi-Storey Part 3, pp. 3-5, 3-6: snow leads 1.35 1.5 0.9, wind 1.35 1.5 0.75
    strength = found("en1990-6.10", "S", "W")
    assert {(1.35, 1.5, 0.9), (1.35, 0.75, 1.5)} <= strength
    # the same pages, serviceability, characteristic: G + S + 0.6 W and G + W + 0.5 S
    assert {(1.0, 1.0, 0.6), (1.0, 0.5, 1.0)} <= found("en1990-6.10", "S", "W", kind="characteristic")
    # frequent: G + 0.2 S and G + 0.2 W, and nothing else
    assert found("en1990-6.10", "S", "W", kind="frequent") == {(1.0, 0.2, 0.0), (1.0, 0.0, 0.2)}


def test_maintenance_never_stands_with_snow_or_wind():
    for scheme in ("en1990-6.10", "en1990-6.10ab"):
        for kind in ("", "characteristic", "frequent", "quasi-permanent"):
            for _, s, w, q_h in found(scheme, "S", "W", "Lr", kind=kind):
                assert not (q_h and (s or w))


def test_the_pair_6_10a_and_6_10b():
    # Table A1.2(B), xi = 0.85: 0.85 x 1.35 = 1.1475 with the leading load in full, 1.35 with every load by psi_0
    made = found("en1990-6.10ab", "S", "W")
    assert {(1.35, 0.75, 0.9), (1.1475, 1.5, 0.9), (1.1475, 0.75, 1.5), (1.0, 1.5, 0.9)} <= made
    assert all(s <= 0.75 and w <= 0.9 for g, s, w in made if g == 1.35)
    assert {g for g, _, _ in made} == {1.35, 1.1475, 1.0, 0.9}  # xi does not reduce the favourable 1.0


def test_least_dead_load_stands_where_it_is_favourable():
    most, least = (CaseHead(name=f"G {w}", short=w, action="D", pattern=w) for w in ("most", "least"))
    wind = CaseHead(name="W", short="W", action="W", pattern="")
    made = combine([most, least, wind], load_scheme("en1990-6.10"), {})
    strength = {tuple(f) for f in made.factors[made.strength].round(6).tolist()}
    assert {(1.35, 0, 1.5), (0, 1.0, 1.5), (0, 0.9, 1.5)} <= strength
    assert all(m == 0 or n == 0 for m, n, _ in strength)  # never two factors on one source


def test_design_effects():
    # by hand: N_G 4.2, N_S 6.0, N_W -7.5 kN: largest 14.67, smallest -7.05 with 1.0 G and -7.47 kN with 0.9 G
    strength = np.array(sorted(found("en1990-6.10", "S", "W"))) @ np.array([4.2, 6.0, -7.5])
    assert strength.max() == pytest.approx(14.67)
    assert strength.min() == pytest.approx(-7.47)
    with_one = [c for c in found("en1990-6.10", "S", "W") if c[0] != 0.9]
    assert min(np.array(with_one) @ np.array([4.2, 6.0, -7.5])) == pytest.approx(-7.05)
    service = np.array(sorted(found("en1990-6.10", "S", "W", kind="characteristic"))) @ np.array([4.2, 6.0, -7.5])
    assert service.max() == pytest.approx(10.2)


def test_hold_down_force():
    # EN 1990, Table A1.2(A) by hand: R_G 3.1, R_W -6.4, R_S 4.0 kN: 2.79 - 9.60 = -6.81
    effects = np.array(sorted(found("en1990-6.10", "W", "S"))) @ np.array([3.1, -6.4, 4.0])
    assert effects.min() == pytest.approx(-6.81)


def test_envelope_of_a_member_with_three_winners():
    # by hand: N G -4.0, S -6.0 -4.2 -4.9, W 5.5 -1.2 kN; snow short-term, wind instantaneous, service class 1
    unit = np.array([-4.0, -6.0, -4.2, -4.9, 5.5, -1.2])
    made = combine(heads("S", "S", "S", "W", "W"), load_scheme("en1990-6.10"), {})
    assert made.strength.sum() == 36 + 2  # (6.10), and 0.9 G with either wind
    N = made.factors[made.strength] @ unit
    names = [n for n, s in zip(made.names, made.strength, strict=True) if s]
    k_mod = np.array([modification_factor(d, 1)[0] for d in np.array(made.durations)[made.strength]])
    assert N.min() == pytest.approx(-15.48)
    assert names[int(N.argmin())] == "1.35G + 1.5S(S1) + 0.9W(W2)"
    with_one = np.array([not n.startswith("0.9G") for n in names])
    assert N[with_one].max() == pytest.approx(4.25)
    assert (N / k_mod).min() == pytest.approx(-16.0)
    assert names[int((N / k_mod).argmin())] == "1.35G + 1.5S(S1)"


def test_duration_is_that_of_the_shortest_load_present():
    made = combine(heads("S", "W", "L", "Lr"), load_scheme("en1990-6.10"), {})
    by_name = dict(zip(made.names, made.durations, strict=True))
    assert by_name["1.35G"] == "permanent"
    assert by_name["1.35G + 1.5Q(L1)"] == "long-term"
    assert by_name["1.35G + 1.5S(S1)"] == "short-term"
    assert by_name["1.35G + 1.5S(S1) + 0.9W(W1)"] == "instantaneous"
    assert by_name["1.35G + 1.5Q_H(Lr1) + 1.05Q(L1)"] == "short-term"


HIGH = {"altitude": 1200.0}


def test_snow_above_1000_m():
    # EN 1990, Table A1.1: psi 0.7/0.5/0.2; snow then lasts for weeks
    assert {(1.35, 1.05, 1.5), (1.35, 1.5, 0.9)} <= found("en1990-6.10", "S", "W", site=HIGH)
    assert not any(s == 0.75 for _, s, _ in found("en1990-6.10", "S", "W", site=HIGH))
    scheme = load_scheme("en1990-6.10", site=HIGH)
    assert dict(scheme.lasting) == {"L": 0.3, "S": 0.2, "W": 0.0}  # quasi-permanent G + 0.2 S
    assert ("medium-term", ("S",)) in scheme.durations
    assert dict(load_scheme("en1990-6.10", site={"altitude": 1000.0}).lasting)["S"] == 0.0


def test_storage_in_the_loft():
    # EN 1990, Table A1.1, category E: psi_0 1.0, psi_2 0.8
    assert (1.35, 1.5, 1.5) in found("en1990-6.10", "S", "L", site={"loft": "storage"})
    assert dict(load_scheme("en1990-6.10", site={"loft": "storage"}).lasting)["L"] == 0.8


@pytest.mark.parametrize(("consequences", "K_FI"), [("CC1", 0.9), ("CC2", 1.0), ("CC3", 1.1)])
def test_reliability_classes_change_unfavourable_loads_only(consequences, K_FI):
    # EN 1990, Table B3
    made = found("en1990-6.10", "S", site={"consequence_class": consequences})
    assert made == {(round(1.35 * K_FI, 6), s) for s in (0, round(1.5 * K_FI, 6))} | {
        (1.0, s) for s in (0, round(1.5 * K_FI, 6))
    }


def test_exceptional_snow():
    # EN 1990, (6.11b) by hand: G 2.0, A_d 5.2, loft 1.0 kN with psi_2 0.3: 7.5 kN; gamma_M = 1
    made = combine(heads("A", "L", "W"), load_scheme("en1990-6.10"), {})
    accidental = [k for k, d in enumerate(made.durations) if d == "accidental"]
    effects = made.factors[accidental] @ np.array([2.0, 5.2, 1.0, 9.9])
    assert effects.max() == pytest.approx(7.5)
    assert (made.factors[accidental][:, 1] == 1.0).all()
    assert modification_factor("accidental", 2) == (1.1, False)


def test_germany_and_finland():
    germany = load_scheme("en1990-6.10", site={"national_choices": "germany"})
    assert ("short-term to instantaneous", ("W",)) in germany.durations
    # Finland: 1.35 K_FI G; 1.15 K_FI G + 1.5 K_FI Q + 1.5 K_FI psi_0 Q; snow 0.7
    finland = found("en1990-finland", "S", "W", site={"national_choices": "finland", "consequence_class": "CC3"})
    assert {(1.485, 0, 0), (1.265, 1.65, 0.99), (1.265, 1.155, 1.65), (0.9, 0, 1.65)} <= finland
    assert not any(g == 1.485 and (s or w) for g, s, w in finland)


@pytest.mark.parametrize(("scheme", "country"), [("en1990-6.10", "finland"), ("en1990-6.10ab", "germany")])
def test_a_scheme_of_another_country_is_refused(scheme, country):
    with pytest.raises(JobError, match=f"is not that of '{country}'; it serves recommended"):
        load_scheme(scheme, site={"national_choices": country})


def plain(**changes: object) -> dict:
    return {"values": {"g": 1.5}, "durations": [{"name": "short", "actions": ["S"]}], **changes}


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"values": {"g": "1.5"}}, "every value is a number"),
        ({"variants": [{"key": "altitude"}]}, "either 'equals' .* or 'over'"),
        ({"variants": [{"key": "altitude", "above": 3.0}]}, "'above' is not a key"),
        ({"variants": [{"key": "altitude", "over": 1.0, "values": {"h": 2.0}}]}, "'h' is not under .values."),
        ({"variants": [{"key": "altitude", "over": 1.0, "durations": {"S": "long"}}]}, "there is no duration 'long'"),
    ],
)
def test_a_malformed_variant_is_told(changes, message):
    with pytest.raises(TableError, match=message):
        resolved(plain(**changes), {"altitude": 5.0}, "own.toml")
