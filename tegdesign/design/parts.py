"""Typed tables shared by a brief and a design: each key, its unit, its limits and its default stand here once."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.module.bridge import bar, bolts
from tegdesign.module.electrode import COPPER_COEFFICIENT, COPPER_RESISTIVITY
from tegdesign.module.gap import FILLERS
from tegdesign.quantity import Measure
from tegdesign.system.model import Part

Length = Annotated[float, Measure("m", "mm"), Field(gt=0, lt=10)]
Thickness = Annotated[float, Measure("m", "mm"), Field(ge=0, lt=1)]
Fraction = Annotated[float, Measure(""), Field(gt=0, le=1)]
Kelvin = Annotated[float, Measure("K", "degC"), Field(gt=0, lt=4000)]
Difference = Annotated[float, Measure("K", "K", True), Field(ge=0, lt=2000)]
Conductivity = Annotated[float, Measure("W/m/K"), Field(gt=0, lt=5000)]
AreaResistance = Annotated[float, Measure("m^2*K/W"), Field(ge=0, lt=1)]
ContactResistivity = Annotated[float, Measure("ohm*m^2"), Field(ge=0, lt=1e-4)]
Ohm = Annotated[float, Measure("ohm"), Field(ge=0)]
Volt = Annotated[float, Measure("V"), Field(gt=0)]
Watt = Annotated[float, Measure("W"), Field(gt=0)]
Count = Annotated[int, Field(strict=True, ge=1, le=10000)]
Doping = Annotated[float, Measure("1/m^3", "1/cm^3"), Field(gt=0)]
GrainSize = Annotated[float, Measure("m", "nm"), Field(gt=0, lt=1e-2)]
Gap = Annotated[float, Measure("m", "mm"), Field(ge=1e-5, lt=10)]


class Plate(Part):
    """Substrate and interface of one side, from the outer face inward."""

    interface: AreaResistance = 3e-5
    substrate_thickness: Thickness = 0.8e-3
    substrate_conductivity: Conductivity = 24.0


class Bolts(Part):
    """Bolts that clamp one module between its plates, each with its insulating washers and sleeves in series."""

    number: Count
    diameter: Length
    length: Length
    conductivity: Conductivity = 16.0
    washer_resistance: Annotated[float, Measure("K/W"), Field(ge=0)] = 0.0

    @property
    def conductance(self) -> float:
        """Heat conductance of all of them [W/K]."""
        return float(bolts(self.number, self.diameter, self.length, self.conductivity, self.washer_resistance))


class Frame(Part):
    """Frame or seal round one module, from plate to plate: its section and its height."""

    area: Annotated[float, Measure("m^2", "mm^2"), Field(gt=0, lt=1)]
    length: Length
    conductivity: Conductivity

    @property
    def conductance(self) -> float:
        """Heat conductance [W/K]."""
        return float(bar(self.area, self.length, self.conductivity))


class Stack(Part):
    """Parts of the module beside the legs. Defaults are typical figures of trade tables, none of any one maker.

    Interface 3e-5 m2 K/W (thin graphite foil or a thick grease line), alumina 24 W/m/K, copper 0.3 mm with the
    resistivity of IEC 60028, joints 2e-9 ohm m2 (laboratory value; bought modules about 3e-9), bolts of stainless steel
    16 W/m/K.
    """

    hot: Plate = Plate()
    cold: Plate = Plate()
    contact_resistivity_n: ContactResistivity = 2e-9
    contact_resistivity_p: ContactResistivity = 2e-9
    contact_thermal_resistance: AreaResistance = 0.0
    electrode_thickness: Thickness = 0.3e-3
    electrode_resistivity: Annotated[float, Measure("ohm*m"), Field(ge=0, lt=1e-5)] = COPPER_RESISTIVITY
    electrode_temperature_coefficient: Annotated[float, Measure("1/K"), Field(ge=0, lt=0.02)] = (
        COPPER_COEFFICIENT
    )
    electrode_conductivity: Conductivity = 390.0
    filler: str = "air"
    filler_conductivity: Annotated[float, Measure("W/m/K"), Field(ge=0, lt=100)] | None = None
    emittance_hot: Fraction = 0.8
    emittance_cold: Fraction = 0.8
    edge_conductance: Annotated[float, Measure("W/K"), Field(ge=0)] = 0.0
    bolts: Bolts | None = None
    frame: Frame | None = None
    lead_resistance: Ohm = 0.0

    @model_validator(mode="after")
    def _known_filler(self) -> Stack:
        if self.filler_conductivity is None and self.filler not in FILLERS:
            raise ValueError(
                f"filler '{self.filler}' is not one of {', '.join(FILLERS)}; give filler_conductivity for another one"
            )
        return self

    @property
    def bridges(self) -> float:
        """Heat conductance beside legs and filler: edge, bolts and frame of one module [W/K]."""
        return self.edge_conductance + sum(part.conductance for part in (self.bolts, self.frame) if part is not None)

    @property
    def filler_law(self) -> tuple[float, float, bool]:
        """Conductivity at 300 K [W/m/K], its power of temperature, and whether thermal radiation passes."""
        if self.filler_conductivity is not None:
            return self.filler_conductivity, 0.0, False
        return FILLERS[self.filler]


class Losses(Part):
    """Switches that leave a loss out, to hold a result against a simpler model; all are on unless switched off."""

    spreading: bool = True
    radiation: bool = True
    bypass: bool = True
    contacts: bool = True
    electrodes: bool = True
    leads: bool = True
    substrates: bool = True
    interfaces: bool = True

    @property
    def off(self) -> list[str]:
        """Names of the losses that are left out."""
        return [name for name, on in self.model_dump().items() if not on]


class Require(Part):
    """What the answer must reach; a requirement that is missed makes the verdict.

    Power is what reaches the user. The limits with ``short_time`` stand in place of the others in states with a
    duration; ``short_time_over_service`` is by how much the service limits of the materials may be passed in them.
    """

    power: Watt | None = None
    voltage: tuple[Volt, Volt] | None = None
    open_circuit_voltage: Volt | None = None
    efficiency: Fraction | None = None
    hot_junction: Kelvin | None = None
    cold_junction: Kelvin | None = None
    short_time_hot_junction: Kelvin | None = None
    short_time_cold_junction: Kelvin | None = None
    short_time_over_service: Difference = 0.0
    heat_flux: Annotated[float, Measure("W/m^2", "W/cm^2"), Field(gt=0)] | None = None

    @model_validator(mode="after")
    def _window(self) -> Require:
        if self.voltage and self.voltage[0] > self.voltage[1]:
            raise ValueError(
                f"voltage window is upside down: {self.voltage[0]:g} V is above {self.voltage[1]:g} V"
            )
        return self


class Made(Part):
    """How the material of a leg is made, where its properties are computed from bands; as in its file if not given.

    A graded leg has ``doping`` at the first and ``doping_hot`` at the second temperature of ``graded_between``.
    """

    doping: Doping | None = None
    doping_hot: Doping | None = None
    graded_between: tuple[Kelvin, Kelvin] | None = None
    grain_size: GrainSize | None = None

    @model_validator(mode="after")
    def _whole(self) -> Made:
        if (self.doping_hot is None) != (self.graded_between is None):
            raise ValueError("a graded leg needs both doping_hot and graded_between; add the other or leave both out")
        if self.doping_hot is not None and self.doping is None:
            raise ValueError("a graded leg needs doping (of the cold end) beside doping_hot; add it")
        if self.graded_between and self.graded_between[0] >= self.graded_between[1]:
            raise ValueError("graded_between must rise, from the cold to the hot end; exchange its temperatures")
        return self

    @property
    def as_filed(self) -> bool:
        """Whether nothing differs from the file of the material."""
        return self.doping is None and self.grain_size is None


class MaterialUse(Part):
    """How far outside their data the materials may be used, and where else to look for them."""

    hold_outside_data: Difference = 0.0
    folder: str | None = None


Aim = Literal["power", "efficiency", "power per footprint", "power per material mass"]
