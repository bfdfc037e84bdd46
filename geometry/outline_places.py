"""Places of a drawing in words."""

MM = 1e-3  # m


def place_text(point: complex) -> str:
    """A point as (x, y) in mm of the drawing, to a micrometre."""
    x, y = (0.0 if abs(v) < 5e-7 else v / MM for v in (point.real, point.imag))
    return f"({x:.3f}, {y:.3f}) mm"
