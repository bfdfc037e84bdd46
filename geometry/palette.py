"""Colours and names of materials, the same in every drawing.

Chosen by lightness first, so that materials still tell apart when printed in grey: CIE L* falls
from air 100 through stator 88, rotor 75, copper 58 and shaft 43 to magnets 30.
"""

from .section import Material

INK = "#17212b"  # outlines, labels, numbers
QUIET = "#5a6672"  # axes, leaders, second rank text
ACCENT = "#b5341f"  # the one thing to look at: peaks, limits, thinnest places
PAPER = "#ffffff"

FILLS: dict[Material, str] = {
    "air": "#ffffff",
    "stator_steel": "#d6dee4",
    "rotor_steel": "#aebbc6",
    "copper": "#cb7a43",
    "shaft": "#5f6873",
    "magnet": "#1f4e44",
}
# Solid metal in a bore or hole never lies beside another but the shaft, from which a line parts it.
DRAWN_AS: dict[Material, Material] = {"key": "shaft", "rivet": "shaft"}
MATERIAL_NAMES: dict[Material, str] = {
    "rotor_steel": "rotor steel",
    "stator_steel": "stator steel",
    "copper": "copper",
    "air": "air",
    "shaft": "shaft",
    "magnet": "magnet",
    "key": "key",
    "rivet": "rivet",
}
