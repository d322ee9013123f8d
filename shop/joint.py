"""The joint end as stated: its pin, how thick the web becomes over it, and whether both find room."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from ..geom import joint as geometry
from ..geom.blank import FACES, FaceName
from ..geom.joint import Pad, Thickening, Tube
from ..geom.seat import Survey
from ..geom.web import Plane, Side
from .records.joint import Joint
from .stock import Pin
from .values import KeyedError

if TYPE_CHECKING:
    from .built import BuiltWeb
    from .job import Job

_NO_PAD = 1e-6  # mm


@dataclass(frozen=True)
class PinStrength:
    """What the pin carries in shear: planes x shear strength x cross-section; N and MPa.

    `origin` says where the shear strength comes from; `force` and `reserve` are None where no force is stated.
    """

    shear: float
    origin: str
    planes: int
    carries: float
    force: float | None

    @property
    def reserve(self) -> float | None:
        """Reserve factor: what it carries over what it has to."""
        return None if self.force is None else self.carries / self.force


@dataclass(frozen=True)
class JointEnd:
    """The joint end: the pin's diameter, whether it was chosen from stock, and what it makes of the web; mm."""

    stated: Joint
    pin: float
    chosen: bool
    strength: PinStrength
    thickening: Thickening

    @property
    def across(self) -> float:
        """Pin, tube and overwrap, and so the web's thickness at that end."""
        return self.thickening.thickness


def joint_end(job: Job) -> JointEnd | None:
    """The joint end of a wing file, if it states one.

    Raises
    ------
    KeyedError
        If no pin carries the force, or the thickened part does not go on the web.
    """
    stated = job.record.joint
    if stated is None:
        return None
    material = job.stock.find(stated.material, Pin)
    pin = _chosen(job, stated, material) if stated.pin is None else stated.pin
    origin = job.stock.origin(stated.material, "shear")
    carries = _carries(pin, stated, material)
    strength = PinStrength(material.shear, origin, stated.shear_planes, carries, stated.force)
    if strength.reserve is not None and strength.reserve < 1.0:
        raise _weak("pin", job, stated, f"a {stated.material} of {job.wording.length(pin)}", strength)
    across = geometry.across(pin, wall=stated.wall, overwrap=stated.overwrap)
    length = job.plane_at(0.0).length
    end = Thickening(across, stated.length, stated.taper, length, stated.end, stated.faces)
    _require_lengths(job, stated, end)
    return JointEnd(stated, pin, stated.pin is None, strength, end)


def _carries(pin: float, stated: Joint, material: Pin) -> float:
    return stated.shear_planes * material.shear * geometry.area(pin)


def _chosen(job: Job, stated: Joint, material: Pin) -> float:
    """The thinnest pin in stock that carries the stated force."""
    sizes = material.sizes(job.record.units)
    for pin in sizes:
        if _carries(pin, stated, material) >= (stated.force or 0.0):
            return pin
    strength = PinStrength(material.shear, "", stated.shear_planes, _carries(sizes[-1], stated, material), stated.force)
    got = f"a {stated.material} of {job.wording.length(sizes[-1])}, the thickest,"
    raise _weak("force", job, stated, got, strength)


def _weak(key: str, job: Job, stated: Joint, got: str, strength: PinStrength) -> KeyedError:
    words = job.wording
    planes = "1 plane" if strength.planes == 1 else f"{strength.planes} planes"
    bears = f"{words.force(strength.carries)} in {planes} at {words.stress(strength.shear)}"
    return KeyedError(
        ("joint", key), f"wanted a pin that carries {words.force(stated.force or 0.0)}, got {got} that carries {bears}"
    )


def _require_lengths(job: Job, stated: Joint, end: Thickening) -> None:
    words, sheet = job.wording, job.record.web.thickness
    if sheet > end.thickness + _NO_PAD:
        raise KeyedError(("web", "thickness"), thicker_than_joint(job, end.thickness, sheet))
    whole = end.full + end.taper
    if whole >= end.length:
        raise KeyedError(
            ("joint", "taper"),
            f"wanted a joint that ends on the web, {words.length(end.length)} long, got {words.plain(end.full)} at "
            f"full thickness and {words.plain(end.taper)} of taper, {words.length(whole)} in all",
        )
    radius = end.thickness / 2.0
    at = stated.pin_at if stated.pin_at is not None else end.full / 2.0
    if stated.pin_axis == "upright" and not radius <= at <= end.full - radius:
        key = "pin_at" if stated.pin_at is not None else "length"
        low, high = words.plain(radius), words.plain(end.full - radius)
        raise KeyedError(
            ("joint", key),
            f"wanted a pin, {words.length(end.thickness)} across with its overwrap, within the full thickness, "
            f"{low} to {high} from the end, got {words.length(at)}",
        )


def thicker_than_joint(job: Job, across: float, sheet: float) -> str:
    """What is wrong with a sheet thicker than the joint."""
    words = job.wording
    return (
        f"wanted a sheet no thicker than its joint, {words.length(across)} over pin, tube and overwrap, "
        f"got {words.length(sheet)}"
    )


def tube(job: Job, end: JointEnd, web: Plane, survey: Survey) -> Tube:
    """Where the tube lies in a web, both seats leaving room for it.

    Raises
    ------
    KeyedError
        If pin, tube and overwrap do not fit between the seats.
    """
    _require_cover(job, end, survey)
    aside = float(end.thickening.over(float(survey.thickness.min()))[1](end.thickening.place(0.0)))
    make = _along if end.stated.pin_axis == "along" else _upright
    laid = make(job, end, web, aside)
    _require_fit(job, end, web, laid)
    return laid


def _require_cover(job: Job, end: JointEnd, survey: Survey) -> None:
    """The web is at full thickness wherever the rib plane cuts its end."""
    cuts = survey.starts if end.stated.end == "inner" else survey.stops
    reach = max(float(np.abs(cuts[side] - end.thickening.place(0.0)).max()) for side in cuts)
    if reach >= end.stated.length:
        words = job.wording
        raise KeyedError(
            ("joint", "length"),
            f"wanted a full thickness that covers the web's end, which the rib plane cuts up to {words.length(reach)} "
            f"from the end of the web line, got {words.length(end.stated.length)}",
        )


def _along(job: Job, end: JointEnd, web: Plane, n: float) -> Tube:
    reach = end.stated.pin_length or end.stated.length
    first, last = end.thickening.place(0.0), end.thickening.place(reach)
    level = Tube((first, 0.0), (last, 0.0), n, end.across)
    height = end.stated.height
    if height is None:
        room = geometry.fit(job.loft, web, level, job.depth).room
        height = (room["top"] - room["bottom"]) / 2.0
    return replace(level, start=(first, height), stop=(last, height))


def _upright(job: Job, end: JointEnd, web: Plane, n: float) -> Tube:
    at = end.stated.pin_at if end.stated.pin_at is not None else end.stated.length / 2.0
    s = end.thickening.place(at)
    low, high = _seats(job, web, s, n, end.across)
    half = (high - low if end.stated.pin_length is None else end.stated.pin_length) / 2.0
    middle = (low + high) / 2.0
    return Tube((s, middle - half), (s, middle + half), n, end.across)


def _seats(job: Job, web: Plane, s: float, n: float, across: float) -> tuple[float, float]:
    """Highest bottom seat and lowest top seat over a disc about a place (s, n)."""
    room = geometry.fit(job.loft, web, Tube((s, 0.0), (s, 0.0), n, across), job.depth).room
    return -room["bottom"], room["top"]


def _require_fit(job: Job, end: JointEnd, web: Plane, laid: Tube) -> None:
    found = geometry.fit(job.loft, web, laid, job.depth)
    side: Side = found.worst
    if found.room[side] >= -_NO_PAD:
        return
    words, stated = job.wording, end.stated
    key = "pin_length" if stated.pin_axis == "upright" else "height" if stated.height is not None else "pin"
    low, high = _seats(job, web, found.s[side], laid.n, 0.0)
    tall = abs(laid.stop[1] - laid.start[1])
    size = f"{words.length(end.across)} across" + (f" and {words.length(tall)} long" if key == "pin_length" else "")
    raise KeyedError(
        ("joint", key),
        f"wanted a pin that lies between the seats with tube and overwrap, {size}, got one that stands "
        f"{words.length(-found.room[side])} out of the {side} seat at s = {words.length(found.s[side])}, "
        f"where the seats are {words.length(high - low)} apart",
    )


def pads(job: Job, end: JointEnd, built: BuiltWeb) -> tuple[Pad, ...]:
    """What is laid on the sheet's faces; none where the sheet is as thick as the joint."""
    sheet = built.plain
    faces: list[FaceName] = [face for face in FACES if end.thickening.pad(sheet, face) > _NO_PAD]
    return tuple(geometry.pad(built.plane, built.top, built.bottom, end.thickening, sheet, face) for face in faces)
