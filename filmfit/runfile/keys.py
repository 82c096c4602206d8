"""The keys of a run file: their types, units (in the name) and allowed words.

Knows the whole contract of the run file; does not know files, materials or laws. Units are already the inside ones:
spelled.py turns time_min, pressure_mTorr, thickness_um and their kin before. What keys must agree on among each other
stands in consistency.py.
"""

from datetime import date
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Discriminator, Field, Tag, model_validator

RUN_ID = r"^[A-Za-z0-9][A-Za-z0-9._-]*$"
Positive = Annotated[float, Field(gt=0)]
NotNegative = Annotated[float, Field(ge=0)]
Angle = Annotated[float, Field(ge=0, le=85)]
Name = Annotated[str, Field(min_length=1, pattern=r"\S")]
RunId = Annotated[str, Field(pattern=RUN_ID, max_length=100)]

# Which arm of a choice of types a value belongs to; no key of a user can be spelled like these.
TAGS = ("<number>", "<table>", "<text>", "<whole>", "<truth>")

# Values of the contract that this version refuses as "not supported yet", by key.
LATER_VALUES: dict[str, tuple[str, ...]] = {
    "relative_to": ("bare-plate", "standard"),
    "accessory": ("double-bounce", "sphere"),
    "back": ("rough",),
}
LATER_KEYS = ("standard", "standard_sigma", "back_layer", "roughness_nm", "gradient", "mask_nm")


class Keys(BaseModel):
    """Base of all tables: strict types, no unknown key, no NaN, no change afterwards."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True, allow_inf_nan=False)


def _number_or_table(given: object) -> str:
    """Say which arm of `float | table` a value is checked against."""
    return "<table>" if isinstance(given, dict | BaseModel) else "<number>"


def _text_or_whole(given: object) -> str | None:
    """Say which arm of `str | int` a value is checked against; None where it is neither."""
    return {str: "<text>", int: "<whole>"}.get(type(given))


def _plain(given: object) -> str | None:
    """Say which arm of a lab's own value it is checked against; None where it is no plain value."""
    kinds = {bool: "<truth>", int: "<whole>", float: "<number>", str: "<text>"}
    return kinds.get(type(given))


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
        beside = sorted(self.model_fields_set - {"value"})
        if self.value is not None and self.sigma is None and beside:
            raise ValueError(f"value without sigma is fixed, but {beside[0]} stands beside it")
        for name, number in (("value", self.value), ("start", self.start)):
            if number is not None and self.low is not None and number < self.low:
                raise ValueError(f"{name} = {number:g} is below low = {self.low:g}")
            if number is not None and self.high is not None and number > self.high:
                raise ValueError(f"{name} = {number:g} is above high = {self.high:g}")
        return self


class Thickness(Value):
    """A thickness with what is known of it; all of it positive."""

    value: Positive | None = None
    low: NotNegative | None = None
    high: Positive | None = None
    start: Positive | None = None


Parameter = Annotated[
    Annotated[float, Tag("<number>")] | Annotated[Value, Tag("<table>")], Discriminator(_number_or_table)
]
Depth = Annotated[
    Annotated[Positive, Tag("<number>")] | Annotated[Thickness, Tag("<table>")], Discriminator(_number_or_table)
]
Column = Annotated[
    Annotated[Name, Tag("<text>")] | Annotated[int, Tag("<whole>")],
    Discriminator(_text_or_whole, custom_error_type="column", custom_error_message="a heading in quotes, or a number"),
]
Plain = Annotated[
    Annotated[str, Tag("<text>")]
    | Annotated[float, Tag("<number>")]
    | Annotated[int, Tag("<whole>")]
    | Annotated[bool, Tag("<truth>")],
    Discriminator(
        _plain,
        custom_error_type="plain_type",
        custom_error_message="a number, a text in quotes, true or false",
    ),
]


class Process(Keys):
    """What a layer may state for itself, else it is taken from [run]."""

    source: Name | None = None
    process: str | None = None
    time_s: Positive | None = None
    power_W: Positive | None = None
    flows_sccm: dict[str, NotNegative] | None = None


class Run(Process):
    """[run]: the deposition's name, date and conditions."""

    id: RunId
    date: date
    film: Name
    recipe: Name | None = None
    kind: Literal["run", "control-plate"] = "run"
    target_mode: Literal["metallic", "transition", "oxide"] | None = None
    chamber: Name | None = None
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

    name: Name | None = None
    position_mm: Annotated[tuple[float, float], Field(strict=False)] | None = None
    state: Name = "as-deposited"


class BareSpectrum(Keys):
    """[[substrate.spectrum]]: the bare plate on the same instrument."""

    file: Name
    quantity: Literal["R", "T"]
    column: Column | None = None
    angle_deg: Angle = 0.0
    polarization: Literal["mean", "s", "p"] = "mean"
    sigma: Positive | None = None


class Substrate(Keys):
    """[substrate]: the thick plate."""

    thickness_mm: Annotated[float, Field(gt=0, le=100)]
    material: Name | None = None
    back: Literal["bare", "blackened", "index-matched"] = "bare"
    spectrum: Annotated[tuple[BareSpectrum, ...], Field(strict=False)] = ()


class Layer(Process):
    """[[layer]]: one layer, from the substrate up."""

    name: Name
    material: Name | None = None
    like: Name | None = None
    model: Literal["tco", "dielectric", "metal"] | None = None
    laws: Annotated[tuple[Name, ...], Field(strict=False)] | None = None
    thickness_nm: Depth | None = None
    deposited: bool = True
    main: bool = False
    parameters: dict[str, Parameter] = {}


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
    """A plate limit on one result, on one side or on both."""

    low: float | None = None
    high: float | None = None

    @model_validator(mode="after")
    def _consistent(self) -> "Limit":
        if self.low is None and self.high is None:
            raise ValueError("an empty limit: give low, high or both")
        if self.low is not None and self.high is not None and self.low >= self.high:
            raise ValueError(f"low = {self.low:g} is not below high = {self.high:g}")
        return self


class Content(Keys):
    """The whole file."""

    format: Literal[1]
    run: Run
    other: dict[str, Plain] = {}
    sample: Sample = Sample()
    substrate: Substrate
    layer: Annotated[tuple[Layer, ...], Field(strict=False, min_length=1)]
    spectrum: Annotated[tuple[Spectrum, ...], Field(strict=False, min_length=1)]
    instrument: Instrument = Instrument()
    electrical: Electrical = Electrical()
    limits: dict[str, Limit] = {}


def as_record(content: Content) -> dict[str, Any]:
    """Return everything in the file as plain JSON types, defaults that were not stated left out."""
    record: dict[str, Any] = content.model_dump(mode="json", exclude_unset=True)
    return record
