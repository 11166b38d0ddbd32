"""Schemes whose factors go by the site: named values in the expressions, and the variants that change them.

A scheme may write ``"gamma_G G + gamma_Q S + gamma_Q psi_0_W W"`` and give the values under [values]; [[variants]]
change values or durations where a key of the site says so. tables/schemes/README.md tells how they are written.
"""

import re
from collections.abc import Iterable, Mapping
from typing import Any

from rooftruss.errors import JobError, TableError, nearest

VARIANT_KEYS = {"key", "equals", "over", "values", "durations"}
WORD = re.compile(r"[A-Za-z_][A-Za-z_0-9]*|\d+(?:\.\d+)?")


def resolved(data: Mapping[str, Any], site: Mapping[str, object], file: str) -> dict[str, Any]:
    """The content of a scheme file with every named value put in as it is on this site.

    Raises TableError for a variant that is malformed, JobError where the scheme does not serve the site.
    """
    plain = {k: v for k, v in data.items() if k not in ("values", "variants", "serves")}
    _served(data.get("serves", {}), site, file)
    values = dict(data.get("values", {}))
    if not all(isinstance(v, int | float) and not isinstance(v, bool) and v >= 0 for v in values.values()):
        raise TableError(f"{file} [values]: every value is a number, zero or more")
    for number, variant in enumerate(data.get("variants", ()), 1):
        place = f"{file} [[variants]] {number}"
        if _holds(variant, site, place):
            _apply(variant, values, plain, place)
    for group in ("strength", "deflection"):
        rows = plain.get(group)
        if values and isinstance(rows, list):
            plain[group] = [_row(row, values) for row in rows]
    if "lasting" in plain:
        plain["lasting"] = {a: values.get(v, v) for a, v in plain["lasting"].items()}
    return plain


def _served(served: Mapping[str, Iterable[str]], site: Mapping[str, object], file: str) -> None:
    for key, words in served.items():
        if key in site and site[key] not in list(words):
            raise JobError(
                f"[site] {key}: the scheme {file} is not that of {site[key]!r}; it serves {', '.join(words)}: "
                "write one of these, or take another scheme"
            )


def _holds(variant: Mapping[str, Any], site: Mapping[str, object], place: str) -> bool:
    for key in variant:
        if key not in VARIANT_KEYS:
            raise TableError(f"{place}: {key!r} is not a key; {nearest(key, sorted(VARIANT_KEYS))}")
    if "key" not in variant or ("equals" in variant) == ("over" in variant):
        raise TableError(f"{place}: write a key of the site and either 'equals' (a word) or 'over' (a number)")
    given = site.get(variant["key"])
    if given is None:
        return False
    if "equals" in variant:
        return bool(given == variant["equals"])
    return isinstance(given, int | float) and given > variant["over"]


def _apply(variant: Mapping[str, Any], values: dict[str, float], plain: dict[str, Any], place: str) -> None:
    for name, value in variant.get("values", {}).items():
        if name not in values:
            raise TableError(f"{place}: {name!r} is not under [values]; {nearest(name, values)}")
        values[name] = value
    moved = variant.get("durations", {})
    if moved:
        entries = [{**e, "actions": [a for a in e["actions"] if a not in moved]} for e in plain["durations"]]
        for action, name in moved.items():
            entry = next((e for e in entries if e["name"] == name), None)
            if entry is None:
                raise TableError(
                    f"{place}: there is no duration {name!r}; {nearest(name, [e['name'] for e in entries])}"
                )
            entry["actions"].append(action)
        plain["durations"] = entries


def _row(row: Mapping[str, Any], values: Mapping[str, float]) -> dict[str, Any]:
    expression = row.get("expression")
    return dict(row) if not isinstance(expression, str) else {**row, "expression": expanded(expression, values)}


def expanded(expression: str, values: Mapping[str, float]) -> str:
    """An expression of plain products with its named values multiplied out; a term whose factor is zero is left out.

    >>> expanded("gamma_Q S + gamma_Q psi_0_W W + gamma_Q psi_0_H Q_H", {"gamma_Q": 1.5, "psi_0_W": 0.6, "psi_0_H": 0})
    '1.5S + 0.9W'
    """
    if not set(WORD.findall(expression)) & set(values):
        return expression
    terms = []
    for term in expression.split("+"):
        factor, rest = 1.0, []
        for word in WORD.findall(term):
            if word in values:
                factor *= values[word]
            elif word[0].isdigit():
                factor *= float(word)
            else:
                rest.append(word)
        if factor:
            number = "" if abs(factor - 1) < 1e-12 else f"{factor:.12g}"
            terms.append(number + " ".join(rest))
    return " + ".join(terms)
