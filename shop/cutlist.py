"""The cut list: every piece with its size, how many of it there are, and what it weighs."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from ..geom import core
from .describe.strips import cut_length
from .job import Job
from .masses import Masses
from .nesting import Nesting, nestings
from .pieces import Piece, other_pieces
from .records.caps import Facing
from .records.cutting import Cutting
from .stock import Foam, Strip
from .units import GRAM

Array = NDArray[np.float64]

Kind = Literal["sheet", "strip", "cloth", "laminate", "block", "tube"]
NOT_STATED = "not stated"


@dataclass(frozen=True)
class Cut:
    """One line of the cut list: mm and grams.

    Attributes
    ----------
    kind
        What it is cut from: a sheet, a strip, cloth, a block, a tube, or it is laid up.
    piece, material
        What it is and what it is made of.
    size
        Length x width x thickness in the wing file's units.
    length, width, thickness
        Of what it is cut from, grain along the length; 0 where it has none.
    each_hand, both_hands
        How many.
    mass, mass_both
        Of one finished piece, and of all for both hands; None where its material says nothing.
    """

    kind: Kind
    piece: str
    material: str
    size: str
    length: float
    width: float
    thickness: float
    each_hand: int
    both_hands: int
    mass: float | None
    mass_both: float | None


def cut_list(job: Job, laid: Sequence[Nesting] | None = None) -> list[Cut]:
    """Every piece of the panel.

    Parameters
    ----------
    laid
        How pieces lie on sheets of stock, if that is known already.
    """
    laid = nestings(job) if laid is None else laid
    weights = job.masses
    return [
        *_web_sheet(job, laid, weights),
        *_other_sheets(job, weights),
        *_strips(job),
        *_cloths(job, weights),
        *_flanges(job),
        *_cores(job),
        *_bare(job),
        *_tube(job),
    ]


def _cut(
    job: Job, kind: Kind, piece: str, material: str, size: tuple[float, float, float], count: int, mass: float | None
) -> Cut:
    """One line; a size that is 0 is not written."""
    words, (length, width, thickness) = job.wording, size
    written = [words.column(v, 2 if words.units == "in" else 1) for v in (length, width) if v]
    written += [words.plain(thickness)] if thickness else []
    return Cut(
        kind=kind,
        piece=piece,
        material=material,
        size=f"{' x '.join(written)} {words.units}",
        length=round(length, 2),
        width=round(width, 2),
        thickness=round(thickness, 3),
        each_hand=count,
        both_hands=2 * count,
        mass=None if mass is None else round(mass, 2),
        mass_both=None if mass is None else round(2 * count * mass, 2),
    )


def _extent(points: Array) -> tuple[float, float]:
    wide, high = np.ptp(points, axis=0).tolist()
    return wide, high


def _web_sheet(job: Job, laid: Sequence[Nesting], weights: Masses) -> Iterator[Cut]:
    """The web's sheet, in the pieces in which it lies on its stock; each has its share of the finished web's foam."""
    found = [p for n in laid for p in n.pieces if p.drawing.hand == "right" and p.drawing.name.startswith("web-sheet")]
    if not found:
        yield _cut(job, "sheet", "Web sheet", job.record.web.foam, (*_web_extent(job), job.web.plain), 1, weights.foam)
    area = sum(piece.shape.area for piece in found)
    for piece in found:
        yield _of_piece(job, piece, weights.foam * piece.shape.area / area)


def _web_extent(job: Job) -> tuple[float, float]:
    return _extent(np.concatenate([face.outline() for face in job.web.faces]))


def _other_sheets(job: Job, weights: Masses) -> Iterator[Cut]:
    """The joint's pads, tapered as they are, and ribs and cradles whose sheet is stated."""
    found = other_pieces(job, job.record.cutting or Cutting(), "right")
    pads = sum(p.shape.area for p in found[: len(job.pads)])
    for i, piece in enumerate(found):
        density = job.stock.find(piece.material, Foam).density
        flat = piece.shape.area * piece.thickness * density * GRAM
        yield _of_piece(job, piece, weights.pads * piece.shape.area / pads if i < len(job.pads) else flat)


def _of_piece(job: Job, piece: Piece, mass: float) -> Cut:
    size = *_extent(piece.outline), piece.thickness
    return _cut(job, "sheet", piece.drawing.title, piece.material, size, 1, mass)


def _strips(job: Job) -> Iterator[Cut]:
    caps = job.record.caps
    if caps is None:
        return
    density = job.stock.find(caps.strip, Strip).density
    for layer in job.layers:
        name, size = f"Cap strip, {layer.side} edge, layer {layer.number}", (layer.length, caps.width, caps.thickness)
        line = _cut(job, "strip", name, caps.strip, size, layer.count, layer.volume / layer.count * density * GRAM)
        section = f"{job.wording.plain(caps.width)} x {job.wording.length(caps.thickness)}"
        yield replace(line, size=f"{cut_length(job, layer)} of {section}")


def _cloths(job: Job, weights: Masses) -> Iterator[Cut]:
    """Facings and cover plies; their masses are those of cloth and resin."""
    facing, caps = job.record.web.facing, job.record.caps
    if facing is not None:
        count = 2 * facing.layers
        size = *_web_extent(job), 0.0
        yield _cut(job, "cloth", "Web facing, on the bias", cloth_name(facing), size, count, weights.facing / count)
    if caps is not None and caps.cover is not None:
        count, longest = 2 * caps.cover.layers, max(layer.length for layer in job.layers)
        size = longest, float(job.web.survey.thickness.max()), 0.0
        yield _cut(job, "cloth", "Ply over the cap strips", cloth_name(caps.cover), size, count, weights.cover / count)


def cloth_name(of: Facing) -> str:
    """The cloth's name in stock, or its areal weight."""
    return of.cloth or f"cloth of {of.areal_weight:g} g/m²"


def _flanges(job: Job) -> Iterator[Cut]:
    stated = job.record.flanges
    for made in job.flanges:
        material = f"{stated.layers} x {stated.cloth}" if stated and stated.cloth else "laminate"
        size = *_extent(made.flange.outline), made.flange.shape.thickness
        yield _cut(job, "laminate", f"Flange, {made.flange.name}", material, size, 1, made.mass)


def _cores(job: Job) -> Iterator[Cut]:
    """The block of each bay, upright; the mass is that of the finished core."""
    for made in job.cores:
        for i, bay in enumerate(made.bays, start=1):
            wide, high = bay.upright
            mesh = core.solid(made.loft, replace(made.region, ends=(bay.ends[0].y, bay.ends[1].y)))
            name = f"Block of core {made.number}, {made.stated.region}, bay {i}"
            mass = mesh.volume * made.foam.density * GRAM
            yield _cut(job, "block", name, made.foam.name, (bay.length, wide, high), 1, mass)


def _bare(job: Job) -> Iterator[Cut]:
    """Ribs and cradles whose sheet is not stated: their sizes alone."""
    cutting, words = job.record.cutting or Cutting(), job.wording
    if job.record.ribs is not None and cutting.ribs is None:
        for i, rib in enumerate(job.ribs, start=1):
            size = *_extent(np.concatenate(rib.pieces)), job.record.ribs.thickness
            yield _cut(job, "sheet", f"Rib {i}, y {words.length(rib.y)}", NOT_STATED, size, 1, None)
    if cutting.cradles is None:
        for i, cradle in enumerate(job.cradles, start=1):
            size = *_extent(cradle.outline), 0.0
            yield _cut(job, "sheet", f"Cradle {i}, y {words.length(cradle.y)}", NOT_STATED, size, 1, None)


def _tube(job: Job) -> Iterator[Cut]:
    """The tube round the joint's pin, as long as it is in the web; its width is its outside diameter."""
    end, tube = job.joint, job.tube
    if end is None or tube is None:
        return
    size = float(np.hypot(*np.subtract(tube.stop, tube.start))), end.pin + 2.0 * end.stated.wall, 0.0
    yield _cut(job, "tube", f"Tube for the pin, bore {job.wording.length(end.pin)}", NOT_STATED, size, 1, None)
