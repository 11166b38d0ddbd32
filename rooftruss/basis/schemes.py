"""Combination schemes: the load combinations of one standard as data, read from tables/schemes or the user's own file.

A row is written as the standard prints it, ``"D + 0.75L + 0.75(0.6W) + 0.75(Lr or 0.7S or R)"``, and that text is what
is calculated: numbers multiply what follows them, and "or" inside brackets is a choice. tables/schemes/README.md tells
how to write a scheme.
"""

import re
import tomllib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from math import nan
from pathlib import Path

from rooftruss.basis.scheme_values import resolved
from rooftruss.basis.tables import data_folder
from rooftruss.errors import JobError, TableError, nearest

ACTIONS = ("D", "L", "Lr", "S", "R", "W", "A")  # A: accidental
NO_CASE = "R"  # rain stands in the printed rows; no load module makes a case of it, so it needs no duration
KINDS = ("live", "wind_snow", "total", "characteristic", "frequent", "quasi-permanent")
DEAD = ("most", "least")
OPTIONS = {  # what combinations.combine understands; a scheme lists those it allows, the first choice is the default
    "companion_snow": ("balanced", "any"),
    "ceiling_live": ("with roof live", "apart from roof live"),
    "ceiling_live_use": ("occupancy", "storage"),
    "timber_edition": ("2018", "2024"),
}
LARGEST_FILE = 200_000  # bytes
TOP_KEYS = {
    "title",
    "load_standard",
    "timber_standard",
    "source",
    "symbols",
    "durations",
    "patterns",
    "options",
    "strength",
    "deflection",
    "lasting",
}
STRENGTH_KEYS = {"clause", "expression", "dead", "leading", "companions", "time_effect", "time_effect_storage"}
DEFLECTION_KEYS = {"clause", "expression", "dead", "leading", "companions", "kind"}
Pairs = tuple[tuple[str, tuple[str, ...]], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Factored:
    """One action of a term with the whole factor on it."""

    action: str  # "S"
    symbol: str  # as the standard writes it
    factor: float  # 0.525


Term = tuple[Factored, ...]  # alternatives: one of them acts


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One printed combination."""

    clause: str
    expression: str
    terms: tuple[Term, ...]
    dead: str  # "most" or "least": which dead load the row takes
    leading: str  # action that is never absent in this row, "" for none
    companions: tuple[str, ...]  # actions that only accompany another one in this row
    kind: str  # "" for strength, else the kind of service combination
    time_effect: float  # lambda [-]; NaN where the scheme has none
    time_effect_storage: float  # lambda [-] where the ceiling live load is storage


@dataclass(frozen=True, slots=True, kw_only=True)
class Scheme:
    """All combinations of one standard. Hashable, so that what is made from it can be kept."""

    name: str
    title: str
    load_standard: str  # "ASCE 7-22"
    timber_standard: str  # "NDS 2018 ASD"
    source: str
    durations: Pairs  # (name, actions), longest first
    companion_patterns: Pairs  # action -> patterns that may accompany
    alone_patterns: Pairs  # action -> patterns that act with dead load only
    options: Pairs  # option -> choices, default first
    lasting: tuple[tuple[str, float], ...]  # action -> share of it that lasts, for creep
    rows: tuple[Row, ...]

    def option(self, name: str, given: Mapping[str, object]) -> str:
        """Choice in force for option `name`: the given one, the scheme's default, or "" if the scheme has none."""
        choices = dict(self.options).get(name, ("",))
        return str(given.get(name, choices[0]))

    def timber_in_force(self, given: Mapping[str, object]) -> str:
        """Name of the timber standard, in the edition that the options choose."""
        edition = self.option("timber_edition", given)
        return re.sub(r"\b\d{4}\b", edition, self.timber_standard, count=1) if edition else self.timber_standard

    def check_options(self, given: Mapping[str, object]) -> None:
        """Raise JobError for an option or a choice this scheme does not have."""
        known = dict(self.options)
        for name, choice in given.items():
            if name not in known:
                raise JobError(f"scheme {self.name} has no option {name!r}; {nearest(name, known)}")
            if choice not in known[name]:
                raise JobError(
                    f"scheme {self.name}, option {name}: {choice!r} is no choice; {nearest(str(choice), known[name])}"
                )


def schemes() -> list[str]:
    """Names of the schemes in tables/schemes."""
    return sorted(path.stem for path in (data_folder("tables") / "schemes").glob("*.toml"))


def load_scheme(name: str, base_folder: Path = Path(), site: Mapping[str, object] | None = None) -> Scheme:
    """Scheme by its name in tables/schemes, or by the path (ending in .toml) of a file of the user's own.

    A path is taken from `base_folder`, the folder of the job file. `site` decides between the variants of a scheme that
    has some; without it the values stand as they are. Raises JobError when it is not found or does not serve the site,
    TableError (file, row, what is allowed) for anything wrong inside.
    """
    plain = tuple((k, v) for k, v in sorted((site or {}).items()) if isinstance(v, str | int | float))
    if name.lower().endswith(".toml"):
        return _read(base_folder / name, dict(plain))
    if name not in schemes():
        hint = nearest(name, schemes())
        path = " Or write the path of a .toml file" if hint.endswith("?") else ", or the path of a .toml file"
        raise JobError(f"there is no scheme {name!r}; {hint}{path}")
    return _shipped(name, plain)


@cache
def _shipped(name: str, site: tuple[tuple[str, object], ...]) -> Scheme:
    return _read(data_folder("tables") / "schemes" / f"{name}.toml", dict(site))


def _read(path: Path, site: Mapping[str, object]) -> Scheme:
    if not path.is_file():
        raise JobError(f"there is no scheme file {path.name}; give its path from the folder of the job file")
    if path.stat().st_size > LARGEST_FILE:
        raise TableError(f"{path.name} is too large for a scheme (more than {LARGEST_FILE // 1000} kB)")
    try:
        data = tomllib.loads(path.read_bytes().decode("utf-8"))
    except UnicodeDecodeError:
        raise TableError(f"{path.name} is not a text file (UTF-8); write the scheme as TOML") from None
    except tomllib.TOMLDecodeError as error:
        raise TableError(f"{path.name} is not valid TOML: {error}") from None
    return scheme_from_mapping(resolved(data, site, path.name), path.stem, path.name)


def scheme_from_mapping(data: Mapping[str, object], name: str, file: str) -> Scheme:
    """Scheme from the content of a TOML file; `file` is what messages call it. Raises TableError."""
    _known(data, TOP_KEYS, file)
    actions = _symbols(data.get("symbols", {}), f"{file} [symbols]")
    patterns = _patterns(data.get("patterns", {}), f"{file} [patterns]")
    rows = [
        *_rows(data, "strength", STRENGTH_KEYS, actions, file),
        *_rows(data, "deflection", DEFLECTION_KEYS, actions, file),
    ]
    if not any(row.kind == "" for row in rows):
        raise TableError(f"{file}: there is no [[strength]] row")
    durations = _durations(data.get("durations"), file)
    _every_action_has_a_duration(rows, durations, file)
    return Scheme(
        name=name,
        title=_text(data, "title", file),
        load_standard=_text(data, "load_standard", file),
        timber_standard=_text(data, "timber_standard", file),
        source=_text(data, "source", file),
        durations=durations,
        companion_patterns=tuple((action, found) for action, kind, found in patterns if kind == "companion"),
        alone_patterns=tuple((action, found) for action, kind, found in patterns if kind == "alone"),
        options=_options(data.get("options", {}), f"{file} [options]"),
        lasting=_lasting(data.get("lasting", {}), f"{file} [lasting]"),
        rows=tuple(rows),
    )


TOKEN = re.compile(r"\s*(?:(\d+(?:\.\d+)?)|([A-Za-z_][A-Za-z_0-9]*)|([()+]))")


def parse_expression(text: str, actions: Mapping[str, str]) -> tuple[Term, ...]:
    """Terms of a printed combination; `actions` maps the standard's symbols to ours. Raises TableError.

    >>> [[(f.symbol, f.factor) for f in t] for t in parse_expression("D + 0.75(Lr or 0.7S)", {a: a for a in ACTIONS})]
    [[('D', 1.0)], [('Lr', 0.75), ('S', 0.525)]]
    """
    tokens: list[str] = []
    place = 0
    while text[place:].strip():
        found = TOKEN.match(text, place)
        if not found:
            raise TableError(
                f"{text[place:].strip()[0]!r} has no meaning in an expression; write like 'D + 0.75(Lr or S)'"
            )
        tokens.append(found.group().strip())
        place = found.end()
    tokens.reverse()
    terms = [_term(tokens, actions)]
    while tokens:
        if (sign := tokens.pop()) != "+":
            raise TableError(f"'+' expected before {sign!r}")
        terms.append(_term(tokens, actions))
    return tuple(terms)


def _term(tokens: list[str], actions: Mapping[str, str]) -> Term:
    """One product, read from the end of `tokens`: factors multiply into each alternative."""
    factor = 1.0
    while tokens and tokens[-1][0].isdigit():
        factor *= float(tokens.pop())
    if factor <= 0.0:
        raise TableError("a factor must be greater than 0")
    if not tokens or tokens[-1] in (")", "+", "or"):
        raise TableError("an action is missing" + (f" before {tokens[-1]!r}" if tokens else " at the end"))
    if (word := tokens.pop()) != "(":
        if word not in actions:
            raise TableError(f"{word!r} is not an action; {nearest(word, actions)}")
        return (Factored(action=actions[word], symbol=word, factor=factor),)
    choices = list(_term(tokens, actions))
    while tokens and tokens[-1] == "or":
        tokens.pop()
        choices += _term(tokens, actions)
    if not tokens or tokens.pop() != ")":
        raise TableError("a bracket holds one product, or several joined by 'or', and is closed by ')'")
    # rounded, so that 0.75 x 0.7 is the 0.525 that is printed
    return tuple(Factored(action=c.action, symbol=c.symbol, factor=round(factor * c.factor, 12)) for c in choices)


def _rows(
    data: Mapping[str, object], group: str, keys: set[str], actions: Mapping[str, str], file: str
) -> Iterable[Row]:
    rows = data.get(group, [])
    if not isinstance(rows, list) or not all(isinstance(row, dict) for row in rows):
        raise TableError(f"{file}: write each combination under its own [[{group}]]")
    for number, row in enumerate(rows, 1):
        place = f"{file} [[{group}]] {number}"
        _known(row, keys, place)
        yield _row(row, actions, place, "" if group == "strength" else _choice(row, "kind", KINDS, None, place))


def _row(row: Mapping[str, object], actions: Mapping[str, str], place: str, kind: str) -> Row:
    expression = _text(row, "expression", place)
    try:
        terms = parse_expression(expression, actions)
    except TableError as error:
        raise TableError(f"{place} expression {expression!r}: {error}") from None
    used = [factored.action for term in terms for factored in term]
    twice = sorted({action for action in used if used.count(action) > 1})
    if twice:
        raise TableError(f"{place} expression {expression!r}: {', '.join(twice)} appears more than once")
    if any(f.action == "D" for term in terms if len(term) > 1 for f in term):
        raise TableError(f"{place} expression {expression!r}: dead load always acts, it cannot stand beside an 'or'")
    if not kind and "D" not in used:
        raise TableError(f"{place} expression {expression!r}: a strength row has the dead load in it")
    effect = _number(row, "time_effect", nan, place)
    return Row(
        clause=_text(row, "clause", place),
        expression=expression,
        terms=terms,
        dead=_choice(row, "dead", DEAD, "most", place),
        leading=_choice(row, "leading", ("", *used), "", place),
        companions=tuple(_words(row.get("companions", []), used, f"{place} companions")),
        kind=kind,
        time_effect=effect,
        time_effect_storage=_number(row, "time_effect_storage", effect, place),
    )


def _symbols(given: object, place: str) -> dict[str, str]:
    """Symbol of the standard -> our action; our own letters where the standard gives no other."""
    if not isinstance(given, dict):
        raise TableError(f"{place}: write for example G = 'D'")
    for symbol, action in given.items():
        if action not in ACTIONS:
            raise TableError(f"{place} {symbol}: {action!r} is not an action; {nearest(str(action), ACTIONS)}")
    return {str(k): str(v) for k, v in given.items()} or {action: action for action in ACTIONS}


def _patterns(given: object, place: str) -> list[tuple[str, str, tuple[str, ...]]]:
    """(action, "companion" or "alone", patterns) of the [patterns.S] tables."""
    found: list[tuple[str, str, tuple[str, ...]]] = []
    if not isinstance(given, dict):
        raise TableError(f"{place}: write for example [patterns.S] companion = ['balanced']")
    _known(given, ACTIONS, place)
    for action, table in given.items():
        if not isinstance(table, dict):
            raise TableError(f"{place}: write for example [patterns.S] companion = ['balanced']")
        _known(table, ("companion", "alone"), f"{place} {action}")
        found += [(str(action), str(k), tuple(_words(v, None, f"{place} {action} {k}"))) for k, v in table.items()]
    return found


def _durations(given: object, file: str) -> Pairs:
    place = f"{file} durations"
    if not isinstance(given, list) or not given or not all(isinstance(entry, dict) for entry in given):
        raise TableError(f"{place}: list them longest first, {{ name = 'permanent', actions = ['D'] }}, ...")
    found = []
    for entry in given:
        _known(entry, ("name", "actions"), place)
        found.append((_text(entry, "name", place), tuple(_words(entry.get("actions"), ACTIONS, place))))
    return tuple(found)


def _every_action_has_a_duration(rows: Iterable[Row], durations: Pairs, file: str) -> None:
    timed = [action for _, actions in durations for action in actions]
    for action in sorted({f.action for row in rows for term in row.terms for f in term} - {NO_CASE}):
        if timed.count(action) != 1:
            raise TableError(
                f"{file} durations: {action} must stand in exactly one of them, it is in {timed.count(action)}"
            )


def _lasting(given: object, place: str) -> tuple[tuple[str, float], ...]:
    if not isinstance(given, dict):
        raise TableError(f"{place}: write for example S = 0.2")
    _known(given, ACTIONS, place)
    for action, share in given.items():
        if isinstance(share, bool) or not isinstance(share, int | float) or not 0 <= share <= 1:
            raise TableError(f"{place} {action}: {share!r} must be a number from 0 to 1")
    return tuple((str(action), float(share)) for action, share in given.items())


def _options(given: object, place: str) -> Pairs:
    if not isinstance(given, dict):
        raise TableError(f"{place}: write for example companion_snow = ['balanced', 'any']")
    _known(given, OPTIONS, place)
    return tuple((str(k), tuple(_words(v, OPTIONS[k], f"{place} {k}", least=1))) for k, v in given.items())


def _known(given: Mapping[str, object], allowed: Iterable[str], place: str) -> None:
    for key in given:
        if key not in allowed:
            raise TableError(f"{place}: {key!r} is not a key; {nearest(key, sorted(allowed))}")


def _text(row: Mapping[str, object], key: str, place: str) -> str:
    value = row.get(key)
    if not isinstance(value, str) or not value.strip() or len(value) > 200:
        raise TableError(f"{place}: {key} is missing or is not a short text")
    return value.strip()


def _choice(row: Mapping[str, object], key: str, allowed: Sequence[str], default: str | None, place: str) -> str:
    value = row.get(key, default)
    if value not in allowed:
        raise TableError(f"{place} {key}: {value!r} is no choice; {nearest(str(value), allowed)}")
    return str(value)


def _number(row: Mapping[str, object], key: str, default: float, place: str) -> float:
    value = row.get(key, default)
    if isinstance(value, bool) or not isinstance(value, int | float) or not (value is default or 0.0 < value <= 2.0):
        raise TableError(f"{place} {key}: {value!r} must be a number above 0, at most 2")
    return float(value)


def _words(given: object, allowed: Iterable[str] | None, place: str, least: int = 0) -> list[str]:
    if not isinstance(given, list) or len(given) < least or not all(isinstance(word, str) for word in given):
        raise TableError(f"{place}: {given!r} is not a list of words in quotes")
    for word in given:
        if allowed is not None and word not in allowed:
            raise TableError(f"{place}: {word!r} is not allowed here; {nearest(word, allowed)}")
    return list(given)
