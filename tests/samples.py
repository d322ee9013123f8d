"""Drawings of our own invention that the export tests write and read back."""

from dataclasses import dataclass

import numpy as np

from wrywing.geom.drawing import Drawing, Hole, Label, Role, Stroke

WING = "Möwe survey wing, outer panel"


@dataclass(frozen=True)
class Sheet:
    name: str
    width: float
    height: float


A4 = Sheet("a4", 210.0, 297.0)  # ISO 216
LETTER = Sheet("letter", 215.9, 279.4)  # ANSI/ASME Y14.1
ROLL = Sheet("roll 420 mm", 420.0, np.inf)


def blank(long=2100.0):
    """A long, thin, wavy outline with a datum, ticks, figures and holes."""
    s = np.linspace(0.0, long, 300)
    top, bottom = 30.0 + 6.0 * np.sin(s / 180.0), -28.0 + 5.0 * np.sin(s / 230.0)
    ring = np.vstack([np.column_stack([s, bottom]), np.column_stack([s, top])[::-1]])
    strokes = [Stroke(ring, Role.CUT_OUTSIDE, closed=True)]
    strokes.append(Stroke(np.array([[0.0, 0.0], [long, 0.0]]), Role.ENGRAVE))
    labels = [Label("ROOT", 8.0, 8.0, 5.0), Label("UP", 40.0, 8.0, 5.0, angle=90.0)]
    for x in np.arange(50.0, long, 50.0):
        t, b = np.interp(x, s, top), np.interp(x, s, bottom)
        strokes += [Stroke(np.array([[x, t], [x, t - 4.0]]), Role.ENGRAVE)]
        strokes += [Stroke(np.array([[x, b], [x, b + 4.0]]), Role.FOLD)]
        labels += [Label(f"{x / 300:.1f}°", x, t + 2.0, 2.5, anchor="middle")]
        labels += [Label(f"{-x / 310:.1f}°", x, b - 4.5, 2.5, anchor="middle")]
    notes = ("Seen from the front", "PVC foam, 8 mm thick")
    labels += [Label(note, 100.0, 14.0 - 5.0 * i) for i, note in enumerate(notes)]
    holes = tuple(Hole(x, 5.0, 6.0) for x in (60.0, long / 2.0, long - 60.0))
    return Drawing("blank", "Web blank, front face", "3fa9c1d2", "right", tuple(strokes), holes, tuple(labels), notes)


def core():
    """A ring too large for a sheet both ways, with little inside it, and a hole on a seam."""
    t = np.linspace(0.0, 2.0 * np.pi, 400, endpoint=False)
    ring = np.column_stack([400.0 * np.cos(t), 320.0 * np.sin(t) + 40.0 * np.cos(3.0 * t)])
    holes = tuple(Hole(float(x), 250.0, 30.0) for x in (-128.0, 0.0, 128.0))
    return Drawing("core", "Core, root end", "3fa9c1d2", "both", (Stroke(ring, Role.CUT_OUTSIDE, True),), holes)


def card(title="Bevel gauge, 3.4°"):
    """A small piece."""
    ring = np.array([[0.0, 0.0], [60.0, 0.0], [60.0, 25.0], [0.0, 30.0]])
    labels = (Label("top, s 1200: 3.4°", 18.0, 10.0),)
    strokes = (Stroke(ring, Role.CUT_OUTSIDE, closed=True),)
    return Drawing("card", title, "3fa9c1d2", "both", strokes, (Hole(10.0, 12.0, 5.0),), labels)
