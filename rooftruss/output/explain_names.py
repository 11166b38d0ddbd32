"""What `explain` can be asked for by name: members, bearings, deflections, load cases."""

from rooftruss.design.design import Design
from rooftruss.design.places import Place
from rooftruss.errors import JobError, nearest

DEFLECTION, SIDEWAYS, BEARING = "deflection at ", "sideways movement at ", "bearing "


def asked_text(place: Place) -> str:
    """How a deflection is asked for.

    >>> asked_text(Place(name="top 1", kind="member", number=0, direction="vertical"))
    'deflection at top 1'
    """
    return (SIDEWAYS if place.direction == "horizontal" else DEFLECTION) + place.name


def deflection_place(design: Design, name: str) -> int | None:
    """Number of the place that a name asks for the deflection of; None where it does not speak of one.

    "deflection at B" or "B" alone for a panel point, "deflection at top 1" for the middle of a chord member, "sideways
    movement at G" for a roller. Raises JobError for a place where no deflection is taken.
    """
    places = design.outcome.deflection.places
    asked = {asked_text(p).casefold(): k for k, p in enumerate(places)}
    for p in places:  # what only moves sideways needs no other word
        asked.setdefault((DEFLECTION + p.name).casefold(), asked[asked_text(p).casefold()])
    word = name.casefold()
    prefix = next((p for p in (DEFLECTION, SIDEWAYS) if word.startswith(p)), "")
    nodes = design.run.family.topology.nodes
    if not prefix and word not in (n.casefold() for n in nodes):
        return None
    found = asked.get(word if prefix else DEFLECTION + word)
    if found is None:
        raise _no_deflection(design, name[len(prefix) :].strip(), prefix or DEFLECTION)
    return found


def _no_deflection(design: Design, place: str, prefix: str) -> JobError:
    made, places = design.run.family.topology, design.outcome.deflection.places
    mark, held = design.spec.mark, {made.nodes[s.node] for s in made.supports}
    if place in held:
        return JobError(f"truss {mark}: {place!r} is held; ask for '{BEARING}{place}'")
    if place in made.names:
        return JobError(f"truss {mark}: no deflection is taken in the middle of {place!r}, which is no chord member")
    fitting = [p.name for p in places if asked_text(p).startswith(prefix)]
    hint = nearest(place, fitting)
    if not hint.startswith("did you mean"):
        hint = f"deflections are taken at {', '.join(fitting)}"
    return JobError(f"truss {mark} has no {prefix}{place!r}; {hint}")


def unknown(design: Design, name: str) -> JobError:
    """What a word may be that is none of a truss's names."""
    made, run = design.run.family.topology, design.run
    bearings = [BEARING + made.nodes[s.node] for s in made.supports]
    deflections = [asked_text(p) for p in design.outcome.deflection.places]
    hint = nearest(name, [*run.members.names, *bearings, *deflections, *run.cases.names])
    if not hint.startswith("did you mean"):
        hint = (
            f"write a member ({_range(run.members.names)}), {' or '.join(map(repr, bearings))}, a deflection "
            f"({deflections[0]!r}, '{DEFLECTION}{run.members.names[0]}', {deflections[-1]!r}), or a load case by its "
            "name (the sheet Cases of the workbook and `rooftruss inspect` list them)"
        )
    return JobError(f"truss {design.spec.mark} has no member, bearing, deflection or load case {name!r}; {hint}")


def _range(names: tuple[str, ...]) -> str:
    """The members of each part from the first to the last.

    >>> _range(("top 1", "top 2", "web 1"))
    "'top 1' to 'top 2', 'web 1'"
    """
    parts: dict[str, list[str]] = {}
    for name in names:
        parts.setdefault(name.rpartition(" ")[0], []).append(name)
    return ", ".join(repr(own[0]) if len(own) == 1 else f"{own[0]!r} to {own[-1]!r}" for own in parts.values())
