"""Whether the national choices that a site names are known and covered; asked before anything is computed."""

from collections.abc import Mapping

from rooftruss.basis.tables import read_table
from rooftruss.basis.written import told
from rooftruss.errors import JobError, OutOfScopeError, nearest

COUNTRY = "national_choices"  # key of [site]
OTHER_NAMES = {  # what else a country is called: two letters of ISO 3166-1 (from memory), and parts of the kingdom
    "united kingdom": ("uk", "gb", "great britain", "britain", "england", "scotland", "wales", "northern ireland"),
    "germany": ("de", "deutschland"),
    "france": ("fr",),
    "finland": ("fi", "suomi"),
    "ireland": ("ie",),
    "sweden": ("se", "sverige"),
    "denmark": ("dk", "danmark"),
    "norway": ("no", "norge"),
}


def check_country(site: Mapping[str, object]) -> None:
    """Refuse a site whose national choices are not at hand; a site without that key passes.

    Raises JobError (without a place) for a name that is not known, OutOfScopeError with the reason, from the table of
    national choices, for a country that is known and not covered.
    """
    given = site.get(COUNTRY)
    if not isinstance(given, str):
        return
    reasons = {str(row["choice"]): str(row["refusal"]) for row in read_table("loads/national_choices_en1991").rows}
    called = " ".join(given.replace(".", "").split()).casefold()
    name = next((known for known, others in OTHER_NAMES.items() if called in others), called)
    covered = [choice for choice, reason in reasons.items() if not reason]
    if reasons.get(name):
        known_as = told(given) if name == called else f"{told(given)} ({name})"
        at_hand = ", ".join(map(repr, covered))
        raise OutOfScopeError(f"{known_as} is not covered: {reasons[name]}; covered are {at_hand}")
    if given not in reasons:
        hint = nearest(name, reasons)
        hint = hint if hint.startswith("did you mean") else nearest(name, covered)
        raise JobError(f"{told(given)} is not known; {hint}")
