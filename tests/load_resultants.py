"""Statics of surface loads for tests: forces and reactions of one load case on an unbatched gable roof, by hand."""

from rooftruss.loads.roof import ActionCase, Roof, SurfaceLoad


def force(load: SurfaceLoad, roof: Roof) -> tuple[float, float, float, float]:
    """(Fx, Fy, x, y) of one surface load [N, m], right and up positive; y is the height of the slope over the heel."""
    B, o = float(roof.bearing_span), float(roof.overhang)
    ends = {
        "left tail": (-o, 0.0),
        "left slope": (0.0, B / 2),
        "right slope": (B / 2, B),
        "right tail": (B, B + o),
        "ceiling": (0.0, B),
    }
    a, b = ends[load.surface]
    a = a if load.x_from is None else max(a, float(load.x_from))
    b = b if load.x_to is None else min(b, float(load.x_to))
    run, x = max(b - a, 0.0), (a + b) / 2
    p, side = float(load.pressure) * float(roof.spacing), 1.0 if load.surface.startswith("left") else -1.0
    m = float(roof.pitch)
    y = m * x if side > 0 else m * (B - x)
    if load.kind == "plan":
        return 0.0, -p * run, x, y
    if load.kind == "normal":
        return side * p * m * run, -p * run, x, y
    assert load.kind == "right"
    return p * m * run, 0.0, x, y


def reactions(case: ActionCase, roof: Roof) -> tuple[float, float, float]:
    """Upward reactions left and right and the horizontal one at the left pin [N]."""
    forces = [force(load, roof) for load in case.loads]
    moment = sum(x * fy - y * fx for fx, fy, x, y in forces)
    right = -moment / float(roof.bearing_span)
    left = -sum(fy for _, fy, _, _ in forces) - right
    return left, right, -sum(fx for fx, _, _, _ in forces)
