"""How the rotor sits on its shaft and how hot its parts run; what steel is when hot.

All of it is optional: what is not stated is told as not given, never guessed.
"""

from typing import Annotated

from pydantic import Field

from .design_table import NotNegative, Positive, Table

Temperature = Annotated[float, Field(ge=-60.0, le=300.0)]  # C


class FitDesign(Table):
    """A lamination pressed on a shaft of an elastic material."""

    # Shaft's radius over the bore's at the reference temperature; negative: a loose fit.
    radial_interference_um: Annotated[float, Field(ge=-500.0, le=2000.0)]
    shaft_bore_diameter_mm: NotNegative = 0.0  # 0: solid
    shaft_youngs_modulus_gpa: Annotated[float, Field(ge=10.0, le=1000.0)] = 210.0
    shaft_poissons_ratio: Annotated[float, Field(gt=0.0, lt=0.5)] = 0.3
    shaft_density_kg_per_m3: Annotated[float, Field(ge=1000.0, le=20000.0)] = 7850.0
    shaft_expansion_um_per_m_k: Annotated[float, Field(ge=0.0, le=50.0)] = 12.0


class HotDesign(Table):
    """Steady temperatures in service; the drawing holds at the reference temperature."""

    rotor_temperature_c: Temperature  # of the lamination at the bore
    rim_over_bore_k: Annotated[float, Field(ge=-200.0, le=200.0)] = 0.0
    shaft_temperature_c: Temperature | None = None  # default the lamination's at the bore
    stator_temperature_c: Temperature | None = None  # needed for the gap
    reference_temperature_c: Temperature = 20.0
    run_out_um: NotNegative = 0.0  # of the rotor's rim, that the gap loses

    @property
    def hottest_rotor_c(self) -> float:
        """The higher of the temperatures at bore and rim."""
        return self.rotor_temperature_c + max(self.rim_over_bore_k, 0.0)

    @property
    def shaft_c(self) -> float:
        """The shaft's temperature in C."""
        stated = self.shaft_temperature_c
        return self.rotor_temperature_c if stated is None else stated


class HotSteel(Table):
    """Strength and stiffness of a sheet over the temperature, straight between the points."""

    temperature_c: Annotated[tuple[Temperature, ...], Field(min_length=2)]
    yield_strength_mpa: Annotated[tuple[Positive, ...], Field(min_length=2)]
    youngs_modulus_gpa: Annotated[tuple[Positive, ...], Field(min_length=2)]
    source: Annotated[str, Field(min_length=3)]
