"""What the word for an attic asks of the other keys, and which options of the scheme it stands for."""

from collections.abc import Collection, Mapping
from typing import Any, cast

from rooftruss.basis.schemes import Scheme
from rooftruss.basis.tablereader import TableReader
from rooftruss.basis.tables import read_table
from rooftruss.units import shown

ATTIC = "attic"
STORAGE, WITHOUT, NONE = "limited storage", "without storage", "none"
# ASCE 7, Table 4.3-1 and its notes: an attic without storage need not be loaded together with any other live load;
# stored things lie there for years, which NDS Table N3 tells from people.
STANDS_FOR = {WITHOUT: {"ceiling_live": "apart from roof live"}, STORAGE: {"ceiling_live_use": "storage"}}
Options = tuple[tuple[str, str], ...]


def attic_defaults(attic: object, scheme: Scheme) -> dict[str, str]:
    """Options that a scheme takes for an attic where the job does not say otherwise."""
    wanted = STANDS_FOR.get(attic, {}) if isinstance(attic, str) else {}
    offered = dict(scheme.options)
    return {name: choice for name, choice in wanted.items() if choice in offered.get(name, ())}


def attic_options(
    reader: TableReader, attic: str, scheme: Scheme, options: Mapping[str, object], chosen: Collection[str], place: str
) -> Options:
    """Options in which one truss differs from its job because of its own attic; each is noted as an assumption."""
    wanted = {name: choices[0] for name, choices in scheme.options if any(name in o for o in STANDS_FOR.values())}
    wanted |= attic_defaults(attic, scheme)
    found = tuple((name, choice) for name, choice in wanted.items() if name not in chosen and options[name] != choice)
    for name, choice in found:
        reader.assume(f"{place} {name}", f"option of the scheme for this truss: {choice!r}, by its attic")
    return found


def check_attic(reader: TableReader, values: Mapping[str, Any], place: str) -> None:
    """Note live loads of the ceiling that do not fit the word for the attic."""
    attic, live = values.get(ATTIC), values["ceiling_live"]
    if attic == NONE and live > 0:
        nothing = shown(0.0, "pressure", reader.system)
        reader.problem(f"{place} attic", f'is "none", so ceiling_live must be "{nothing}"')
    if attic != STORAGE:
        return
    least = cast(float, read_table("loads/attic_asce7").rows[0]["rest"])
    if live < least * (1 - 1e-9):
        told = shown(least, "pressure", reader.system)
        reader.problem(f"{place} ceiling_live", f"is under {told}, the least beside stored things (IBC, Table 1607.1)")
    if values["attic_storage_live"] < live:
        reader.problem(f"{place} attic_storage_live", "is less than ceiling_live, which acts beside it")
