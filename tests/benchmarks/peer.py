"""The other library's side (NGSolve): the same mesh, order, quadrature, steel and loads.

Its forms are the fastest of those tried on 5 000 and 15 000 elements, one thread:

* iron by the form nu(|grad a|) grad a . grad v, compiled (`Compile()`): assembling it took 0.75 of
  the time of the same energy by `Variation`, which its own line search needs and gets;
* our three quadrature points an element, by an explicit rule: its own choice is six, which both
  take in the gap;
* H(B) as one cubic B-spline of 100 knots: it looks a knot up one by one, 1 600 take twice as long;
* no static condensation: second-order triangles have no unknowns inside;
* its factorisations renewed by `Update()`, which keeps their analysis.

`tuned` goes beyond what its own Newton driver does: the linear elements are assembled once, and
each step adds their entries to those of the iron.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.interpolate import make_interp_spline

from lamwright.geometry.winding import winding_table
from lamwright.solver.model import MagneticModel
from lamwright.solver.steel import NU_0, SteelLaw
from lamwright.solver.types import FloatArray, IntArray

from .ours import Case
from .peer_mesh import OUTER, centre_node, joined_mesh, netgen_mesh

SOLVERS = ("sparsecholesky", "umfpack", "pardiso")  # pardiso where its library is installed
TINY_B2 = 1e-12  # T^2, keeps the root smooth
LAW_KNOTS = 100
LAW_END, LAW_BEYOND = 4.0, (5.0, 7.0, 10.0, 20.0, 40.0)  # T; a straight line beyond the first
THREE_POINTS = [(1 / 6, 1 / 6), (2 / 3, 1 / 6), (1 / 6, 2 / 3)]  # as `kernel.quadrature` with 3


@dataclass(frozen=True, slots=True, eq=False)
class Peer:
    """Space and forms of one pole with the rotor at shift 0.

    Vectors (n_dof,) are in the library's numbering.
    """

    space: Any
    free: Any  # BitArray of unknowns that are not held
    whole: Any  # form of all elements
    energy: Any  # the same by an energy, the currents' included
    iron: Any  # form of the iron alone
    linear: Any  # matrix of all other elements, with places for the iron's entries
    total: Any  # a second one, for the sum
    iron_places: IntArray  # (n_iron_entry,), places of the iron's entries in both
    linkage: FloatArray  # (3, n_dof), phase linkage of one pole per metre of stack
    currents: tuple[Any, Any, Any]  # parameters of `energy`, A


def peer_of(case: Case) -> Peer:
    """Our mesh and machine in the other library."""
    import ngsolve as ngs

    sector = case.model.sector
    joined = joined_mesh(sector)
    mesh = ngs.Mesh(netgen_mesh(joined, sector.pole_pairs))
    assert mesh.ne == sector.rotor.elements.shape[0] + sector.stator.elements.shape[0]
    space = ngs.Periodic(ngs.H1(mesh, order=2, dirichlet=OUTER), phase=[-1])
    free = ngs.BitArray(space.FreeDofs())
    centre = centre_node(joined)
    if centre is not None:
        free.Clear(centre)
    a, v = space.TnT()

    def made(*terms: Any) -> Any:
        form = ngs.BilinearForm(space, symmetric=True)
        for term in terms:
            form += term
        return form

    rule = ngs.IntegrationRule(THREE_POINTS, [1 / 6] * 3)
    quiet = [n for n in joined.region_names if not n.startswith("gap_") and not n.endswith("_iron")]
    d_quiet = ngs.dx(definedon=mesh.Materials("|".join(quiet)), intrules={ngs.TRIG: rule})
    d_gap = ngs.dx(definedon=mesh.Materials("gap_.*"))
    iron, iron_energy = _iron_terms(case.model, mesh, rule, a, v)
    product = NU_0 * (ngs.grad(a) * ngs.grad(v))
    air = (product * d_quiet, product * d_gap)
    air_density = 0.5 * NU_0 * (ngs.grad(a) * ngs.grad(a))
    air_energy = (ngs.Variation(air_density * d_quiet), ngs.Variation(air_density * d_gap))
    # Zero in the iron, so that the matrix has a place for its entries.
    padding = ngs.CF(0.0) * (ngs.grad(a) * ngs.grad(v)) * ngs.dx
    linear, total = (made(*air, padding) for _ in range(2))
    linear.Assemble()
    total.Assemble()
    iron_form = made(*iron)
    iron_form.AssembleLinearization(ngs.GridFunction(space).vec)
    currents = (ngs.Parameter(0.0), ngs.Parameter(0.0), ngs.Parameter(0.0))
    densities = _turn_densities(case, mesh)
    sources = [
        ngs.Variation(
            -sum(float(n) * i for n, i in zip(row, currents, strict=True)) * a * ngs.dx(s)
        )
        for s, row in densities.items()
    ]
    return Peer(
        space=space,
        free=free,
        whole=made(*iron, *air),
        energy=made(*iron_energy, *air_energy, *sources),
        iron=iron_form,
        linear=linear.mat,
        total=total.mat,
        iron_places=_places(iron_form.mat, linear.mat),
        linkage=np.array([_functional(space, v, densities, k) for k in range(3)]),
        currents=currents,
    )


def _iron_terms(
    model: MagneticModel, mesh: Any, rule: Any, a: Any, v: Any
) -> tuple[list[Any], list[Any]]:
    """Terms of the form and of the energy in the iron."""
    import ngsolve as ngs

    b = ngs.sqrt(TINY_B2 + ngs.grad(a) * ngs.grad(a))
    laws = {"rotor_iron": model.iron.rotor_law, "stator_iron": model.iron.stator_law}
    if model.iron.rotor_law is model.iron.stator_law:
        laws = {"rotor_iron|stator_iron": model.iron.rotor_law}
    forms, energies = [], []
    for names, law in laws.items():
        curve = _curve(law)
        d_iron = ngs.dx(definedon=mesh.Materials(names), intrules={ngs.TRIG: rule})
        forms.append((curve(b) / b * (ngs.grad(a) * ngs.grad(v))).Compile() * d_iron)
        energies.append(ngs.Variation(curve.Integrate()(b).Compile() * d_iron))
    return forms, energies


def _curve(law: SteelLaw) -> Any:
    """H(B) as the library's B-spline, its knots where log H bends."""
    import ngsolve as ngs

    grid = np.linspace(0.0, LAW_END, 4001)
    h = law.field_strength(grid)
    density = np.abs(np.gradient(np.log(h + 100.0), grid)) + 0.3
    share = np.cumsum(density) - density[0]
    knots = np.interp(np.linspace(0.0, 1.0, LAW_KNOTS), share / share[-1], grid)
    b = np.append(knots, LAW_BEYOND)
    spline = make_interp_spline(b, law.field_strength(b), k=3)
    return ngs.BSpline(4, [*spline.t], [*spline.c])


def _turn_densities(case: Case, mesh: Any) -> dict[str, FloatArray]:
    """Signed conductors (3,) over the area, in 1/m^2, of each coil side."""
    import ngsolve as ngs

    winding = winding_table(case.machine.design)
    densities = {}
    for slot in range(winding.slots // winding.poles):
        for layer in range(winding.layers):
            name = f"slot_{slot}_layer_{layer}"
            area = ngs.Integrate(1.0, mesh, definedon=mesh.Materials(name), order=4)
            densities[name] = winding.conductors[slot, layer] / area
    return densities


def _functional(space: Any, v: Any, densities: dict[str, FloatArray], phase: int) -> FloatArray:
    import ngsolve as ngs

    form = ngs.LinearForm(space)
    for name, density in densities.items():
        form += float(density[phase]) * v * ngs.dx(name)
    form.Assemble()
    return np.array(form.vec.FV().NumPy())


def _places(inner: Any, outer: Any) -> IntArray:
    """Places of the entries of one sparse matrix among those of another that holds them all."""

    def keys(matrix: Any) -> IntArray:
        _, column, start = (np.array(part, dtype=np.int64) for part in matrix.CSR())
        row = np.repeat(np.arange(start.size - 1), np.diff(start))
        found: IntArray = row * matrix.width + column
        return found

    wanted, held = keys(inner), keys(outer)
    places = np.searchsorted(held, wanted)
    assert np.array_equal(held[places], wanted)
    return places


class PeerEnergy:
    """The field's energy by the other library, as `minimise` takes it."""

    def __init__(self, peer: Peer, load: FloatArray, solver: str, tuned: bool = False) -> None:
        """Work with one of `SOLVERS`; `tuned` keeps the linear elements assembled."""
        import ngsolve as ngs

        self._peer, self._load, self._solver, self._tuned = peer, load, solver, tuned
        self._form = peer.iron if tuned else peer.whole
        self._field = ngs.GridFunction(peer.space).vec
        self._right, self._left = self._field.CreateVector(), self._field.CreateVector()
        self._held = np.array([not bit for bit in peer.free])
        self._inverse: Any = None

    def residual(self, a: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Residual (n_dof,) in A, zero where the potential is held."""
        self._field.FV().NumPy()[:] = a
        self._form.Apply(self._field, self._right)
        if self._tuned:
            self._right.data += self._peer.linear * self._field
        r: FloatArray = self._right.FV().NumPy() - self._load
        r[self._held] = 0.0
        return r, a

    def solve_tangent(self, state: FloatArray, rhs: FloatArray) -> FloatArray:
        """Solution (n_dof,) of the tangent system at the potentials `state`."""
        self._field.FV().NumPy()[:] = state
        self._form.AssembleLinearization(self._field)
        matrix = self._form.mat
        if self._tuned:
            matrix, iron = self._peer.total, matrix
            entries = matrix.AsVector().FV().NumPy()
            entries[:] = self._peer.linear.AsVector().FV().NumPy()
            entries[self._peer.iron_places] += iron.AsVector().FV().NumPy()
        if self._inverse is None:
            self._inverse = matrix.Inverse(self._peer.free, inverse=self._solver)
        else:
            self._inverse.Update()
        self._right.FV().NumPy()[:] = rhs
        self._left.data = self._inverse * self._right
        return np.array(self._left.FV().NumPy())


def working_solvers(peer: Peer) -> list[str]:
    """Those of `SOLVERS` that this build of the library has."""
    import ngsolve as ngs

    peer.whole.AssembleLinearization(ngs.GridFunction(peer.space).vec)
    found = []
    for name in SOLVERS:
        try:
            peer.whole.mat.Inverse(peer.free, inverse=name)
        except Exception:  # the library has one kind of error for everything
            continue
        found.append(name)
    return found


class OwnNewton:
    """The library's own Newton driver: it halves a step until the energy falls."""

    def __init__(self, peer: Peer, i_abc: FloatArray, solver: str) -> None:
        """Prepare for currents in A."""
        import ngsolve as ngs
        from ngsolve.nonlinearsolvers import NewtonSolver

        for parameter, current in zip(peer.currents, i_abc, strict=True):
            parameter.Set(float(current))
        self._form, self._held = peer.energy, np.array([not bit for bit in peer.free])
        self._field = ngs.GridFunction(peer.space)
        self._driver = NewtonSolver(peer.energy, self._field, freedofs=peer.free, inverse=solver)
        self._stop = 0.0

    def aim(self, residual: float) -> None:
        """Find the driver's own measure sqrt(r . da) at which the residual's norm in A has fallen.

        It tests before it applies a step, so the last step counts.
        """
        reached: list[float] = []
        vector = self._field.vec.CreateVector()

        def look(_: int, error: float) -> None:
            self._form.Apply(self._field.vec, vector)
            r = np.where(self._held, 0.0, vector.FV().NumPy())
            if not reached and np.linalg.norm(r) <= residual:
                reached.append(error)

        self._field.vec[:] = 0.0
        self._driver.Solve(maxit=60, maxerr=1e-13, linesearch=True, callback=look)
        self._stop = 1.0001 * reached[0]

    def solve(self) -> FloatArray:
        """The potentials (n_dof,), from nothing to the tolerance aimed at."""
        self._field.vec[:] = 0.0
        status, self.steps = self._driver.Solve(maxit=60, maxerr=self._stop, linesearch=True)
        assert status == 0
        return np.array(self._field.vec.FV().NumPy())
