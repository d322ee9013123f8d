"""Closed meshes as STL, 3MF and GLB; the same bytes every time.

3MF declares millimetres. GLB knows only metres, with y up, and is written in them. STL has no units: its header says
that they are millimetres.
"""

from __future__ import annotations

import io
import zipfile
from collections.abc import Iterator, Sequence
from xml.sax.saxutils import escape, quoteattr

import numpy as np
import trimesh
from numpy.typing import NDArray
from trimesh.exchange.stl import export_stl
from trimesh.visual.material import PBRMaterial

from ..shop.solids import Part, Solid
from .style import one_line

COLOURS: dict[Part, tuple[int, int, int, int]] = {
    "web": (222, 196, 140, 255),
    "filler": (176, 64, 48, 255),
    "strip": (52, 56, 64, 255),
    "core": (128, 176, 214, 120),
}
_HEADER = 80  # bytes at the start of a binary STL
_UP = np.array([[1.0, 0.0, 0.0], [0.0, 0.0, 1.0], [0.0, -1.0, 0.0]]) / 1000.0  # glTF: metres, y up
_CORE = "http://schemas.microsoft.com/3dmanufacturing/core/2015/02"
_MODEL = "3D/3dmodel.model"
_PARTS = {
    "[Content_Types].xml": (
        '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        '<Default Extension="model" ContentType="application/vnd.ms-package.3dmanufacturing-3dmodel+xml"/></Types>'
    ),
    "_rels/.rels": (
        '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">'
        f'<Relationship Id="rel0" Target="/{_MODEL}" '
        'Type="http://schemas.microsoft.com/3dmanufacturing/2013/01/3dmodel"/></Relationships>'
    ),
}


def files(solids: Sequence[Solid], kind: str, *, wing: str, stamp: str) -> Iterator[tuple[str, bytes]]:
    """Name and content of each file of a `kind`: one for each mesh for stl, one for them all for 3mf and glb."""
    if kind == "stl":
        for solid in solids:
            yield solid.name, stl(solid, wing=wing, stamp=stamp)
    else:
        yield "panel", (glb if kind == "glb" else threemf)(solids, wing=wing, stamp=stamp)


def stl(solid: Solid, *, wing: str, stamp: str) -> bytes:
    """One mesh as a binary STL file."""
    text = one_line(f"mm; {solid.name}, {solid.hand} hand, revision {stamp}; {wing}")
    header = text.encode("ascii", "replace")[:_HEADER].ljust(_HEADER)
    return header + bytes(export_stl(_trimesh(solid, solid.mesh.points)))[_HEADER:]


def glb(solids: Sequence[Solid], *, wing: str, stamp: str) -> bytes:
    """All meshes of one hand as a scene in one binary glTF file (glTF 2.0: metres, y up)."""
    scene = trimesh.Scene(metadata={"wing": one_line(wing), "hand": solids[0].hand, "revision": stamp})
    for solid in solids:
        mesh = _trimesh(solid, solid.mesh.points @ _UP.T)
        colour = COLOURS[solid.part]
        blend = "BLEND" if colour[3] < 255 else None
        look = PBRMaterial(
            name=solid.material, baseColorFactor=colour, metallicFactor=0.0, roughnessFactor=0.8, alphaMode=blend
        )
        mesh.visual = trimesh.visual.TextureVisuals(material=look)
        scene.add_geometry(mesh, node_name=solid.name, geom_name=solid.name)
    return bytes(scene.export(file_type="glb"))


def threemf(solids: Sequence[Solid], *, wing: str, stamp: str) -> bytes:
    """All meshes of one hand in one 3MF file (3MF core specification), in millimetres.

    Written here, as trimesh's own writer puts random identifiers into the file. Nothing in it is compressed: how a zip
    library packs differs from one machine to another.
    """
    title = escape(one_line(f"{wing}: {solids[0].hand} hand, revision {stamp}"))
    items = "".join(f'<item objectid="{i + 2}"/>' for i in range(len(solids)))
    model = (
        f'<model unit="millimeter" xml:lang="en" xmlns="{_CORE}"><metadata name="Title">{title}</metadata>'
        f"<resources>{_materials(solids)}{''.join(map(_object, range(len(solids)), solids))}</resources>"
        f"<build>{items}</build></model>"
    )
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_STORED) as package:
        for name, text in {**_PARTS, _MODEL: model}.items():
            entry = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
            entry.create_system = 0
            package.writestr(entry, f'<?xml version="1.0" encoding="UTF-8"?>\n{text}\n')
    return out.getvalue()


def _materials(solids: Sequence[Solid]) -> str:
    """What each mesh is made of, in its colour: entry i for mesh i."""
    colours = ("#{:02X}{:02X}{:02X}{:02X}".format(*COLOURS[solid.part]) for solid in solids)
    bases = (
        f'<base name={quoteattr(one_line(solid.material))} displaycolor="{colour}"/>'
        for solid, colour in zip(solids, colours, strict=True)
    )
    return f'<basematerials id="1">{"".join(bases)}</basematerials>'


def _object(index: int, solid: Solid) -> str:
    points, faces = solid.mesh.points.tolist(), solid.mesh.faces.tolist()
    vertices = "".join(['<vertex x="%.4f" y="%.4f" z="%.4f"/>' % (x, y, z) for x, y, z in points])  # noqa: UP031
    triangles = "".join(['<triangle v1="%d" v2="%d" v3="%d"/>' % (a, b, c) for a, b, c in faces])  # noqa: UP031
    return (
        f'<object id="{index + 2}" type="model" name={quoteattr(solid.name)} pid="1" pindex="{index}">'
        f"<mesh><vertices>{vertices}</vertices><triangles>{triangles}</triangles></mesh></object>"
    )


def _trimesh(solid: Solid, points: NDArray[np.float64]) -> trimesh.Trimesh:
    return trimesh.Trimesh(points, solid.mesh.faces, process=False)
