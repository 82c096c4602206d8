"""The keys of a run file: their types, units (in the name) and allowed words.

Knows the whole contract of the run file; does not know files, materials or laws. Units are already the inside ones:
load.py turns time_min, pressure_mTorr, thickness_um and their kin before it asks here.
"""

from datetime import date
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

from filmfit.result import Results

Positive = Annotated[float, Field(gt=0)]
NotNegative = Annotated[float, Field(ge=0)]
Angle = Annotated[float, Field(ge=0, le=85)]
Name = Annotated[str, Field(min_length=1)]
RunId = Annotated[str, Field(pattern=r"^[A-Za-z0-9][A-Za-z0-9._-]*$", max_length=100)]

# Values of the contract that this version refuses as "not supported yet", by key.
LATER_VALUES: dict[str, tuple[str, ...]] = {
    "relative_to": ("bare-plate", "standard"),
    "accessory": ("double-bounce", "sphere"),
    "back": ("rough",),
}
LATER_KEYS = ("standard", "standard_sigma", "back_layer", "roughness_nm", "gradient", "mask_nm", "kind", "target_mode")


class Keys(BaseModel):
    """Base of all tables: strict types, no unknown key, no NaN, no change afterwards."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True, allow_inf_nan=False)


class Value(Keys):
    """A number that is fixed (`value`), expected (`value`, `sigma`), bounded (`low`, `high`) or begun at (`start`)."""

    value: float | None = None
    sigma: Positive | None = None
    low: float | None = None
    high: float | None = None
    start: float | None = None

    @model_validator(mode="after")
    def _consistent(self) -> "Value":
        if self.sigma is not None and self.value is None:
            raise ValueError("sigma without the value it belongs to")
        if self.low is not None and self.high is not None and self.low >= self.high:
            raise ValueError(f"low = {self.low:g} is not below high = {self.high:g}")
        if not self.model_fields_set:
            raise ValueError("an empty table: give value, sigma, low, high or start")
        return self


class Process(Keys):
    """What a layer may state for itself, else it is taken from [run]."""

    source: str | None = None
    process: str | None = None
    time_s: Positive | None = None
    power_W: Positive | None = None
    flows_sccm: dict[str, NotNegative] | None = None


class Run(Process):
    """[run]: the deposition's name, date and conditions."""

    id: RunId
    date: date
    film: Name
    recipe: str | None = None
    chamber: str | None = None
    time_from: Literal["shutter", "plasma"] = "shutter"
    carrier_speed_m_min: Positive | None = None
    passes: Annotated[int, Field(ge=1)] | None = None
    pressure_Pa: Positive | None = None
    substrate_temperature_C: float | None = None
    source_energy_kWh: NotNegative | None = None
    crystal_nm: Positive | None = None
    crystal_tooling_percent: Positive | None = None
    crystal_density_g_cm3: Positive | None = None
    crystal_z_ratio: Positive | None = None
    step_nm: Positive | None = None


class Sample(Keys):
    """[sample]: which piece of the plate, where, in which state."""

    name: str | None = None
    position_mm: Annotated[tuple[float, float], Field(strict=False)] | None = None
    state: str = "as-deposited"


class BareSpectrum(Keys):
    """[[substrate.spectrum]]: the bare plate on the same instrument."""

    file: Name
    quantity: Literal["R", "T"]
    column: str | int | None = None
    angle_deg: Angle = 0.0
    polarization: Literal["mean", "s", "p"] = "mean"
    sigma: Positive | None = None


class Substrate(Keys):
    """[substrate]: the thick plate."""

    thickness_mm: Positive
    material: Name | None = None
    back: Literal["bare", "blackened", "index-matched"] = "bare"
    spectrum: Annotated[tuple[BareSpectrum, ...], Field(strict=False)] = ()

    @model_validator(mode="after")
    def _known(self) -> "Substrate":
        if self.material is None and not any(one.quantity == "T" for one in self.spectrum):
            raise ValueError("neither a material nor the bare plate's own T: the plate is not known")
        return self


class Layer(Process):
    """[[layer]]: one layer, from the substrate up."""

    name: Name
    material: Name | None = None
    like: Name | None = None
    model: Literal["tco", "dielectric", "metal"] | None = None
    laws: Annotated[tuple[str, ...], Field(strict=False)] | None = None
    thickness_nm: float | Value | None = None
    deposited: bool = True
    main: bool = False
    parameters: dict[str, float | Value] = {}

    @model_validator(mode="after")
    def _one_kind(self) -> "Layer":
        given = [key for key in ("material", "like", "model", "laws") if getattr(self, key)]
        if len(given) != 1:
            found = " and ".join(given) or "none of them"
            raise ValueError(f"a layer has one of material, like, model, laws; found {found}")
        return self


class Spectrum(BareSpectrum):
    """[[spectrum]]: a measured spectrum of the coated plate."""

    side: Literal["film", "substrate"] = "film"
    relative_to: Literal["air"] = "air"
    accessory: Literal["specular"] = "specular"


class Instrument(Keys):
    """[instrument]: what the spectrophotometer is trusted to; each has a default that is printed."""

    id: Name = "instrument"
    scale_sigma_R: Positive = 0.006
    scale_sigma_T: Positive = 0.003
    offset_sigma_nm: Positive = 0.3
    slit_nm: NotNegative | None = None


class Electrical(Keys):
    """[electrical]: what was measured with probes, and the effective mass."""

    sheet_resistance_ohm: Positive | None = None
    sheet_resistance_sigma: Positive | None = None
    effective_mass: Positive | None = None
    effective_mass_sigma: Positive | None = None
    hall_density_cm3: Positive | None = None


class Limit(Keys):
    """A plate limit on one result."""

    low: float | None = None
    high: float | None = None


class Content(Keys):
    """The whole file."""

    format: Literal[1]
    run: Run
    other: dict[str, str | float | int | bool] = {}
    sample: Sample = Sample()
    substrate: Substrate
    layer: Annotated[tuple[Layer, ...], Field(strict=False, min_length=1)]
    spectrum: Annotated[tuple[Spectrum, ...], Field(strict=False, min_length=1)]
    instrument: Instrument = Instrument()
    electrical: Electrical = Electrical()
    limits: dict[str, Limit] = {}

    @model_validator(mode="after")
    def _consistent(self) -> "Content":
        names = [layer.name for layer in self.layer]
        twice = sorted({name for name in names if names.count(name) > 1})
        if twice:
            raise ValueError(f"two layers named '{twice[0]}': every layer has its own name")
        if sum(layer.main for layer in self.layer) > 1:
            raise ValueError("more than one layer with main = true")
        if self.substrate.back != "bare" and any(one.side == "substrate" for one in self.spectrum):
            raise ValueError(f'side = "substrate" with back = "{self.substrate.back}": no light enters that face')
        unknown = [key for key in self.limits if key not in Results.model_fields]
        if unknown:
            raise ValueError(f"[limits] names no result '{unknown[0]}'; allowed: {', '.join(Results.model_fields)}")
        return self


def as_record(content: Content) -> dict[str, Any]:
    """Return everything in the file as plain JSON types, defaults that were not stated left out."""
    record: dict[str, Any] = content.model_dump(mode="json", exclude_unset=True)
    return record
