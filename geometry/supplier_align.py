"""A measured outline laid on the designed one: moved, turned and, where need be, turned over.

Idea. The axis is first guessed as the centre from which most points lie on the design's rim circle
(pairs of points, each with two centres at that radius: random sample consensus, Fischler and Bolles
1981 (m)); the angle by trying all of one period against a table of distances; both are then made
exact by least squares on the distances themselves (Gauss-Newton, points far off counting less),
for the outline as it is and as its mirror image.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .curves import Edge, Point
from .errors import OutlineError
from .outline_distance import ComplexArray, FloatArray, feet, points_on
from .supplier_ideal import Ideal

PAIRS = 4000  # of points, tried for the axis
TRIED = 500  # points on which a trial is judged
ON_RIM = 6e-5  # m
BEYOND = 2e-4  # m, outside the rim
TURN_STEP = math.radians(0.25)
RADII = 160  # of the table of distances
FAR = 1e-3  # m, where distances count no further
FITTED = 5000  # points of the least squares
STEPS = 14
STILL = 1e-10  # m, steps below this end it
MIRROR_SHARE = 0.6  # of the other way's rms: less tells which way round the outline is
LEAST_MIRROR = 2e-6  # m, rms below which both ways fit
BEST = 3  # angles tried in full


@dataclass(frozen=True, slots=True)
class Alignment:
    """How an outline was brought to the design: z -> turn (z - axis), mirrored first if it is."""

    axis: Point  # m, the shaft axis in the drawing
    angle: float  # rad, the design's first d axis in the drawing, within one period
    is_mirrored: bool
    is_either: bool  # the design is its own mirror image, as far as the outline tells
    rms: float  # m, of what was left

    def aligned(self, points: ComplexArray) -> ComplexArray:
        """Points of the drawing in the rotor's frame."""
        moved = (points - self.axis) * cmath.exp(-1j * self.angle)
        return np.asarray(np.conj(moved) if self.is_mirrored else moved)

    def drawn(self, point: Point) -> Point:
        """A point of the rotor's frame in the drawing."""
        back = point.conjugate() if self.is_mirrored else point
        return back * cmath.exp(1j * self.angle) + self.axis


def alignment(points: ComplexArray, ideal: Ideal) -> Alignment:
    """The best way to lay points (n,) in m on the designed outline.

    Raises:
        OutlineError: no circle of the design's rim or bore among them.
    """
    rng = np.random.default_rng(5)
    axis = _axis(points, ideal, rng)
    few = rng.permutation(points.size)
    table = _table(ideal)
    ways = {}
    for is_mirrored in (False, True):
        about = points - axis
        about = np.conj(about) if is_mirrored else about
        turns = _turns(about[few[:TRIED]], table, ideal)
        ways[is_mirrored] = min(
            (_settled(about[few[:FITTED]], turn, ideal) for turn in turns), key=lambda w: w[2]
        )
    straight, mirror = ways[False][2], ways[True][2]
    is_mirrored = mirror < MIRROR_SHARE * straight and straight > LEAST_MIRROR
    is_other = straight < MIRROR_SHARE * mirror and mirror > LEAST_MIRROR
    angle, shift, rms = ways[is_mirrored]
    # aligned = e^{i angle} (about) + shift, so about = e^{-i angle} (aligned - shift).
    centre = -shift * cmath.exp(-1j * angle)
    centre = centre.conjugate() if is_mirrored else centre
    whole = ideal.period * ideal.pitch
    turn = (angle if is_mirrored else -angle) % whole
    turn = turn - whole if turn > 0.5 * whole else turn
    return Alignment(axis + centre, turn, is_mirrored, not (is_mirrored or is_other), rms)


def _axis(points: ComplexArray, ideal: Ideal, rng: np.random.Generator) -> Point:
    few = points[rng.permutation(points.size)[:TRIED]]
    first, second = (points[rng.integers(0, points.size, PAIRS)] for _ in range(2))
    best, found = 0.0, None
    for radius in (ideal.rim, ideal.bore):
        span = np.abs(second - first)
        use = (span > 0.05 * radius) & (span < 1.95 * radius)
        a, chord, span = first[use], (second - first)[use], span[use]
        if not span.size:
            continue
        rise = np.sqrt(radius**2 - 0.25 * span**2) / span
        for side in (1.0, -1.0):
            centres = a + 0.5 * chord + side * 1j * chord * rise
            gaps = np.abs(few[None, :] - centres[:, None])
            score = (np.abs(gaps - radius) < ON_RIM).sum(axis=1) / radius
            score = score - 5.0 * (gaps > ideal.rim + BEYOND).sum(axis=1) / radius
            top = int(np.argmax(score))
            if score[top] > best:
                best, found = float(score[top]), complex(centres[top])
    if found is None:
        raise OutlineError(
            f"no circle of the design's rim, radius {1e3 * ideal.rim:.4f} mm, in the outline"
        )
    return found


def _table(ideal: Ideal) -> FloatArray:
    """Distances (radii, angles of one period) from the design in m, at most `FAR`."""
    whole = ideal.period * ideal.pitch
    count = round(whole / TURN_STEP)
    radii = ideal.bore + (ideal.rim - ideal.bore) * np.arange(RADII) / (RADII - 1)
    grid = radii[:, None] * np.exp(1j * whole * np.arange(count) / count)
    gaps = np.abs(feet(grid.ravel(), ideal.edges, FAR).distance)
    return np.minimum(gaps, FAR).reshape(grid.shape)


def _turns(about: ComplexArray, table: FloatArray, ideal: Ideal) -> Sequence[float]:
    """The angles that fit best, by the table."""
    whole, count = ideal.period * ideal.pitch, table.shape[1]
    row = (np.abs(about) - ideal.bore) / (ideal.rim - ideal.bore) * (RADII - 1)
    row = np.clip(np.round(row), 0, RADII - 1).astype(int)
    column = np.round(np.angle(about) % whole / whole * count).astype(int)
    tried = np.arange(count)
    cost = table[row[:, None], (column[:, None] + tried) % count].mean(axis=0)
    is_least = (cost <= np.roll(cost, 1)) & (cost <= np.roll(cost, -1))
    least = tried[is_least]
    best = least[np.argsort(cost[least])][:BEST]
    return [whole * float(k) / count for k in best]


def _settled(about: ComplexArray, turn: float, ideal: Ideal) -> tuple[float, Point, float]:
    """Angle, shift and root mean square distance after least squares."""
    edges = ideal.edges
    starts = np.array([e.start for e in edges])
    chords = np.array([e.end for e in edges]) - starts
    sweeps = np.array([e.sweep for e in edges])
    angle, shift, limit = turn, 0j, FAR
    rms = math.inf
    for _ in range(STEPS):
        at = about * cmath.exp(1j * angle) + shift
        found = feet(at, edges, 2.0 * FAR)
        use = np.abs(found.distance) < 2.0 * FAR
        if use.sum() < 10:
            return angle, shift, math.inf
        at, off = at[use], found.distance[use]
        k, share = found.edge[use], found.share[use]
        ahead = chords[k] / np.abs(chords[k]) * np.exp(1j * (share - 0.5) * sweeps[k])
        normal = -1j * ahead
        rows = np.column_stack(
            [normal.real, normal.imag, (np.conj(normal) * 1j * at).real / ideal.rim]
        )
        weight = np.minimum(1.0, limit / np.maximum(np.abs(off), 1e-12)) ** 0.5
        step = np.linalg.lstsq(rows * weight[:, None], -off * weight, rcond=None)[0]
        turned = float(step[2]) / ideal.rim
        shift = shift * cmath.exp(1j * turned) + complex(step[0], step[1])
        angle += turned
        # The middle half of the distances tells what is noise.
        limit = max(4.0 * float(np.median(np.abs(off))), 1e-6)
        rms = float(np.sqrt(np.mean(np.minimum(np.abs(off), FAR) ** 2)))
        if np.abs(step).max() < STILL:
            break
    lost = 1.0 - use.mean()
    return angle, shift, math.hypot(rms, FAR * math.sqrt(float(lost)))


def on_edges(edges: Sequence[Edge], step: float) -> ComplexArray:
    """Points on all edges, `step` m apart at the most."""
    parts = [
        points_on(e, (np.arange(n) + 0.5) / n)
        for e in edges
        for n in [max(2, math.ceil(e.length / step))]
    ]
    return np.concatenate(parts)
