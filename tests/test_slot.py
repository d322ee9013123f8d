"""Where the rib planes cross a web that is thickened, and the room that web and flanges take of a rib."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import shapely
from wings import GOOD, loft, section

from wrywing.geom import naca, rib, web
from wrywing.geom.flange import Flange, Shape
from wrywing.geom.profile import face_line
from wrywing.geom.seat import Along, constant
from wrywing.geom.slot import Cut, Faces, flange_room, slot
from wrywing.shop import job as jobs
from wrywing.shop import ribs
from wrywing.shop.describe import core as describe_core
from wrywing.shop.sheets import rib as sheets_rib
from wrywing.shop.stock import Adhesive, Cloth


def swept(cant=0.1, taper=15.0):
    """A web with sweep, dihedral and cant, thickened over its inner 40 mm."""
    of = loft(naca.naca("2412"), [0, 1000], chord=[300, 200], le=[0, 450], z=[0, 90], twist=[0, 5])
    plane = web.plane(of, ends=(0.0, 1000.0), line=(0.3, 0.3), cant=cant)
    s = np.array([40.0, 40.0 + taper])
    return of, Faces(plane, Along(s, np.array([-7.5, -3.0])), Along(s, np.array([7.5, 3.0])))


def flange(side, face, *, web_leg=8.0, skin_leg=14.0, thickness=1.0, radius=2.0):
    shape = Shape(np.pi / 2, web_leg, constant(skin_leg), thickness, radius)
    nothing = np.zeros((0, 2))
    return Flange(side, face, shape, *(nothing for _ in range(6)))


@pytest.mark.parametrize("taper", [40.0, 10.0])
@pytest.mark.parametrize("y", [35.0, 42.0, 60.0])
def test_a_face_line_lies_on_its_face_all_along(y, taper):
    _, faces = swept(taper=taper)
    plane = faces.web
    for face in (faces.front, faces.rear):
        line = face_line(plane, face, y, reach=50.0)
        for share in np.linspace(0.0, 1.0, 7):  # between its points as well, taken back to the web
            x, z = (line[:-1] + share * np.diff(line, axis=0)).T
            out = np.stack([x, np.full_like(x, y), z], axis=-1) - plane.origin
            assert out @ plane.n == pytest.approx(face(out @ plane.s), abs=1e-9)
        ends = np.stack([line[[0, -1], 0], [y, y], line[[0, -1], 1]], axis=-1) - plane.origin
        assert ends @ plane.h == pytest.approx([-50.0, 50.0])
        turns = (y - plane.origin[1] - face.s * plane.s[1] - face.value * plane.n[1]) / plane.h[1]
        assert len(line) == 2 + np.count_nonzero(np.abs(turns) < 50.0)


@pytest.mark.parametrize("outer_end", [False, True])
def test_where_a_rib_plane_crosses_a_steep_taper_thrice_the_thick_side_counts(outer_end):
    _, faces = swept(taper=1.0)
    plane, n = faces.web, (faces.rear.value[::-1] if outer_end else faces.front.value)  # the taper that overhangs
    face, s, thrice = Along(faces.front.s, n), np.linspace(-80.0, 160.0, 40001), 0
    for y in np.arange(34.0, 46.0, 0.25):
        line = face_line(plane, face, y, reach=20.0)
        assert np.all(np.diff(line[:, 1]) > -1e-9)
        point = plane.point(s, 0.0, face(s))
        crossed = np.flatnonzero(np.diff(np.sign(point[:, 1] - y)))
        thrice += len(crossed) == 3
        thick = crossed[np.abs(face(s[crossed])).argmax()]
        assert np.interp(point[thick, 2], line[:, 1], line[:, 0]) == pytest.approx(point[thick, 0], abs=0.04)
    assert thrice


@pytest.mark.parametrize("taper", [20.0, 5.0, 1.5])
@pytest.mark.parametrize("y", [36.0, 42.0, 50.0])
def test_a_slot_is_the_shadow_of_the_web(y, taper):
    # brute force: the faces at one height, all of them that lie within the sheet
    _, faces = swept(taper=taper)
    plane, made = faces.web, slot(faces, Cut((y - 1.5, y + 1.5), clearance=0.2, reach=60.0))
    s = np.linspace(-80.0, 160.0, 200001)
    at = float(plane.point(plane.s_at_rib(y, 0.0, 0.0), 0.0, 0.0)[2])
    for z in at + np.array([-14.0, -3.0, 0.0, 9.0]):
        seen = []
        for face, out in ((faces.front, -0.2), (faces.rear, 0.2)):
            n = face(s) + out
            h = (z - plane.origin[2] - s * plane.s[2] - n * plane.n[2]) / plane.h[2]
            point = plane.point(s, h, n)
            seen.append(point[np.abs(point[:, 1] - y) <= 1.5, 0])
        level = made.shape.intersection(shapely.LineString([(-1e3, z), (1e3, z)]))
        assert level.bounds[0] == pytest.approx(seen[0].min(), abs=5e-3)
        assert level.bounds[2] == pytest.approx(seen[1].max(), abs=5e-3)


def test_a_rib_in_the_taper_is_cut():
    of, faces = swept(taper=5.0)
    for y in (40.0, 44.0, 50.0):
        made = rib.rib(of, y, faces, thickness=3.0, clearance=0.2)
        assert len(made.pieces) == 2
        assert all(shapely.Polygon(piece).is_valid for piece in made.pieces)


def test_room_for_a_flange_in_a_slab():
    # closed form: both legs with the clearance all about, and the square less the quarter circle between them
    def flat(t):  # two flat sides, with a round nose
        return 0.05 * np.sin(np.clip(t / 0.3, -1.0, 1.0) * np.pi / 2.0)

    def slope(t):
        return np.where(np.abs(t) < 0.3, 0.05 * np.pi / 0.6 * np.cos(t / 0.3 * np.pi / 2.0), 0.0)

    of = loft(section(flat, slope), [0, 600], skin=1.0)
    plane = web.plane(of, ends=(0.0, 600.0), line=(0.4, 0.4))
    faces, c = Faces(plane, constant(-3.0), constant(3.0)), 0.2
    plain, made = (
        rib.rib(of, 300.0, faces, clearance=c, thickness=2.0, flanges=flanges)
        for flanges in ((), (flange("top", "rear", web_leg=5.0, skin_leg=9.0, thickness=0.8, radius=2.0),))
    )
    nose, tail = (
        shapely.Polygon(a).area - shapely.Polygon(b).area for a, b in zip(plain.pieces, made.pieces, strict=True)
    )
    legs = 0.8 * (5.0 + c) + (0.8 + c) * (9.0 + c - 0.8 - c)
    assert nose == pytest.approx(0.0, abs=1e-6)
    assert tail == pytest.approx(legs + (1.0 - np.pi / 4.0) * 4.0, abs=0.01)


@pytest.mark.parametrize("side", ["top", "bottom"])
@pytest.mark.parametrize("face", ["front", "rear"])
def test_a_rib_stays_clear_of_a_flange(side, face):
    of, faces = swept()
    y, w, c = 420.0, 4.0, 0.3
    made = rib.rib(of, y, faces, thickness=w, clearance=c, flanges=(flange(side, face),))
    pieces = shapely.union_all([shapely.Polygon(piece) for piece in made.pieces])
    out, up = (-1.0 if face == "front" else 1.0), (1.0 if side == "top" else -1.0)
    line = faces.front if face == "front" else faces.rear
    s = np.linspace(380.0, 520.0, 281)
    corner = web.edge(of, faces.web, s, line(s), side).h
    solid = []
    for off in (0.0, 0.5, 1.0):
        n = line(s) + out * off  # the leg on the web
        solid += [faces.web.point(s, corner - up * down, n) for down in np.linspace(0.0, 8.0, 33)]
        for along in np.linspace(0.0, 13.8, 24):  # the leg on the skin, which leans a little to n
            n = line(s) + out * along
            solid.append(faces.web.point(s, web.edge(of, faces.web, s, n, side, off).h, n))
    points = np.concatenate(solid)
    points = points[np.abs(points[:, 1] - y) <= w / 2.0]
    off = shapely.distance(pieces, shapely.points(points[:, [0, 2]]))
    assert c - 0.01 < off.min() < c + 0.1


FACED = """
[web.facing]
cloth = "glass cloth 160"
layers = 3
"""


def stated(tmp_path, *more):
    path = tmp_path / "wing.toml"
    path.write_text(GOOD + "[ribs]\nat = [500]\nclearance = 0.25\n" + "".join(more))
    return jobs.load(path)


def test_a_slot_has_room_for_the_facings(tmp_path):
    bare, faced = stated(tmp_path), stated(tmp_path, FACED)
    cloth, resin = faced.stock.find("glass cloth 160", Cloth), faced.stock.find(faced.record.web.adhesive, Adhesive)
    dry = 3.0 * cloth.areal_weight  # g/m^2, and as much resin again
    laid = dry / cloth.fibre_density + dry / resin.density
    plane = faced.plane_at(faced.cant)
    stretch = plane.n[0] ** -1  # level across, as neither cant nor dihedral tilts it
    assert plane.h[1] == pytest.approx(0.0, abs=2e-3)
    widths = [job.ribs[0].slot.width for job in (bare, faced)]
    assert widths[0] == pytest.approx((faced.record.web.thickness + 0.5) * stretch, abs=1e-3)
    assert widths[1] - widths[0] == pytest.approx(2.0 * laid * stretch, abs=1e-3)
    (drawing,) = sheets_rib.rib_sheets(faced)
    assert f"the web with its facings, {faced.wording.length(laid)} each" in " ".join(drawing.notes)


def test_facings_of_unknown_thickness_are_doubted(tmp_path):
    job = stated(tmp_path, FACED.replace('cloth = "glass cloth 160"', "areal_weight = 160"))
    assert any("no room for the web's facings" in doubt for doubt in describe_core.doubts(job))
    assert "thickness is not known" in " ".join(sheets_rib.rib_sheets(job)[0].notes)


def test_flanges_are_drawn_and_said(tmp_path):
    laid = "[flanges]\nweb_leg = 6\nskin_leg = 12\ninner_radius = 1\nthickness = 0.6\ndensity = 1500\nmax_spring = 30\n"
    job, bare = stated(tmp_path, laid, "[flanges.front_top]\n"), stated(tmp_path)
    (drawing,) = sheets_rib.rib_sheets(job)
    assert "room for the flanges front top: their legs, 0.6 mm thick, and 0.25 mm all about" in " ".join(drawing.notes)
    lost = [
        shapely.Polygon(a).area - shapely.Polygon(b).area
        for a, b in zip(bare.ribs[0].pieces, job.ribs[0].pieces, strict=True)
    ]
    assert lost[0] == pytest.approx(0.6 * 6.25 + 0.85 * (12.25 - 0.85) + (1.0 - np.pi / 4.0), rel=0.05)
    assert lost[1] == pytest.approx(0.0, abs=1e-6)


def test_room_for_a_flange_reaches_into_the_web_and_the_skin():
    # no film may be left between them
    of, faces = swept()
    cut = Cut((418.0, 422.0), clearance=0.2, reach=60.0)
    whole = shapely.Polygon(rib.outline(of, 420.0))
    room = flange_room(of, faces, flange("top", "front"), cut)
    assert room.intersects(slot(faces, cut).shape)
    assert not whole.contains(room)


def test_every_part_of_a_rib_has_its_name_and_a_sliver_is_said(tmp_path):
    job = stated(tmp_path)
    (made,) = job.ribs
    nose, tail = made.pieces
    job.__dict__["ribs"] = (replace(made, pieces=(nose, tail, np.add(tail, [500.0, 0.0])), slivers=(nose,)),)
    (drawing,) = sheets_rib.rib_sheets(job)
    written = " ".join(label.text for label in drawing.labels)
    assert all(f"rib 1 {name}" in written for name in ("nose", "tail 1", "tail 2"))
    said = "ahead of the web, nowhere 1 mm wide, is left out"
    assert any(said in note for note in drawing.notes)
    assert any(f"rib 1, y 500 mm: what is left of it {said}" in doubt for doubt in describe_core.doubts(job))
    assert any("the rib is in 3 parts" in note for note in drawing.notes)


def test_a_sheet_is_that_it_is_cut_from_unless_stated(tmp_path):
    cut = '[cutting.ribs]\nmaterial = "balsa 160"\nthickness = 4\n'
    assert [ribs.rib_sheet(stated(tmp_path, *more)) for more in ((), (cut,), ("thickness = 3\n",))] == [0.0, 4.0, 3.0]
    job = stated(tmp_path, "thickness = 3\n", cut)
    assert any("ribs.thickness and cutting.ribs.thickness differ" in doubt for doubt in describe_core.doubts(job))
    notes = " ".join(sheets_rib.rib_sheets(job)[0].notes)
    assert "Its sheet, 3 mm, lies half on each side of y. It is cut square, to what clears the skin's inside" in notes
    assert f"stands up to {job.wording.length(job.ribs[0].short)} short of it" in notes


def test_cradles_are_of_plywood_unless_stated(tmp_path):
    cut = '[cradles]\n[cutting.cradles]\nmaterial = "balsa 160"\nthickness = 9\n'
    found = [ribs.cradle_sheet(stated(tmp_path, more)) for more in ("[cradles]\n", cut, "[cradles]\nthickness = 12\n")]
    assert found == [6.0, 9.0, 12.0]
