"""Closed meshes: closed, the right way round, uncrossed, as large as computed, and the same when read back."""

from __future__ import annotations

import io
from pathlib import Path

import kernel
import manifold3d
import numpy as np
import pytest
import shapely
import trimesh
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from lxml import etree
from wings import loft, slab

from wrywing.export import mesh as formats
from wrywing.geom import seat, solid, web
from wrywing.geom.drawing import Role
from wrywing.shop import job as jobs
from wrywing.shop.nesting import nestings
from wrywing.shop.sheets import drawings as sheets
from wrywing.shop.sheets.stock import stock_sheets
from wrywing.shop.solids import built, solids
from wrywing.shop.wingfile import WingError

EXAMPLES = Path(__file__).parent.parent / "examples"
WORDS = {"wing": "Möwe <outer> & panel", "stamp": "3fa9c1d2"}


@pytest.fixture(scope="module", params=["saltpan", "highmoor"])
def job(request):
    return jobs.load(EXAMPLES / f"{request.param}.toml")


@pytest.fixture(scope="module")
def bodies(job):
    return {body.name: body for body in solids(job)}


def plain(mesh):
    return trimesh.Trimesh(mesh.points, mesh.faces, process=False)


def is_closed(mesh):
    return mesh.is_watertight and mesh.is_winding_consistent and mesh.volume > 0.0 and mesh.body_count == 1


def crossings(mesh):
    """Edges that go through a triangle they share no corner with (Möller and Trumbore 1997)."""
    p, faces = mesh.points, mesh.faces
    edges = np.unique(np.sort(np.concatenate([faces[:, [0, 1]], faces[:, [1, 2]], faces[:, [2, 0]]]), axis=1), axis=0)
    flat = p[:, [1, 2]]  # y and z tell parts of a long thin body best apart
    tree = shapely.STRtree(shapely.box(*np.concatenate([flat[faces].min(1), flat[faces].max(1)], axis=1).T))
    e, f = tree.query(shapely.box(*np.concatenate([flat[edges].min(1), flat[edges].max(1)], axis=1).T))
    apart = ~(edges[e][:, :, None] == faces[f][:, None, :]).any(axis=(1, 2))
    e, f = edges[e[apart]], faces[f[apart]]
    start, along = p[e[:, 0]], p[e[:, 1]] - p[e[:, 0]]
    a, u, v = p[f[:, 0]], p[f[:, 1]] - p[f[:, 0]], p[f[:, 2]] - p[f[:, 0]]
    cross = np.cross(along, v)
    det = np.einsum("ki,ki->k", u, cross)
    size = np.linalg.norm(along, axis=1) * np.linalg.norm(np.cross(u, v), axis=1)
    det = np.where(np.abs(det) > 1e-7 * size, det, np.nan)  # an edge in a triangle's plane does not go through it
    off = start - a
    x, turned = np.einsum("ki,ki->k", off, cross) / det, np.cross(off, u)
    y, t = np.einsum("ki,ki->k", along, turned) / det, np.einsum("ki,ki->k", v, turned) / det
    eps = 1e-9
    return int(np.sum((x > eps) & (y > eps) & (x + y < 1 - eps) & (t > eps) & (t < 1 - eps)))


def computed(job):
    """What the program says of the volumes without its meshes."""
    return (
        {"web-blank": job.web.sheet}
        | {f"filler-{side}": job.web.cut(side).filler for side in web.SIDES}
        | {f"strip-{layer.side}-{layer.number}": layer.volume for layer in job.layers}
    )


def test_every_mesh_is_closed_uncrossed_and_as_large_as_computed(job, bodies):
    want = computed(job)
    for name, body in bodies.items():
        assert is_closed(plain(body.mesh)), name
        if name in want:
            assert body.mesh.volume == pytest.approx(want[name], rel=1e-3), name
        assert crossings(body.mesh) == 0, name
    assert {"web-blank", *(f"strip-{layer.side}-{layer.number}" for layer in job.layers)} <= set(bodies)


@pytest.mark.parametrize("treatment", ["square", "set bevel", "full bevel"])
def test_web_and_filler_of_every_edge_cut(job, treatment):
    built = job.fit(job.cant, job.survey(job.cant), treatment)
    blank = solid.web_blank(built.plane, built.top, built.bottom)
    assert is_closed(plain(blank))
    assert blank.volume == pytest.approx(built.sheet, rel=1e-4)
    whole = kernel_solid(blank)
    for cut in (built.top, built.bottom):
        filler = solid.filler(built.plane, cut)
        if filler is None:
            assert cut.filler < solid.LEAST * cut.survey.weight[cut.side].sum()
            continue
        assert is_closed(plain(filler))
        assert crossings(filler) == 0
        assert filler.volume == pytest.approx(cut.filler, rel=1e-3)
        # a mesh kernel finds less overlap with the web than the film that keeps the filler in one piece
        assert (whole ^ kernel_solid(filler)).volume() < solid.FILM * cut.survey.weight[cut.side].sum()


def kernel_solid(mesh):
    made = manifold3d.Manifold(manifold3d.Mesh64(mesh.points, mesh.faces.astype(np.uint64)))
    assert made.status() == manifold3d.Error.NoError
    return made


def test_strips_lie_on_the_web_and_on_one_another_without_overlap(job, bodies):
    strips = [kernel_solid(body.mesh) for body in bodies.values() if body.part == "strip"]
    if not strips:
        pytest.skip("no cap strips in this example")
    whole = kernel_solid(bodies["web-blank"].mesh)
    for i, strip in enumerate(strips):
        area = strip.volume() / job.record.caps.thickness
        assert all((strip ^ other).volume() < 1e-3 * area for other in [whole, *strips[:i]])


def test_a_steady_bevel_leaves_a_triangle_prism():
    # Plane trigonometry: t^2/2 tan w of filler for each length under a flat skin tilted by w.
    wing = loft(slab(), (0.0, 1000.0), twist=5.0, axis=0.3)
    plane = web.plane(wing, ends=(0.0, 1000.0), line=(0.3, 0.3))
    bare = {side: seat.constant(0.0) for side in web.SIDES}
    survey = seat.survey(wing, plane, thickness=seat.constant(8.0), depth=bare)
    tan = np.tan(np.radians(5.0))
    square = [seat.cut(survey, side, "square") for side in web.SIDES]
    for cut in square:
        assert solid.filler(plane, cut).volume == pytest.approx(8.0**2 / 2 * tan * 1000.0, rel=1e-4)
    height = 2 * 9.0 / np.cos(np.radians(5.0)) - 8.0 * tan
    assert solid.web_blank(plane, *square).volume == pytest.approx(8.0 * height * 1000.0, rel=1e-9)
    assert solid.filler(plane, seat.cut(survey, "top", "full bevel")) is None


@pytest.mark.parametrize("sweep", [0.0, 0.4])
@pytest.mark.parametrize("rise", [8.0, -15.0])
def test_a_strip_bends_where_the_skin_breaks(sweep, rise):
    # Plane geometry: every facet of its two faces lies in one of the planes under two flat slabs that meet askew.
    y = np.array([0.0, 507.0, 907.0])
    z = np.array([0.0, 0.0, 400.0 * np.tan(np.radians(rise))])
    wing = loft(slab(0.15), y, chord=400.0, le=y * sweep, z=z, skin=1.2)
    plane = web.plane(wing, ends=(300.0, 700.0), line=(0.3, 0.3), cant=np.radians(12.0))
    normals = [np.array([0.0, -b, a]) / np.hypot(a, b) for a, b in zip(np.diff(y), np.diff(z), strict=True)]
    depths = seat.constant(0.5), seat.constant(1.1)
    for side, up in (("top", 1.0), ("bottom", -1.0)):
        made = solid.strip(wing, plane, side, width=8.0, outer=depths[0], inner=depths[1])
        corners = made.points[made.faces]
        across = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
        face = np.abs(across @ plane.h) > 0.5 * np.linalg.norm(across, axis=1)
        under = 1.2 + np.where(across[face] @ plane.h * up > 0.0, 0.5, 1.1)
        middles = corners[face].mean(axis=1) - [0.0, 507.0, 60.0 * up]
        off = np.stack([middles @ v * up + under for v in normals])
        assert np.abs(off).min(axis=0).max() < 0.01


def test_corners_stand_where_a_cad_kernel_puts_the_skin(tmp_path):
    # Open CASCADE on the published wing (NASA/TP-2016-219072); no bond line, so a full bevel ends on the skin.
    pytest.importorskip("OCP")
    stated = kernel.Web(cant=4.0)
    (tmp_path / "nasa.toml").write_text(kernel.wing_file_text(kernel.NASA_WING, stated, bond=0.0))
    job = jobs.load(tmp_path / "nasa.toml")
    axes = kernel.frame(kernel.NASA_WING, stated)
    s, h, n = axes.to_sheet(solid.web_blank(job.web.plane, job.web.top, job.web.bottom).points).T
    inner = np.flatnonzero((s > 30.0) & (s < axes.length - 30.0))[::9]
    top, bottom = kernel.reference_edges(kernel.NASA_WING, stated, s[inner], [-3.175, 3.175])
    for i, high, low in zip(inner, top, bottom, strict=True):
        face = int(n[i] > 0)
        assert abs(n[i]) == pytest.approx(3.175)
        # a skin hollow across the web pushes the straight cut out by its crown, here under 0.02 mm
        assert min(abs(h[i] - high[face]), abs(h[i] - low[face])) < 0.02
    ends = np.unique(np.round(axes.origin[1] + s * axes.s[1] + h * axes.h[1] + n * axes.n[1], 6))[[0, -1]]
    assert tuple(ends) == stated.ends


def test_the_left_hand_is_the_exact_mirror_image(job, bodies):
    for left in solids(job, "left"):
        right = bodies[left.name].mesh
        assert np.array_equal(left.mesh.points * [1, -1, 1], right.points)
        assert left.mesh.volume == pytest.approx(right.volume, rel=1e-9)
        assert is_closed(plain(left.mesh))


@pytest.mark.parametrize("hand", ["right", "left"])
def test_files_read_back_are_closed_and_as_large(job, hand):
    found = solids(job, hand)
    scale = {"stl": 1.0, "3mf": 1.0, "glb": 1e9}  # glTF 2.0 is in metres
    for kind, by in scale.items():
        read = {}
        for name, data in formats.files(found, kind, **WORDS):
            scene = trimesh.load_scene(io.BytesIO(data), file_type=kind)
            assert len(scene.geometry) == (1 if kind == "stl" else len(found))
            shapes = scene.geometry.values()
            read |= dict(zip([name] if kind == "stl" else scene.geometry, shapes, strict=True))
            if kind != "stl":
                assert scene.units == {"3mf": "millimeter", "glb": "meters"}[kind]
        assert set(read) == {body.name for body in found}
        for body in found:
            got = read[body.name]
            assert is_closed(got), (kind, body.name)
            assert got.volume * by == pytest.approx(body.mesh.volume, rel=2e-5), (kind, body.name)
            size = np.ptp(body.mesh.points, axis=0) / (1000.0 if kind == "glb" else 1.0)
            np.testing.assert_allclose(got.extents, size[[0, 2, 1]] if kind == "glb" else size, rtol=1e-5)


def test_the_same_input_gives_the_same_bytes_and_3mf_says_millimetres(job):
    for kind in ("stl", "3mf", "glb"):
        assert dict(formats.files(built(job), kind, **WORDS)) == dict(formats.files(built(job), kind, **WORDS))
    package = trimesh.util.decompress(io.BytesIO(formats.threemf(solids(job), **WORDS)), file_type="zip")
    model = etree.fromstring(package["3D/3dmodel.model"].read())
    assert model.get("unit") == "millimeter"
    assert WORDS["wing"] in model.findtext("{*}metadata")
    head = formats.stl(solids(job)[0], **WORDS)[:80]
    assert head.startswith(b"mm; web-blank, right hand, revision 3fa9c1d2")


SECTIONS = st.sampled_from(["2412", "0012", "1410", "23012"])
EDGES = ["square", "set bevel", "full bevel"]
JOINT = """
[joint]
length = {length}
taper = 80
pin = 6
wall = 1
overwrap = 0.5
faces = "{faces}"
"""
CAPS = """
[load]
span_load = "elliptic"
semi_span = 2000
mass = {mass}
load_factor = 4
[caps]
strip = "pultruded carbon strip"
width = 4
thickness = 0.6
"""


SHEETS = """
[cutting]
scarf = 6
[[cutting.sheets]]
material = "pvc foam 80"
size = [1220, 300]
"""


@st.composite
def wing_files(draw):
    """Panels of ordinary proportions with a web that should fit."""
    number = lambda low, high: round(draw(st.floats(low, high)), 2)  # noqa: E731
    span, root, sweep, rise = number(700.0, 1800.0), number(250.0, 600.0), number(-0.2, 0.6), number(-0.02, 0.06)
    tip = root * number(0.5, 1.0)
    stations = [
        f"[[wing.stations]]\ny = {share * span}\nchord = {root + share * (tip - root)}\nle = {sweep * share * span}\n"
        f'z = {rise * share * span}\nairfoil = "naca {draw(SECTIONS)}"\n'
        f"washout = {i * number(-1.0, 4.0)}"
        for i, share in enumerate(sorted({0.0, number(0.3, 0.7), 1.0}))
    ]
    edge, sheet = draw(st.sampled_from(EDGES)), number(4.0, 8.0)
    runs = f"runs = {draw(st.integers(1, 4))}" if edge == "set bevel" else ""
    more = JOINT.format(length=number(60.0, 120.0), faces=draw(st.sampled_from(["both", "front", "rear"])))
    caps = CAPS.format(mass=number(2000.0, 20000.0))
    return (
        'name = "random"\n[wing]\n' + "\n".join(stations) + f"\n[skin]\nthickness = {number(0.4, 1.5)}\n"
        f"[web]\nends = [{number(0.0, 40.0)}, {span - number(0.0, 40.0)}]\n"
        f"line = [{number(0.25, 0.4)}, {number(0.25, 0.4)}]\n"
        f'thickness = {sheet}\ncant = {number(-5.0, 5.0)}\nedge = "{edge}"\n{runs}\nbond = {number(0.0, 0.5)}\n'
        'foam = "pvc foam 80"\nfiller = "microballoon paste"\n'
        + draw(st.sampled_from(["", more]))
        + draw(st.sampled_from(["", caps]))
        + SHEETS
    )


@settings(max_examples=20, deadline=None, suppress_health_check=list(HealthCheck))
@given(wing_files())
def test_random_wings_give_closed_meshes_and_contours(tmp_path_factory, text):
    path = tmp_path_factory.mktemp("wing") / "wing.toml"
    path.write_text(text)
    try:
        job = jobs.load(path)
        assert job.web.sheet > 0.0
        found = solids(job)
        drawings = [*sheets.drawings(job), *stock_sheets(job, nestings(job, ["right"]), ["right"])]
    except WingError:
        assume(False)  # a web that does not fit is refused, in its own words
    want = computed(job)
    for body in found:
        assert is_closed(plain(body.mesh)), body.name
        assert body.mesh.volume == pytest.approx(want[body.name], rel=1e-3), body.name
        assert crossings(body.mesh) == 0, body.name
    for drawing in drawings:
        for stroke in drawing.strokes:
            if stroke.role in (Role.CUT_OUTSIDE, Role.CUT_INSIDE):
                assert stroke.closed
                assert shapely.LinearRing(stroke.points).is_simple, drawing.name
