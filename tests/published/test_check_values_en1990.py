"""Check values of EN 1990, and of category H of EN 1991-1-1; test_check_values_en.py says what they are."""

import numpy as np

from rooftruss.analysis.combinations import CaseHead, Combinations, combine
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.loads.imposed_en1991 import category_h
from rooftruss.timber.ec5_tables import modification_factor
from rooftruss.timber.terms import Demand
from tests.check_values import Entry, checks, meet
from tests.published.test_timber_en1995 import code, lasting, members

SCHEME = "en1990-6.10"
ACTIONS = {"G": "D", "S": "S", "W": "W", "QH": "Lr", "Q": "L", "A_d": "A"}  # symbol of a check value: action


def made_of(symbols: list[str], **site: object) -> tuple[Combinations, Scheme]:
    """Combinations of one case of each symbol, "S2" being another case of "S"; dead load is one source."""
    heads = [
        CaseHead(name=s, short=s, action=ACTIONS[s.rstrip("123")], pattern="both" if s == "G" else "") for s in symbols
    ]
    scheme = load_scheme(SCHEME, site=site)
    return combine(heads, scheme, {}), scheme


def rows_of(made: Combinations, clause: str, kind: str = "") -> list[int]:
    """Numbers of the combinations of one kind ("": strength) whose clause ends like this."""
    return [k for k, c in enumerate(made.clauses) if made.kinds[k] == kind and c.endswith(clause)]


def acting(symbols: list[str], made: Combinations, row: int) -> dict[str, float]:
    """Symbol -> factor of what acts in a combination."""
    return {s: float(f) for s, f in zip(symbols, made.factors[row], strict=True) if f}


def all_together(symbols: list[str], made: Combinations, rows: list[int], leading: str) -> dict[str, float]:
    """The combination in which everything acts and one action leads, with the larger factor on dead load."""
    found = (acting(symbols, made, k) for k in rows)
    return max((f for f in found if f.keys() == set(symbols)), key=lambda f: (f["G"], f[leading]))


@checks("COMB-610-S", "COMB-610-W")
def test_strength_combination_of_snow_and_wind(entry: Entry) -> None:
    symbols, leading = entry["inputs"]["actions"], entry["inputs"]["leading"]
    made, _ = made_of(symbols, altitude=1000.0)
    meet(entry, all_together(symbols, made, rows_of(made, "6.10"), leading))


def led_by(leading: str, symbols: list[str], made: Combinations, rows: list[int]) -> dict[str, float]:
    """The combination that one action leads and all others accompany as far as they do, with the larger factor."""
    found = (acting(symbols, made, k) for k in rows)
    best = max(found, key=lambda f: (f["G"], f.get(leading, 0.0), len(f)))
    return {s: best.get(s, 0.0) for s in symbols}


@checks("COMB-SLS")
def test_characteristic_and_frequent_combinations(entry: Entry) -> None:
    symbols = entry["inputs"]["actions"]
    made, _ = made_of(symbols)
    kinds = (("char", "6.14b", "characteristic"), ("freq", "6.15b", "frequent"))
    found = {
        f"{word}_{leading}": led_by(leading, symbols, made, rows_of(made, clause, kind))
        for word, clause, kind in kinds
        for leading in "SW"
    }
    meet(entry, found)


@checks("COMB-NORDIC-QP")
def test_quasi_permanent_combination_with_snow_that_lasts(entry: Entry) -> None:
    symbols = entry["inputs"]["actions"]
    made, scheme = made_of(symbols, altitude=1200.0)
    quasi_permanent = led_by("S", symbols, made, rows_of(made, "6.16b", "quasi-permanent"))
    psi_0 = led_by("W", symbols, made, rows_of(made, "6.14b", "characteristic"))["S"]
    psi_1 = led_by("S", symbols, made, rows_of(made, "6.15b", "frequent"))["S"]
    meet(entry, quasi_permanent | {"psi_snow": [psi_0, psi_1, dict(scheme.lasting)["S"]]})


@checks("COMB-ENUM-610")
def test_all_combinations_of_6_10(entry: Entry) -> None:
    symbols = entry["inputs"]["actions"]
    made, _ = made_of(symbols)

    def in_order(one: dict[str, float]) -> list[float]:
        return [one.get(s, 0.0) for s in symbols]

    found = sorted((acting(symbols, made, k) for k in rows_of(made, "6.10")), key=in_order)
    expected = sorted(entry["expected"]["combinations"], key=in_order)
    meet(
        {**entry, "expected": {**entry["expected"], "combinations": expected}},
        {"count": len(found), "combinations": found},
    )


@checks("COMB-EFFECT")
def test_design_effects(entry: Entry) -> None:
    given = entry["inputs"]
    made, _ = made_of(["G", "S", "W"])
    effects = made.factors @ np.array([given["N_G_kN"], given["N_S_kN"], given["N_W_uplift_kN"]])
    strength = effects[rows_of(made, "6.10")]
    found = {
        "max_STR_kN": strength.max(),
        "min_STR_kN": strength.min(),
        "EQU_uplift_kN": effects[rows_of(made, "Table A1.2(A)")].min(),
        "char_max_kN": effects[rows_of(made, "6.14b", "characteristic")].max(),
    }
    meet(entry, found)


@checks("COMB-EQU-ANCHOR")
def test_hold_down_force(entry: Entry) -> None:
    given = entry["inputs"]
    made, _ = made_of(["G", "W", "S"])
    reactions = made.factors[made.strength] @ np.array([given["R_G_kN"], given["R_W_kN"], given["R_S_kN"]])
    meet(entry, {"R_d_kN": reactions.min()})


@checks("COMB-KMOD-GOVERN")
def test_governing_combination_goes_by_duration(entry: Entry) -> None:
    given = entry["inputs"]
    standard, found = code(given["service_class"]), {}
    member = members(standard, {"grade": "C24", "b": 45, "h": 150})
    for duration, altitude in (("short", 500.0), ("medium", 1500.0)):
        made, _ = made_of(["G", "S"], altitude=altitude)
        rows = np.flatnonzero(made.strength)
        force = (made.factors[rows] @ np.array([given["N_G_kN"], given["N_S_kN"]]))[:, None]
        zero = np.zeros_like(force)
        loads = Demand(tension=force, compression=zero, moment_positive=zero, moment_negative=zero, shear=zero)
        checked = standard.check(member, loads, lasting(*(made.durations[k] for k in rows)))
        names = {"1.35G": "G only", "1.35G + 1.5S(S)": "G+S"}
        found[f"governing_if_{duration}"] = names[made.names[int(checked.governing.combination[0])]]
        for name, word in (("1.35G", "G_only"), ("1.35G + 1.5S(S)", f"GS_if_snow_{duration}")):
            k = made.names.index(name)
            k_mod, _ = modification_factor(made.durations[k], given["service_class"])
            found[f"ratio_{word}"] = float(force[k, 0]) / k_mod
    meet(entry, found)


DURATIONS = {  # of a check value: a load that lasts so long, and the site where it does
    "permanent": ("G", {}),
    "long": ("Q", {}),
    "medium": ("S", {"altitude": 1200.0}),
    "short": ("S", {}),
    "instantaneous": ("W", {}),
    "wind (short / very short)": ("W", {"national_choices": "germany"}),
}


@checks("KMOD-GS_short", "KMOD-GS_med", "KMOD-GSW_inst", "KMOD-GLoft", "KMOD-DE-WIND")
def test_duration_of_a_combination(entry: Entry) -> None:
    loads = [DURATIONS[name] for name in entry["inputs"]["durations"]]
    symbols = [symbol for symbol, _ in loads]
    made, _ = made_of(symbols, **{key: value for _, site in loads for key, value in site.items()})
    found = {made.durations[k] for k in rows_of(made, "6.10") if acting(symbols, made, k).keys() == set(symbols)}
    (duration,) = found
    k_mod, with_gamma_M = modification_factor(duration, entry["inputs"]["service_class"])
    assert with_gamma_M
    meet(entry, {"k_mod": k_mod})


@checks("COMB-ACC-SNOW")
def test_exceptional_snow(entry: Entry) -> None:
    given = entry["inputs"]
    made, scheme = made_of(["G", "A_d", "Q", "W"])
    rows = rows_of(made, "6.11b")
    effects = made.factors[rows] @ np.array([given["G_kN"], given["S_Ad_kN"], given["Q_loft_kN"], 1e6])
    assert dict(scheme.lasting)["L"] == given["psi2_loft"]
    assert {made.durations[k] for k in rows} == {"accidental"}
    standard = code(2)
    scale, _ = standard.scale(members(standard, {"grade": "C24", "b": 45, "h": 150}), lasting("accidental"))
    gamma_M = float(scale[0, 0]) * modification_factor("accidental", 2)[0]
    meet(entry, {"E_d_kN": effects.max(), "gamma_M": gamma_M})


@checks("ENV-MEMBER")
def test_envelope_of_a_member(entry: Entry) -> None:
    given = entry["inputs"]
    symbols = list(given["N_char_kN"])
    made, _ = made_of(symbols)
    rows = rows_of(made, "6.10")
    N = made.factors[rows] @ np.array(list(given["N_char_kN"].values()))
    k_mod = np.array([modification_factor(made.durations[k], given["service_class"])[0] for k in rows])

    def at(k: int, value: float) -> dict[str, object]:
        parts = acting(symbols, made, rows[int(k)]).items()
        return {"combo": "+".join(f"{round(factor, 6)}{name}" for name, factor in parts), "kN": value}

    found = {
        "n_combinations": len(rows),
        "min_N": at(N.argmin(), N.min()),
        "max_N": at(N.argmax(), N.max()),
        "most_severe_compression_N_over_kmod": at((N / k_mod).argmin(), (N / k_mod).min()),
    }
    meet(entry, found)


@checks("IMP-H-REC")
def test_imposed_load_of_category_h(entry: Entry) -> None:
    (q, *q_range), (Q, *Q_range) = category_h("q"), category_h("Q")
    symbols = ["G", "S", "W", "Q", "QH"]
    made, scheme = made_of(symbols)
    factors = {float(row[-1]) for row in made.factors}
    assert factors == {0.0, 1.5, 1.0}  # it leads or is not there: psi_0 = psi_1 = 0
    found = {
        "q_k_kN_m2": q / 1e3,
        "q_k_range": [v / 1e3 for v in q_range],
        "Q_k_kN": Q / 1e3,
        "Q_k_range": [v / 1e3 for v in Q_range],
        "psi": [0, 0, dict(scheme.lasting).get("Lr", 0.0)],
    }
    meet(entry, found)
