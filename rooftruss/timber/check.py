"""The register of timber standards. Only this module knows their names."""

from collections.abc import Callable, Mapping

from rooftruss.errors import JobError, nearest
from rooftruss.timber.ec5 import ec5_standard
from rooftruss.timber.nds import nds_standard
from rooftruss.timber.terms import TimberStandard

REGISTER: dict[str, Callable[[str, Mapping[str, object]], TimberStandard]] = {
    "NDS 2018 ASD": nds_standard,
    "NDS 2018 LRFD": nds_standard,
    "NDS 2024 ASD": nds_standard,
    "NDS 2024 LRFD": nds_standard,
    "EN 1995-1-1": ec5_standard,
}


def standard(name: str, options: Mapping[str, object]) -> TimberStandard:
    """The timber standard `name` under the service conditions `options` (keys of [timber] in the job file).

    Raises JobError for a name that is not registered or an option the standard cannot read.
    """
    if name not in REGISTER:
        raise JobError(f"timber standard {name!r} is not known; {nearest(name, REGISTER)}")
    return REGISTER[name](name, options)
