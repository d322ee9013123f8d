"""The flanges as stated: laid along the built web, weighed, and refused where they would be sprung too far."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from ..geom.blank import FACES, FaceName
from ..geom.flange import Flange, Shape, TooWide, lay, require_room
from ..geom.seat import Along
from ..geom.web import SIDES, Side
from .laminate import laminate
from .records.caps import Facing
from .records.joint import Flange as Stated
from .records.joint import Flanges
from .units import GRAM
from .values import KeyedError
from .wording import degrees

if TYPE_CHECKING:
    from .built import BuiltWeb
    from .job import Job


@dataclass(frozen=True)
class BuiltFlange:
    """A flange along the web, its mass in grams, and its key in the wing file."""

    key: str
    flange: Flange
    mass: float


def built(job: Job, web: BuiltWeb) -> tuple[BuiltFlange, ...]:
    """The stated flanges along a web.

    Raises
    ------
    KeyedError
        If one has no room, or would be sprung further than the stated limit.
    """
    stated = job.record.flanges
    if stated is None:
        return ()
    thickness, areal = _laminate(job, stated)
    made, found = [], stated.made
    for face, side in product(FACES, SIDES):
        key = f"{face}_{side}"
        if key in found:
            shape = _shape(found[key], stated, thickness, web.plane.length)
            laid = _laid(job, web, key, side, face, shape)
            _require_spring(job, key, laid, stated.max_spring)
            made.append(BuiltFlange(key, laid, laid.area * areal * GRAM))
    _require_height(job, web, made)
    return tuple(made)


def _laid(job: Job, web: BuiltWeb, key: str, side: Side, face: FaceName, shape: Shape) -> Flange:
    _require_legs(job, key, shape)
    i = 0 if face == "front" else -1
    n, ends = job.face(face, web.plain), (float(web.survey.starts[side][i]), float(web.survey.stops[side][i]))
    try:
        require_room(job.loft, web.plane, side, face, n=n, ends=ends, shape=shape)
    except TooWide as fault:
        raise _too_wide(job, key, face, fault, web) from None
    return lay(job.loft, web.plane, side, face, n=n, ends=ends, shape=shape)


def _laminate(job: Job, stated: Flanges) -> tuple[float, float]:
    """Thickness in mm and g/m^2 of the laminate: as stated, or from the cloth."""
    if stated.cloth is None:
        thickness, density = stated.thickness or 0.0, stated.density or 0.0
        return thickness, thickness * density
    cloth = Facing(cloth=stated.cloth, layers=stated.layers or 1, resin_fraction=stated.resin_fraction)
    laid = laminate(cloth, job.stock, job.record.web.adhesive)
    return stated.thickness or laid.thickness or 0.0, laid.areal


def _shape(own: Stated, stated: Flanges, thickness: float, length: float) -> Shape:
    return Shape(
        bar=float(np.radians(own.bar if own.bar is not None else stated.bar)),
        web_leg=own.web_leg or stated.web_leg,
        skin_leg=Along(np.array([0.0, length]), np.array(own.skin_leg or stated.skin_leg)),
        thickness=thickness,
        inner_radius=stated.inner_radius,
    )


def _require_legs(job: Job, key: str, shape: Shape) -> None:
    """Each leg has a flat part beside the bend."""
    words = job.wording
    for name, leg in (("web_leg", shape.web_leg), ("skin_leg", float(shape.skin_leg.value.min()))):
        if leg <= shape.setback:
            raise KeyedError(
                ("flanges", key, name),
                f"wanted a leg wider than the bend, {words.length(shape.setback)} from the corner, "
                f"got {words.length(leg)}",
            )


def _rib(web: BuiltWeb, s: float) -> float:
    return float(web.plane.origin[1] + s * web.plane.s[1])


def _here(job: Job, web: BuiltWeb, s: float) -> str:
    return f"s = {job.wording.plain(s)} (rib y = {job.wording.length(_rib(web, s))})"


def _too_wide(job: Job, key: str, face: str, fault: TooWide, web: BuiltWeb) -> KeyedError:
    words = job.wording
    end = "nose" if face == "front" else "trailing edge"
    return KeyedError(
        ("flanges", key, "skin_leg"),
        f"wanted no more than the room under the skin to the section's {end}, {words.length(fault.room)} at "
        f"{_here(job, web, fault.s)}, got {words.length(fault.leg)}",
    )


def _require_spring(job: Job, key: str, laid: Flange, limit: float) -> None:
    spring = np.degrees(laid.spring)
    i = int(np.abs(spring).argmax())
    if abs(spring[i]) <= limit:
        return
    bar, best = np.degrees(laid.shape.bar), np.degrees(laid.best_bar)
    raise KeyedError(
        ("flanges", key, "bar"),
        f"wanted a bar within {limit:g}° of every angle asked for, got {bar:g}° where web and skin ask for "
        f"{np.degrees(laid.angle[i]):.1f}° at s = {job.wording.length(float(laid.s[i]))}, "
        f"{'open' if spring[i] > 0 else 'closed'} by {abs(spring[i]):.1f}° (least spring: {best:.1f}°)",
    )


def _require_height(job: Job, web: BuiltWeb, made: list[BuiltFlange]) -> None:
    """The web legs at the two edges of a face do not meet, nor run over the other edge."""
    survey = web.survey
    for face in FACES:
        legs = {m.flange.side: m.flange.shape.web_leg for m in made if m.flange.face == face}
        i = 0 if face == "front" else -1
        tall = survey.skin["top"][..., i] - survey.skin["bottom"][..., i]
        on_web = (survey.s >= survey.starts["top"][i]) & (survey.s <= survey.stops["top"][i])
        height = np.where(on_web, tall, np.inf)
        least = int(height.argmin())
        room = float(height.flat[least])
        if legs and sum(legs.values()) > room:
            key = next(m.key for m in made if m.flange.face == face)
            words = job.wording
            got = " and ".join(words.length(leg) for leg in legs.values())
            raise KeyedError(
                ("flanges", key, "web_leg"),
                f"wanted web legs that find room on the {face} face, {words.length(room)} high at "
                f"{_here(job, web, float(survey.s.flat[least]))}, got {got}",
            )


def sprung(laid: Flange) -> str:
    """How far a flange is sprung, in words: ``-2.1° to +3.4°``."""
    spring = np.degrees(laid.spring)
    return f"{degrees(float(spring.min()))} to {degrees(float(spring.max()))}"
