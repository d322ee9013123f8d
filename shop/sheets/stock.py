"""Sheets of stock on paper: where each piece lies, with all that is cut and marked on it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import shapely

from ...geom.drawing import Drawing, Hand, Label, Role, Stroke
from ...geom.nest import Laid
from ..job import Job
from ..nesting import Nesting
from ..pieces import Piece
from .layout import Layout

PLAIN = 3.0  # height of lettering
_ARROW = 60.0  # mm
_ROOM = 10.0  # mm that it needs within a sheet, with its lettering


def stock_sheets(job: Job, laid: Sequence[Nesting], hands: Sequence[Hand]) -> list[Drawing]:
    """One drawing for each sheet to be cut up, with what is laid out for all the hands given."""
    places = [(nesting, i) for nesting in laid for i in range(len(nesting.sheets))]
    return [_sheet(job, nesting, i, hands, number) for number, (nesting, i) in enumerate(places, start=1)]


def _sheet(job: Job, nesting: Nesting, index: int, hands: Sequence[Hand], number: int) -> Drawing:
    words, stated = job.wording, job.record.cutting
    long, wide = nesting.size
    placed = [_placed(nesting.pieces[laid.piece], laid) for laid in nesting.sheets[index]]
    border = Stroke(np.array([[0.0, 0.0], [long, 0.0], [long, wide], [0.0, wide]]), Role.NOTE, closed=True, frame=True)
    layout = Layout()
    used_up = max(float(s.points[:, 1].max()) for d in placed for s in d.strokes)
    over = used_up if used_up + _ROOM < wide else wide  # near the pieces, or a page would be printed for its sake
    layout.write(Label("grain or roll", _ARROW + 4.0, over + 2.5, PLAIN))
    whose = " and ".join(hands)
    title = f"{words.length(nesting.thickness)} {nesting.material}, sheet {index + 1} of {len(nesting.sheets)}"
    used = sum(nesting.pieces[laid.piece].shape.area for laid in nesting.sheets[index]) / (long * wide)
    notes = [
        f"Sheet {words.plain(long)} x {words.length(wide)}, grain along its length; {100.0 * used:.0f} % of it is used",
        f"Pieces of the {whose} hand, {words.length(stated.apart if stated else 0.0)} apart; each says which it is",
        "Cut along the outer lines; the web's bevels are planed to the engraved lines of its faces",
        *dict.fromkeys(text for laid in nesting.sheets[index] for text in nesting.pieces[laid.piece].beside),
    ]
    layout.write_notes([job.record.name, title], [*notes, f"Wing file revision {job.stamp}"], 0.0, -4.0)
    return Drawing(
        name=f"stock-sheet-{number}",
        title=f"Stock sheet, {title}",
        stamp=job.stamp,
        hand=hands[0] if len(hands) == 1 else "both",
        strokes=(*(s for d in placed for s in d.strokes), border, *_grain(over)),
        holes=tuple(h for d in placed for h in d.holes),
        labels=(*layout.labels, *(t for d in placed for t in d.labels)),
        notes=tuple(notes),
    )


def _grain(over: float) -> list[Stroke]:
    """An arrow along the grain, over what reaches so far up."""
    y = over + 4.0
    tips = [[_ARROW - 3.0, y + 1.5], [_ARROW, y], [_ARROW - 3.0, y - 1.5]]
    return [Stroke(np.array(line), Role.NOTE) for line in ([[0.0, y], [_ARROW, y]], tips)]


def _placed(piece: Piece, laid: Laid) -> Drawing:
    """The drawing of a piece where it lies on its sheet."""
    sign = -1.0 if laid.turned else 1.0
    drawing = piece.drawing
    x0, y0, x1, y1 = shapely.LinearRing(piece.outline).bounds
    shift = np.array(laid.corner) - (np.array([-x1, -y1]) if laid.turned else np.array([x0, y0]))
    turn = 180.0 if laid.turned else 0.0
    return replace(
        drawing,
        strokes=tuple(replace(s, points=sign * s.points + shift) for s in drawing.strokes),
        holes=tuple(replace(h, x=float(sign * h.x + shift[0]), y=float(sign * h.y + shift[1])) for h in drawing.holes),
        labels=tuple(
            replace(t, x=float(sign * t.x + shift[0]), y=float(sign * t.y + shift[1]), angle=t.angle + turn)
            for t in drawing.labels
        ),
    )
