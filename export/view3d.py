"""The panel in three dimensions: what the report's viewer is given, and the still picture that stands in for it."""

from __future__ import annotations

import base64
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from ..geom.core import Mesh
from ..geom.profile import inner, symmetric
from ..geom.web import SIDES
from ..shop.job import Job
from .plot import FILL, FOAM, INK, QUIET, SKIN, STRIP, WIDTH, Array

_T = symmetric(np.linspace(0.0, 1.0, 41))
_ROWS = 65
_PARTS = {
    "skin": ("skin", SKIN, 0.22),
    "web": ("web", FOAM, 1.0),
    "filler": ("filler", FILL, 1.0),
    "strip": ("cap strips", STRIP, 1.0),
    "core": ("foam cores", "#56b4e9", 0.35),
}


@dataclass(frozen=True)
class View:
    """A fixed view: its name, the way to the eye, and the place it is turned to with how much of it is shown."""

    name: str
    eye: tuple[float, float, float]
    target: Array
    size: tuple[float, float]

    @cached_property
    def axes(self) -> Array:
        """(2, 3) unit vectors to the right and up in the picture; z is held upright."""
        return _axes(self.eye)


def _axes(eye: tuple[float, float, float]) -> Array:
    ahead = -np.array(eye) / np.linalg.norm(eye)
    right = np.cross(ahead, [0.0, 0.0, 1.0])
    right /= np.linalg.norm(right)
    return np.stack([right, np.cross(right, ahead)])


_EYES = {
    "Three-quarter": (0.75, -0.55, 0.6),
    "Plan": (0.001, 0.0, 1.0),
    "Rear": (1.0, 0.0, 0.0),
    "Root": (0.0, -1.0, 0.0),
}
_ENDS = {"Web, inner end": (0, -1.0), "Web, outer end": (1, 1.0)}


def scene(job: Job) -> dict[str, Any]:
    """Meshes, lines and views, mm about the panel's middle; arrays as base64 of little-endian float32 and uint32."""
    skin = _skin(job)
    low, high = skin.points.min(axis=0), skin.points.max(axis=0)
    middle = (low + high) / 2.0
    bodies = [("skin", skin), *((body.part, body.mesh) for body in job.solids)]
    parts = [{"part": part, "position": _f32(mesh.points - middle), "index": _u32(mesh.faces)} for part, mesh in bodies]
    used = {part for part, _ in bodies}
    return {
        "kinds": [
            {"part": part, "label": label, "colour": colour, "opacity": opacity, "shown": part != "core"}
            for part, (label, colour, opacity) in _PARTS.items()
            if part in used
        ],
        "parts": parts,
        "lines": [_f32(line - middle) for line in _contours(job)],
        "views": [
            {
                "name": view.name,
                "eye": list(view.eye),
                "target": _rounded(view.target - middle),
                "size": _rounded(view.size),
            }
            for view in views(job, skin.points)
        ],
        "reach": round(float(np.linalg.norm(high - low)), 1),
    }


def _rounded(values: Any) -> list[float]:
    return [round(float(v), 3) + 0.0 for v in values]


def _f32(values: Array) -> str:
    return base64.b64encode(np.round(values, 5).astype("<f4").tobytes()).decode("ascii")


def _u32(values: NDArray[np.intp]) -> str:
    return base64.b64encode(values.astype("<u4").tobytes()).decode("ascii")


def _skin(job: Job) -> Mesh:
    """The outer surface, open at both ends."""
    y = np.union1d(np.linspace(job.loft.y[0], job.loft.y[-1], _ROWS), job.loft.knots)
    points = job.loft.outer(_T, y[:, None])[0]
    index = np.arange(len(y) * len(_T)).reshape(len(y), len(_T))
    a, b, c, d = (v.ravel() for v in (index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]))
    return Mesh(points.reshape(-1, 3), np.concatenate([np.column_stack([a, b, c]), np.column_stack([a, c, d])]))


def _contours(job: Job) -> list[Array]:
    """The outer surface at every station, and both sides of the skin at the web's ends."""
    found = [job.loft.outer(_T, float(y))[0] for y in np.union1d(job.loft.y, job.record.web.ends)]
    return found + [inner(job.loft, _T, y)[0] for y in job.record.web.ends]


def views(job: Job, points: Array) -> list[View]:
    """The fixed views: the whole panel from four sides, and both ends of the web from outside."""
    found = []
    for name, eye in _EYES.items():
        seen = points @ _axes(eye).T
        middle = (seen.max(axis=0) + seen.min(axis=0)) / 2.0
        wide, high = np.ptp(seen, axis=0)
        found.append(View(name, eye, middle @ _axes(eye), (float(wide), float(high))))
    for name, (end, sign) in _ENDS.items():
        row = job.rows([0.0 if end == 0 else job.web.plane.length])[0]
        top, bottom = (row.top.front + row.top.rear) / 2.0, (row.bottom.front + row.bottom.rear) / 2.0
        target = job.web.plane.point(row.s, (top + bottom) / 2.0, 0.0)
        found.append(View(name, (0.0, sign, 0.0), target, (1.3 * (top - bottom),) * 2))
    return found


def still(job: Job) -> Figure:
    """The three-quarter view as lines: sections, web, strips and filler along its edges."""
    skin = _skin(job).points
    view = views(job, skin)[0]

    def seen(points: Array) -> Array:
        return np.asarray((points - view.target) @ view.axes.T)

    wide, high = view.size
    made = Figure(figsize=(WIDTH, WIDTH * high / wide + 0.1))
    ax = made.add_axes((0.01, 0.01, 0.98, 0.98))
    ax.set_axis_off()
    ax.set_aspect("equal")
    _sections(job, ax, seen)
    for face in job.web.faces:
        sides = [np.append(side[::10], side[-1:], axis=0) for side in (face.bottom, face.top)]
        ring = np.concatenate([sides[0], sides[1][::-1]])
        ax.fill(
            *seen(job.web.plane.point(ring[:, 0], ring[:, 1], job.face(face.name)(ring[:, 0]))).T,
            facecolor=FOAM,
            edgecolor=INK,
            linewidth=0.6,
        )
    _edges(job, ax, seen)
    ax.set_xlim(-0.51 * wide, 0.51 * wide)
    ax.set_ylim(-0.52 * high, 0.52 * high)
    return made


def _sections(job: Job, ax: Axes, seen: Any) -> None:
    for y in np.linspace(job.loft.y[0], job.loft.y[-1], 21):
        ax.plot(*seen(job.loft.outer(_T[::2], y)[0]).T, color=SKIN, linewidth=0.5)
    for y in job.loft.y[[0, -1]]:
        ax.fill(*seen(job.loft.outer(_T, y)[0]).T, facecolor=SKIN, alpha=0.18, edgecolor=QUIET, linewidth=0.9)
    y = np.linspace(job.loft.y[0], job.loft.y[-1], 41)
    for t in (-1.0, -0.6, 0.0, 0.6, 1.0):
        ax.plot(*seen(job.loft.outer(t, y)[0]).T, color=QUIET if abs(t) in (0.0, 1.0) else SKIN, linewidth=0.9)


def _edges(job: Job, ax: Axes, seen: Any) -> None:
    """Filler and strips as lines along both edges, the thicker the more layers lie on top of one another."""
    plane, survey = job.web.plane, job.web.survey
    for side in SIDES:
        s, h = survey.s[::3, 1], survey.skin[side][::3, 1, survey.skin[side].shape[-1] // 2]
        ax.plot(*seen(plane.point(s, h, 0.0)).T, color=FILL, linewidth=1.6)
        for layer in (layer for layer in job.layers if layer.side == side):
            on = s <= layer.stop
            ax.plot(
                *seen(plane.point(s[on], h[on], 0.0)).T,
                color=STRIP,
                linewidth=1.0 + 0.8 * layer.number,
                solid_capstyle="butt",
            )
