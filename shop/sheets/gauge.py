"""Bevel gauges on paper: a card for each place along each edge, to be cut out and held to the piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray

from ...geom import gauge
from ...geom.drawing import Drawing, Hand, Role, Stroke
from ...geom.seat import Cut
from ...geom.web import SIDES
from ..job import Job
from ..records.cutting import Gauges
from ..units import MM_PER_INCH
from ..wording import degrees
from .layout import Layout

Array = NDArray[np.float64]

SMALL, PLAIN = 2.5, 3.0  # heights of lettering
HANDFUL = 5  # cards along an edge whose bevel changes all along
_LEG = 42.0  # mm that a card lies along the face, where the web is as high
_WIDE, _TALL = 46.0, 14.0  # mm beside the face and, where the leg is long enough for the lettering, beyond the edge
_LETTERED = 38.0  # mm that the lettering needs from top to bottom
_OVER = 4.0  # mm that a card reaches beyond the far face
_ACROSS = 190.0  # mm that a row of cards may take
_GAP = 5.0  # mm between cards


@dataclass(frozen=True)
class Card:
    """One gauge: the edge and the places s it checks, from and to; they are one place unless it serves a whole run.

    One of an edge cut square serves both edges and every place.
    """

    cut: Cut
    s: float
    run: tuple[float, float] | None


def bevel_gauges(job: Job, hand: Hand = "right") -> list[Drawing]:
    """The sheet of cards for one hand, each as one looks outwards along the span; none for edges cut square.

    An edge cut square is checked with a try square, so cards for it are made only where the wing file asks for some.
    """
    found = cards(job)
    if not found:
        return []
    stated = job.record.gauges or Gauges()
    layout, strokes = Layout(), []
    left, top, low = 0.0, 0.0, 0.0
    for card in found:
        outline = _outline(job, card, stated)
        x0, y0, x1, y1 = shapely.LinearRing(outline).bounds
        if left > 0.0 and left + x1 - x0 > _ACROSS:
            left, top = 0.0, low - _GAP
        moved = outline + np.array([left - x0, top - y1])
        strokes.append(Stroke(moved, Role.CUT_OUTSIDE, closed=True))
        _letter(job, card, stated, layout, moved, hand)
        left, low = left + x1 - x0 + _GAP, min(low, top - (y1 - y0))
    notes = _notes(job, stated, hand)
    heads = (job.record.name, f"bevel gauges, {hand.upper()} hand")
    layout.write_notes(heads, [*notes, f"Wing file revision {job.stamp}"], 0.0, low - 4.0)
    drawing = Drawing(
        name="gauges",
        title="Bevel gauges",
        stamp=job.stamp,
        strokes=tuple(strokes),
        labels=tuple(layout.labels),
        notes=tuple(notes),
    )
    return [drawing if hand == "right" else drawing.mirrored(hand)]


def cards(job: Job) -> list[Card]:
    """The places that are checked, edge by edge.

    Raises
    ------
    WingError
        If a stated place is not on the web.
    """
    stated, length = job.record.gauges, job.web.plane.length
    places = stated.places if stated else None
    for i, s in enumerate(places or ()):
        if s > length:
            wanted = f"a place on the web, 0 to {job.wording.length(length)}"
            raise job.error(f"gauges.places[{i + 1}]", f"wanted {wanted}, got {job.wording.length(s)}")
    if job.record.web.edge == "square":
        return [Card(job.web.top, (places or _handful(job))[0], None)] if stated else []
    found = []
    for side in SIDES:
        cut = job.web.cut(side)
        if places is None and cut.runs:
            step = MM_PER_INCH / 10.0 if job.record.units == "in" else 1.0
            bounds = [(max(0.0, run.start), min(length, run.stop)) for run in cut.runs]
            runs = [(round(start / step) * step, round(stop / step) * step) for start, stop in bounds]
            found += [Card(cut, (start + stop) / 2.0, (start, stop)) for start, stop in runs]
        else:
            found += [Card(cut, s, None) for s in places or _handful(job)]
    return found


def _handful(job: Job) -> list[float]:
    """Places from near one end of the web to near the other, rounded to whole centimetres or half inches."""
    step, length = (MM_PER_INCH / 2.0 if job.record.units == "in" else 10.0), job.web.plane.length
    places = np.unique(np.round(np.linspace(0.03, 0.97, HANDFUL) * length / step) * step)
    return [float(s) for s in places if s <= length]


def _outline(job: Job, card: Card, stated: Gauges) -> Array:
    heights = [high - low for low, high in (face.heights(card.s) for face in job.web.faces)]
    leg, thick = min(_LEG, 0.9 * min(heights)), float(job.thickness(card.s))
    return gauge.card(
        card.cut,
        stated.face,
        card.s,
        leg=leg,
        reach=thick + _OVER,
        wide=_WIDE,
        tall=max(_TALL, _LETTERED - leg),
        relief=min(1.0, thick / 6.0),
    )


def _letter(job: Job, card: Card, stated: Gauges, layout: Layout, outline: Array, hand: Hand) -> None:
    """Write what a card is for into the part of it that lies beside the face."""
    words, cut = job.wording, card.cut
    angle = np.degrees(gauge.corner_angle(cut, stated.face, card.s))
    bevel = (angle - 90.0) * (1.0 if (cut.side == "top") == (stated.face == "front") else -1.0)
    where = "s " + " to ".join(words.plain(s) for s in card.run or (card.s,))
    edge = f"{cut.side.upper()} edge"
    if cut.treatment == "square":
        edge, where = "TOP and BOTTOM", "anywhere along both"
    lines = [
        (edge, PLAIN),
        (where, SMALL),
        (f"bevel {degrees(float(bevel))}", PLAIN),
        (f"corner {angle:.1f}°", SMALL),
        (f"on the {stated.face.upper()} face", SMALL),
        (f"{hand.upper()} hand", SMALL),
        (f"revision {job.stamp}", SMALL),
    ]
    x0, _, x1, y1 = shapely.LinearRing(outline).bounds
    layout.write_block(lines, (x1 - _WIDE if stated.face == "rear" else x0) + 3.0, y1 - 2.0)


def _notes(job: Job, stated: Gauges, hand: Hand) -> list[str]:
    aft = "right" if hand == "right" else "left"
    notes = [
        f"Cards as one looks from ROOT to TIP, aft to the {aft}; glue to stiff sheet before cutting out",
        f"Hold square to the edge, long leg flat on the {stated.face.upper()} face: no light under the short one",
        "Bevel: positive where the edge rises aft; corner: angle of the foam between face and edge",
    ]
    if job.record.web.edge == "square":
        places = ", ".join(job.wording.plain(s) for s in stated.places or _handful(job))
        notes.append(f"Both edges are cut square: one card for either of them, at s {places} and wherever you like")
    return notes
