"""The wing file's records of the flanges that tie web and skin, and of the joint end."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import BeforeValidator, Field, ValidationInfo, model_validator

from ..units import shown
from ..values import (
    Density,
    KeyedError,
    Length,
    NotNegative,
    Positive,
    Text,
    Tilt,
    file_units,
    fit,
    read_angle,
    read_force,
    read_fraction,
    read_positive,
)
from .base import Record, said

Bar = Annotated[
    float, BeforeValidator(fit(read_angle, "an angle from 45 to 135 degrees", lambda v: 45.0 <= v <= 135.0))
]
PinForce = Annotated[float, BeforeValidator(fit(read_force, "a force above 0", lambda v: v > 0))]
Layers = Annotated[int, Field(strict=True, ge=1, le=100)]


def read_leg(value: object, info: ValidationInfo) -> tuple[float, float]:
    """Read the width of a skin leg: one length, or two for its inner and outer end."""
    widths = value if isinstance(value, list) else [value, value]
    if len(widths) != 2:
        raise ValueError(f"a length above 0, or two in a list for the inner and the outer end, got {shown(value)}")
    return read_positive(widths[0], info), read_positive(widths[1], info)


SkinLeg = Annotated[tuple[float, float], BeforeValidator(read_leg)]


class Flange(Record):
    """One flange: what it states goes before what [flanges] states for all."""

    bar: Bar | None = Field(default=None, description="the angle of the bar it is laid up over, in degrees")
    web_leg: Positive | None = Field(default=None, description="the width of the leg on the web, a length above 0")
    skin_leg: SkinLeg | None = Field(
        default=None, description="the width of the leg on the skin, a length, or [inner end, outer end]"
    )


class Flanges(Record):
    """Flanges along the web's edges, each made where its own table stands here."""

    bar: Bar = Field(default=90.0, description="the angle of the bar they are laid up over, from 45 to 135 degrees")
    web_leg: Positive = Field(description="the width of the leg on the web, from the corner, a length above 0")
    skin_leg: SkinLeg = Field(
        description="the width of the leg on the skin, from the corner, a length above 0, or [inner end, outer end]"
    )
    inner_radius: NotNegative = Field(description="the radius of the bar's edge, a length of 0 or more")
    cloth: Text | None = Field(default=None, description="the cloth's name in stock")
    layers: Layers | None = Field(default=None, description="the layers of cloth, a whole number from 1 to 100")
    resin_fraction: Annotated[
        float, BeforeValidator(fit(read_fraction, "a fraction from 0 to 0.95", lambda v: 0 <= v <= 0.95))
    ] = Field(default=0.5, description="the resin's share of the laminate's mass, from 0 to 0.95")
    thickness: Positive | None = Field(
        default=None, description="the laminate's thickness, a length above 0; from the cloth unless stated"
    )
    density: Density | None = Field(
        default=None, description="in place of a cloth: the laminate's density, in kg/m^3 where bare"
    )
    max_spring: Tilt = Field(
        default=10.0, description="how far a flange may be sprung from its bar's angle, in degrees up to 45"
    )
    front_top: Flange | None = Field(default=None, description="the flange in front, at the top, a table")
    front_bottom: Flange | None = Field(default=None, description="the flange in front, at the bottom, a table")
    rear_top: Flange | None = Field(default=None, description="the flange behind, at the top, a table")
    rear_bottom: Flange | None = Field(default=None, description="the flange behind, at the bottom, a table")

    @model_validator(mode="after")
    def _laminate(self) -> Self:
        if self.cloth is None:
            for key in ("thickness", "density"):
                if getattr(self, key) is None:
                    raise KeyedError((key,), f"is missing, wanted the laminate's {key}, or a cloth")
            if self.layers is not None:
                raise KeyedError(("layers",), f"wanted only with a cloth, got {self.layers}")
        elif self.layers is None:
            raise KeyedError(("layers",), "is missing, wanted the layers of cloth, a whole number from 1 to 100")
        elif self.density is not None:
            raise KeyedError(("density",), f"wanted none beside a cloth, got {self.density:g}")
        return self

    @model_validator(mode="after")
    def _any(self) -> Self:
        if not self.made:
            raise KeyedError(
                ("front_top",), "is missing, wanted one or more of front_top, front_bottom, rear_top, rear_bottom"
            )
        return self

    @property
    def made(self) -> dict[str, Flange]:
        """The flanges that are made, by key, each with all its figures."""
        keys = ("front_top", "front_bottom", "rear_top", "rear_bottom")
        common = {"bar": self.bar, "web_leg": self.web_leg, "skin_leg": self.skin_leg}
        return {
            key: own.model_copy(update={k: v for k, v in common.items() if getattr(own, k) is None})
            for key in keys
            if (own := getattr(self, key)) is not None
        }


class Joint(Record):
    """One end of the web, thickened over a pin in its tube."""

    end: Literal["inner", "outer"] = Field(default="inner", description='which end of the web: "inner" or "outer"')
    faces: Literal["both", "front", "rear"] = Field(
        default="both", description='where the sheet is thickened: on "both" faces, or on the "front" or "rear" one'
    )
    length: Positive = Field(description="how far from the end the web stays at full thickness, a length above 0")
    taper: Positive = Field(description="the length over which it comes down to the sheet, a length above 0")
    pin: Positive | None = Field(default=None, description="the pin's diameter, a length above 0")
    force: PinForce | None = Field(
        default=None, description="what the pin has to carry in shear at ultimate load, in newtons where bare"
    )
    shear_planes: int = Field(
        default=1, strict=True, ge=1, le=10, description="the planes the pin is sheared in, a whole number from 1 to 10"
    )
    material: Text = Field(default="carbon pin", description="what the pin is made of, a pin in stock")
    wall: NotNegative = Field(description="the wall of the tube round the pin, a length of 0 or more")
    overwrap: NotNegative = Field(default=0.0, description="the overwrap round the tube, a length of 0 or more")
    pin_axis: Literal["along", "upright"] = Field(
        default="along", description='how the pin lies in the web: "along" it, or "upright" across its height'
    )
    pin_length: Positive | None = Field(
        default=None,
        description="the pin's length in the web: unless stated all of the full thickness, or all of the height",
    )
    pin_at: Positive | None = Field(
        default=None, description="how far an upright pin stands from the end; midway in full thickness unless stated"
    )
    height: Length | None = Field(
        default=None,
        description="how high a pin along the web lies over the web line; midway between the seats unless stated",
    )
    pad: Text | None = Field(
        default=None, description="what thickens the sheet, a foam or wood in stock; the web's foam unless stated"
    )

    @model_validator(mode="after")
    def _pin(self, info: ValidationInfo) -> Self:
        if self.pin is None and self.force is None:
            raise KeyedError(("pin",), "is missing, wanted the pin's diameter, or the force it is chosen for")
        for key, axis in (("height", "along"), ("pin_at", "upright")):
            stated = getattr(self, key)
            if stated is not None and self.pin_axis != axis:
                got = said(stated, file_units(info))
                raise KeyedError((key,), f'wanted only with pin_axis = "{axis}", got {got} with "{self.pin_axis}"')
        if self.pin_axis == "along" and self.pin_length is not None and self.pin_length > self.length:
            full, got = (said(v, file_units(info)) for v in (self.length, self.pin_length))
            raise KeyedError(("pin_length",), f"wanted no more than the full thickness's length, {full}, got {got}")
        return self
