"""How far the figures of magnets are off by the mesh, in the figures' own units.

No load: the mean linkages are off as those under load are (`solver.estimate`). What their errors
waver by from position to position goes into the harmonics: all of it, for a wave's peak, its
distortion and the emf of all orders; for the last as if it were of the slots' order, whose emf is
so many times larger. These three are bounds. Below the knee: the same field on the finer mesh.
"""

import math
from collections.abc import Sequence

from lamwright.geometry.design import MachineDesign
from lamwright.solver.estimate import BEYOND, NoLoadErrors

from .demagnetisation import MagnetState
from .error_bars import by_key
from .magnet_figures import MagnetFigures
from .quantities import RPM


def magnet_errors(
    design: MachineDesign,
    figures: MagnetFigures,
    errors: NoLoadErrors,
    means: tuple[float, float],
    currents: tuple[float, float],
    states: tuple[Sequence[MagnetState], Sequence[MagnetState]],
) -> dict[str, float]:
    """Errors by the figures' keys.

    Args:
        design: that the fields are of.
        figures: of its magnets.
        errors: of the no-load waveform.
        means: psi_d and psi_q at no load in V s.
        currents: i_d and i_q of the rated point in A.
        states: of each magnet, on the mesh and on the finer one.
    """
    f, known, (i_d, i_q) = figures, errors.linkages, currents
    omega_e = design.pole_pairs * design.duty.rated_speed_rpm / RPM
    linkage = known.of(math.hypot, *means)
    waver = math.sqrt(2.0) * errors.waver  # amplitude of a wave of this rms
    slot_wave = design.stator.slots / design.pole_pairs + 1.0  # electrical order of a phase
    of_lines = math.sqrt(1.5) * omega_e  # rms between lines over a phase's linkage
    fundamental = of_lines * linkage
    others = math.sqrt(max(f.line_emf**2 - f.line_emf_fundamental**2, 0.0))
    harmonics = of_lines * slot_wave * waver
    own, finer = states
    off = [
        state_errors(*pair)["below_knee_percent"] / 100.0 for pair in zip(own, finer, strict=True)
    ]
    worst = max(range(len(own)), key=lambda k: own[k].share_below)
    area = sum(state.area for state in own)
    return by_key(
        f,
        {
            "peak_linkage": linkage + waver,
            "linkage": linkage,
            "psi_q": known.of(lambda d, q: q, *means),
            "distortion": (waver + f.distortion * linkage) / f.linkage,
            "line_emf": (f.line_emf_fundamental * fundamental + others * harmonics) / f.line_emf
            + 0.5 * harmonics**2 / f.line_emf,
            "line_emf_fundamental": fundamental,
            "cogging": errors.cogging,
            # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance
            "torque_share": known.of(
                lambda d, q: 1.5 * design.pole_pairs * (d * i_q - q * i_d), *means
            ),
            "below_knee": off[worst],
            "below_knee_all": sum(s.area * e for s, e in zip(own, off, strict=True)) / area,
        },
    )


def state_errors(state: MagnetState, finer: MagnetState) -> dict[str, float]:
    """Errors of one magnet's state by key.

    Args:
        state: on the mesh.
        finer: in the same field on the finer mesh.
    """
    share = BEYOND * abs(finer.share_below - state.share_below) + state.grain
    return {
        "below_knee_percent": 100.0 * share,
        "flux_density_low_t": BEYOND * abs(finer.flux_low - state.flux_low),
        "flux_density_mean_t": BEYOND * abs(finer.flux_mean - state.flux_mean),
    }
