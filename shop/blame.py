"""Which key of the wing file is to blame for a web that leaves the section."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from ..geom import blank, web
from ..geom.web import SIDES, NothingInside, OffSection, Plane, Side
from . import strips
from .wingfile import WingError

if TYPE_CHECKING:
    from .job import Job


def outside(job: Job, fault: OffSection) -> WingError:
    """The error of the first key that puts the web outside: the line, the thickness, the cant, the caps, the skin."""
    upright, canted = job.plane_at(0.0), job.plane_at(job.cant)
    s = np.array([fault.s])
    y = upright.origin[1] + s * upright.s[1]
    skin = job.loft.skin(y, y)[0]
    faces = np.column_stack([job.face(name)(s) for name in blank.FACES])
    here = f"where the {fault.side} edge leaves the section at s = {fault.s:.0f} mm (rib y = {y[0]:.0f} mm)"
    if _line_leaves(job, upright):
        return job.error("web.line", f"wanted a web line inside the section, got one {here}")
    if not _fits(job, upright, s, faces, -skin):
        return job.error("web.thickness", f"wanted faces inside the section, got a web {here}")
    if not _fits(job, canted, s, faces, -skin):
        return job.error("web.cant", f"wanted a cant that keeps the web inside the wing, got one {here}")
    if job.record.caps and _fits(job, canted, s, faces, strips.under(job)):
        return job.error("caps", f"wanted stacks that stay inside the section, got some {here}")
    return job.error("skin.thickness", f"wanted a skin that leaves room for the web, got one {here}")


def nothing_inside(job: Job, fault: NothingInside) -> WingError:
    """The error of the first thing that leaves no height for the web: skin, bond line, caps, how its edges are cut."""
    s = np.array([fault.s])
    faces = np.column_stack([job.face(name)(s) for name in blank.FACES])
    stated = job.record.web

    def left(depth: Callable[[Side], ArrayLike]) -> bool:
        top, bottom = (
            web.edge(job.loft, job.plane_at(job.cant), s[:, None], faces, side, depth(side)).h for side in SIDES
        )
        return bool((top - bottom).min() > 0.0)

    if not left(lambda side: 0.0):
        return job.error("skin.thickness", f"wanted a skin that leaves room for the web, got {fault}")
    if not left(lambda side: stated.bond):
        return job.error("web.bond", f"wanted a bond line that leaves room for the web, got {fault}")
    if not left(lambda side: job.depth[side](s)):
        return job.error("caps", f"wanted stacks that leave room for the web, got {fault}")
    return job.error("web.edge", f"wanted an edge cut that leaves room for the web, got {stated.edge}: {fault}")


def _fits(job: Job, plane: Plane, s: ArrayLike, n: ArrayLike, depth: ArrayLike) -> bool:
    """Whether both edges stand somewhere over the places (s, n), for a surface `depth` mm under the skin."""
    places = np.asarray(s)[:, None]
    return not any(np.isnan(web.edge(job.loft, plane, places, n, side, depth).h).any() for side in SIDES)


def _line_leaves(job: Job, upright: Plane) -> bool:
    """Whether the web line itself runs out of the section somewhere, whatever the sheet."""
    s = np.linspace(0.0, upright.length, 201)
    y = upright.origin[1] + s * upright.s[1]
    return not _fits(job, upright, s, 0.0, -job.loft.skin(y, y)[0][:, None])
