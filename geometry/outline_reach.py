"""How far a closed outline reaches from the shaft axis. Exact, derived."""

from .corners import is_within
from .curves import Path

ON_AXIS = 1e-12  # of its radius: an arc whose centre is nearer is as far all along


def reach(path: Path) -> float:
    """Greatest distance in m of the outline from the shaft axis."""
    points = [edge.start for edge in path.edges]
    for edge in path.edges:
        if not edge.is_line and abs(edge.centre) > ON_AXIS * edge.radius:
            far = edge.centre * (1.0 + edge.radius / abs(edge.centre))
            points += [far] if is_within(edge, far) else []
    return max(abs(point) for point in points)
