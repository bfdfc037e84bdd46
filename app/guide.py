"""Where a guide tells more about a fault: one line after the faults of bad input."""

import re

from lamwright.geometry.errors import CardError, DesignError, LamwrightError, MagnetCardError

from .study import StudyError

_DESIGN, _STUDY = "designs/README.md", "designs/studies/README.md"
_BARRIERS = "geometry/README.md"
# By the first words of a key, longer ones before shorter; a test holds each to a heading.
SECTIONS: dict[str, tuple[str, str]] = {
    "rotor.barrier.magnet": (_DESIGN, "Magnets in barriers"),
    "rotor.barrier.shape": (_BARRIERS, "What its sides are"),
    "rotor.barrier.end_shape": (_BARRIERS, "How it ends"),
    "rotor.barrier": (_DESIGN, "Barriers"),
    "rotor.alternate_barrier": (_DESIGN, "Barriers"),
    "rotor.notch": (_DESIGN, "Notches, holes, keyways and rim"),
    "rotor.hole": (_DESIGN, "Notches, holes, keyways and rim"),
    "rotor.keyway": (_DESIGN, "Notches, holes, keyways and rim"),
    "rotor.contour": (_DESIGN, "Notches, holes, keyways and rim"),
    "rotor.fit": (_DESIGN, "Shaft fit"),
    "rotor": (_DESIGN, "Rotor"),
    "stator": (_DESIGN, "Stator"),
    "winding": (_DESIGN, "Winding"),
    "steel": (_DESIGN, "Steel and magnets"),
    "magnet": (_DESIGN, "Steel and magnets"),
    "duty": (_DESIGN, "Duty"),
    "losses": (_DESIGN, "Losses and heat"),
    "hot": (_DESIGN, "Losses and heat"),
    "tolerance": (_DESIGN, "Tolerances"),
    "limits": (_DESIGN, "Limits"),
    "name": (_DESIGN, "From your motor to a design file"),
    "note": (_DESIGN, "From your motor to a design file"),
}
# Cards and studies have words that a design has too, such as `hot` and `tolerance`.
CARD_SECTIONS: dict[str, tuple[str, str]] = {
    "fatigue": (_DESIGN, "Life in starts: a table of the steel card"),
    "": (_DESIGN, "Steel cards"),
}
MAGNET_SECTIONS: dict[str, tuple[str, str]] = {"": (_DESIGN, "Magnet cards")}
STUDY_SECTIONS: dict[str, tuple[str, str]] = {
    "vary": (_STUDY, "Keys that vary"),
    "": (_STUDY, "The study file"),
}
# A later kind, which is one of an earlier, decides.
_BY_KIND = (
    (StudyError, STUDY_SECTIONS),
    (CardError, CARD_SECTIONS),
    (MagnetCardError, MAGNET_SECTIONS),
)
# The key of `demo.toml:14: rotor.gap_mm = -0.4: too small`; the first fault speaks for all.
_KEY = re.compile(r":\d+: (\w+(?:\[\d+\])?(?:\.\w+(?:\[\d+\])?)*)(?: =|:)")


def pointer(error: LamwrightError) -> tuple[str, ...]:
    """The line that names file and section of the guide, none where nothing fits."""
    if not isinstance(error, DesignError):
        return ()
    table = SECTIONS
    for kind, its in _BY_KIND:
        table = its if isinstance(error, kind) else table
    found = _KEY.search(str(error))
    if found is None:
        return ()
    key = re.sub(r"\[\d+\]", "", found[1])
    for start, (file, section) in table.items():
        if start in ("", key) or key.startswith(f"{start}."):
            return (f'more: {file}, section "{section}"',)
    return ()
