"""How many starts the ribs last, where the steel card has fatigue data; never where it has none."""

from pathlib import Path

from lamwright.postprocess.life_figures import life_cautions, life_figures, local_rule
from lamwright.postprocess.quantities import scaled_by_key
from lamwright.postprocess.rib_life import life_errors, zone_lives, zone_stress

from .ribbed import Ribbed, RibChapter


def life_chapter(ribbed: Ribbed, stage: Path) -> RibChapter:
    """Starts from rest to maximum speed, a share of them to overspeed; with their scatter."""
    card, stress = ribbed.machine.rotor_steel, ribbed.stress
    data = card.fatigue
    if data is None:
        lost = f"life: steel card {card.name!r} has no table fatigue"
        return RibChapter((), (), (lost,))
    if ribbed.machine.magnet is not None:
        lost = "life: the magnets' load is not in the local stress of a start, which is too low"
        return RibChapter((), (), (lost,))
    share = ribbed.wishes.overspeed_share
    factor = (ribbed.maximum_speed / ribbed.overspeed) ** 2
    pulled = zone_stress(ribbed.section, stress.solution)
    lives = zone_lives(pulled, card, data, ((factor, 1.0 - share), (1.0, share)))
    figures = life_figures(lives, data, share)
    # Of the shortest life: N goes with stress to the power of 1/b, by every rule nearly or more.
    least = min(range(len(lives)), key=lambda k: lives[k].median)
    off = [float(share) for share in stress.zone_errors]
    steep = off[least] / abs(data.strength_exponent)
    return RibChapter(
        figures=(figures,),
        cautions=(*_of_spin_alone(ribbed), *life_cautions(lives, card, data)),
        of_ribs=lives[:-1],
        errors={
            key: steep * value
            for key, value in (
                ("life_shortest_2_3_percent_cycles", figures.low),
                ("life_shortest_50_percent_cycles", figures.median),
                ("life_shortest_97_7_percent_cycles", figures.high),
            )
        }
        # By every rule the amplitude goes with the stress nearly or less than in proportion.
        | scaled_by_key(figures, {"amplitude": off[least] * figures.amplitude}),
        rib_errors=tuple(
            life_errors(life, share, data) for life, share in zip(lives[:-1], off, strict=False)
        ),
        facts={
            "life_method": data.method,
            "life_local_stress": local_rule(pulled, factor, card, data),
        },
    )


def _of_spin_alone(ribbed: Ribbed) -> tuple[str, ...]:
    """What is stated of the rotor, but not in its life."""
    design = ribbed.machine.design
    parts = {"shaft fit": design.rotor.fit, "heat": design.hot}
    stated = " and ".join(name for name, part in parts.items() if part is not None)
    if not stated:
        return ()
    return (f"life is that of the spin alone: {stated} shifts mean stress, and has its own cycles",)
