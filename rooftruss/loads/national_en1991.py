"""National choices of the Eurocode load parts, as far as they are known."""

from dataclasses import dataclass
from typing import cast

from rooftruss.basis.tables import read_table
from rooftruss.errors import JobError, OutOfScopeError, nearest
from rooftruss.loads.roof import Site

SETTINGS = "loads/national_choices_en1991"


@dataclass(frozen=True, slots=True, kw_only=True)
class NationalChoices:
    """What the load modules take from one country."""

    name: str
    overhang_above: float  # site altitude above which snow hangs over the eaves (EN 1991-1-3, 6.3) [m]
    own_wind_profile: bool  # q_p does not follow EN 1991-1-4, 4.3 to 4.5


def national_choices(name: str) -> NationalChoices:
    """The choices called `name` in a job.

    Raises JobError for a name that is not known, OutOfScopeError for a country that is known and not covered.

    >>> national_choices("france").overhang_above
    900.0
    """
    known = {str(row["choice"]): row for row in read_table(SETTINGS).rows}
    if name not in known:
        covered = [k for k, row in known.items() if not row["refusal"]]
        raise JobError(f"[site] national_choices: {name!r} is not known; {nearest(name, covered)}")
    row = known[name]
    if row["refusal"]:
        raise OutOfScopeError(f"[site] national_choices {name!r} is not covered: {row['refusal']}")
    return NationalChoices(
        name=name, overhang_above=cast(float, row["overhang_above"]), own_wind_profile=row["wind_profile"] == "given"
    )


def chosen(site: Site) -> NationalChoices:
    """National choices of a site; the recommended values where it names none."""
    return national_choices(str(site.get("national_choices", "recommended")))
