"""Figures of a machine with magnets: no load, magnet torque, demagnetisation, mass."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from lamwright.geometry.design import MachineDesign, MagnetCard
from lamwright.solver.magnet import magnet_law

from .demagnetisation import MagnetState
from .no_load import NoLoad, cogging_torque, line_emf, linkage_spectrum, peak_linkage
from .quantities import CARD, FORMULA, RPM, STATED, shown_as


@dataclass(frozen=True, slots=True, kw_only=True)
class MagnetFigures:
    """What magnets bring, and what they bear; at no load unless the label says otherwise."""

    peak_linkage: float = field(
        metadata=shown_as("no_load_linkage_peak_vs", "no-load linkage, peak of a phase", "V s")
    )
    linkage: float = field(
        metadata=shown_as("no_load_linkage_fundamental_vs", "no-load linkage, fundamental", "V s")
    )
    psi_q: float = field(
        metadata=shown_as("no_load_psi_q_vs", "q-axis flux linkage at no load", "V s")
    )
    distortion: float = field(
        metadata=shown_as(
            "no_load_linkage_distortion_percent",
            "no-load linkage, harmonics over fundamental",
            "%",
            100.0,
        )
    )
    line_emf: float = field(
        metadata=shown_as("back_emf_v", "back-emf, lines, rated speed, rms", "V")
    )
    line_emf_fundamental: float = field(
        metadata=shown_as("back_emf_fundamental_v", "back-emf between lines, fundamental, rms", "V")
    )
    cogging: float = field(
        metadata=shown_as("cogging_torque_nm", "cogging torque, peak to peak", "N m")
    )
    torque_share: float = field(
        metadata=shown_as("magnet_torque_nm", "torque of the no-load linkage", "N m")
    )
    mass: float = field(
        metadata=shown_as("magnet_mass_kg", "mass of the magnets", "kg", exact=FORMULA)
    )
    temperature: float = field(
        metadata=shown_as("magnet_temperature_c", "temperature of the magnets", "C", exact=STATED)
    )
    remanence: float = field(
        metadata=shown_as("magnet_remanence_t", "remanence at that temperature", "T", exact=CARD)
    )
    demagnetising_current: float = field(
        metadata=shown_as(
            "demagnetising_current_a", "demagnetising current, peak", "A", exact=STATED
        )
    )
    demagnetising_temperature: float = field(
        metadata=shown_as(
            "demagnetising_temperature_c", "magnets' temperature against it", "C", exact=STATED
        )
    )
    knee: float = field(
        metadata=shown_as("magnet_knee_t", "flux density at the knee there", "T", exact=CARD)
    )
    below_knee: float = field(
        metadata=shown_as(
            "magnet_below_knee_percent", "area below the knee, worst magnet", "%", 100.0
        )
    )
    below_knee_all: float = field(
        metadata=shown_as(
            "magnets_below_knee_percent", "area below the knee, all magnets", "%", 100.0
        )
    )


def magnet_figures(
    design: MachineDesign,
    card: MagnetCard,
    record: NoLoad,
    states: Sequence[MagnetState],
    sectors: int,
    currents: tuple[float, float],
) -> MagnetFigures:
    """Figures of the magnets.

    Args:
        design: that the fields are of.
        card: of its magnets.
        record: the machine without current.
        states: of each magnet of a sector at the demagnetising current, worst position.
        sectors: in the machine.
        currents: i_d and i_q of the rated point in A.
    """
    assert design.magnet is not None
    worst = design.magnet.worst_temperature_c
    law, law_worst = (magnet_law(card, t) for t in (design.magnet.temperature_c, worst))
    spectrum = linkage_spectrum(record)
    omega_e = design.pole_pairs * design.duty.rated_speed_rpm / RPM
    emf, fundamental = line_emf(spectrum, omega_e)
    i_d, i_q = currents
    area = sum(state.area for state in states)
    volume = sectors * area * 1e-3 * design.stator.stack_length_mm
    harmonics = math.sqrt(sum(float(a) ** 2 for a in spectrum.amplitude[1:]))
    return MagnetFigures(
        peak_linkage=peak_linkage(record),
        linkage=float(spectrum.amplitude[0]),
        psi_q=record.psi_q,
        distortion=harmonics / float(spectrum.amplitude[0]),
        line_emf=emf,
        line_emf_fundamental=fundamental,
        cogging=cogging_torque(record),
        # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance
        torque_share=1.5 * design.pole_pairs * (record.psi_d * i_q - record.psi_q * i_d),
        mass=card.density_kg_per_m3.value * volume,
        temperature=design.magnet.temperature_c,
        remanence=law.remanence,
        demagnetising_temperature=worst,
        knee=law_worst.knee,
        demagnetising_current=demagnetising_current(design),
        below_knee=max(state.share_below for state in states),
        below_knee_all=sum(state.share_below * state.area for state in states) / area,
    )


def demagnetising_current(design: MachineDesign) -> float:
    """Peak current in A that the magnets must bear; by default the rated."""
    stated = design.duty.demagnetising_current_a
    return design.duty.rated_current_a if stated is None else stated
