"""Wire templates and paths: a simulated wire leaves the wanted profile, and a program read back cuts the same."""

from __future__ import annotations

import csv
import io
import re
from dataclasses import replace
from itertools import cycle, product
from pathlib import Path

import kernel
import numpy as np
import pytest
import shapely
from numpy.testing import assert_allclose
from wings import loft

from wrywing.export import wire as wire_export
from wrywing.geom import coordinates, naca, path, profile, template, web, wire
from wrywing.geom.block import NoPins
from wrywing.geom.core import NoFoam, Region
from wrywing.geom.path import BetweenPlanes, Machine, OffTravel
from wrywing.geom.seat import constant
from wrywing.geom.wire import How, WideKerf
from wrywing.shop import job as jobs

EXAMPLES = Path(kernel.__file__).parent.parent / "examples"
HOW = How(wire=0.6, kerf=(1.1, 1.5))
FINE = profile.symmetric(np.linspace(0.0, 1.0, 1201))


def tapered(section, skin=1.0, chord=(240, 150)):
    """A swept, twisted panel, and the web's two faces in it."""
    of = loft(section, [0, 500], chord=list(chord), le=[0, 120], z=[0, 25], twist=[0, 5], skin=skin)
    return of, web.plane(of, ends=(0.0, 500.0), line=(0.32, 0.30), cant=0.06)


def region(plane, kind, **more):
    if kind == "whole":
        return Region(kind, (0.0, 500.0), **more)
    return Region(kind, (0.0, 500.0), plane, constant(-3.2 if kind == "nose" else 3.2), **more)


def reflexed():
    return coordinates.read((EXAMPLES / "sections" / "highmoor-reflex.dat").read_bytes(), "reflex")


def swept(places, slope, radius):
    """What a round wire burns of a rib plane that it crosses aslant: ellipses, and all between one and the next."""
    turn = np.linspace(0.0, 2.0 * np.pi, 49)[:-1]
    rim = radius * np.column_stack([np.cos(turn), np.sin(turn)])
    steep = np.maximum(np.linalg.norm(slope, axis=1), 1e-12)[:, None]
    along, stretch = slope / steep, np.sqrt(1.0 + steep**2) - 1.0
    rims = places[:, None] + rim + (stretch * (along @ rim.T))[..., None] * along[:, None]
    hulls = shapely.convex_hull(shapely.multipoints(np.concatenate([rims[:-1], rims[1:]], axis=1)))
    return shapely.union_all(hulls).simplify(1e-3)


def slope(bay, run):
    return (run.centre[1] - run.centre[0]) / bay.length


def left_over(bay, end):
    """What the runs leave of a block's end, about the pins."""
    at = bay.ends[end]
    burnt = [swept(run.centre[end], slope(bay, run), at.kerf / 2.0) for run in bay.runs]
    x0, z0, x1, z1 = at.block
    block = shapely.box(x0 - 5.0, z0, x1 + 5.0, z1).difference(shapely.union_all(burnt))
    pins = shapely.Point(at.pins.mean(axis=0))
    return next(g for g in getattr(block, "geoms", [block]) if g.contains(pins))


def wanted(of, bay, end):
    """The core as it should be in the rib plane, from the skin's inside alone, its tail kept thick enough."""
    at, reg = bay.ends[end], bay.region
    tail = profile.tail(of, profile.profile(of, at.y, FINE), reg.least)
    t = profile.symmetric(np.append(np.abs(FINE), tail))
    inside = profile.profile(of, at.y, t).turned(bay.turn)
    if reg.kind != "nose":
        inside = inside.padded(reg.least)
    shape = shapely.Polygon(inside.at(t * reg.limit))
    if reg.kind == "whole":
        return shape
    face = profile.turned(reg.face_at(at.y), bay.turn)
    beyond = face[::-1] + np.array([-1e3 if reg.kind == "nose" else 1e3, 0.0])
    return shape.intersection(shapely.Polygon(np.concatenate([face, beyond])))


SECTIONS = {"thick nose": naca.naca("2415"), "thin tail": naca.naca("0009"), "reflexed": reflexed()}


@pytest.mark.parametrize(
    ("section", "kind", "passes"),
    [(*case, passes) for case, passes in zip(product(SECTIONS, ("nose", "aft", "whole")), cycle(("one", "separate")))],
)
def test_the_wire_leaves_the_core(section, kind, passes):
    of, plane = tapered(SECTIONS[section])
    bay = wire.bay(of, region(plane, kind, least=1.6), (60.0, 410.0), How(0.6, (1.1, 1.5), passes))
    for end in (0, 1):
        at = bay.ends[end]
        # a little beyond the core's end, where the wire still follows the padded tail
        tail = at.profile.at(np.array([-1.0, 1.0]) * at.limits.stop)[:, 0].min() + 2.0
        x0, z0, x1, z1 = at.block
        window = shapely.box(x0 - 99.0, z0 - 99.0, min(tail, x1) if kind != "nose" else x1, z1 + 99.0)
        found, want = left_over(bay, end).intersection(window), wanted(of, bay, end).intersection(window)
        assert shapely.hausdorff_distance(found.exterior, want.exterior, densify=0.02) < 0.01


def test_a_tail_cut_off_short_gets_a_face_of_its_own():
    of, plane = tapered(SECTIONS["thick nose"])
    bay = wire.bay(of, region(plane, "aft", to=0.75), (60.0, 410.0), HOW)
    assert [run.name for run in bay.runs] == ["web", "tail", "upper", "lower"]
    for end in (0, 1):
        at = bay.ends[end]
        assert shapely.hausdorff_distance(left_over(bay, end).exterior, wanted(of, bay, end).exterior) < 0.01
        assert_allclose(at.limits.stop, np.sqrt(0.75))


def distances(points, wires):
    """(k,) how near straight wires (m, 2, 3), through their ends, come to points (k, 3)."""
    along = np.diff(wires, axis=1)[:, 0]
    along /= np.linalg.norm(along, axis=1)[:, None]
    out = points[:, None] - wires[:, 0]
    way = np.einsum("kmi,mi->km", out, along)
    return np.sqrt(np.min(np.einsum("kmi,kmi->km", out, out) - way**2, axis=1))


def finer(line, times):
    """A line (k, n) with so many steps to each of its own."""
    at = np.arange(len(line))
    fine = np.linspace(0, len(line) - 1, times * (len(line) - 1) + 1)
    return np.stack([np.interp(fine, at, v) for v in line.T], axis=-1)


def wires(bay, run, times=1):
    """(m, 2, 3) the wire's middle all along a run, from end to end of the bay."""
    ends = [np.insert(finer(run.centre[end], times), 1, at.y, axis=1) for end, at in enumerate(bay.ends)]
    return np.stack(ends, axis=1)


@pytest.mark.parametrize("kind", ["nose", "aft"])
def test_the_wire_stands_half_the_kerf_off_the_foam_in_space(kind):
    # 50 degrees of sweep at the nose; the distance of a point from a straight line (any book of vector algebra)
    of = loft(SECTIONS["thick nose"], [0, 500], chord=[240, 150], le=[0, 600], z=[0, 25], twist=[0, 5], skin=1.0)
    plane = web.plane(of, ends=(0.0, 500.0), line=(0.32, 0.30))
    bay = wire.bay(of, region(plane, kind, least=2.0), (60.0, 410.0), How(0.6, (1.1, 1.9)))
    first, last = bay.ends
    ranges = [np.sort([at.limits.start, at.limits.stop], axis=0) for at in bay.ends]
    (low, high), t = (np.max([r[0] for r in ranges], axis=0), np.min([r[1] for r in ranges], axis=0)), first.profile.t
    for run in bay.runs[1:]:
        side = {"upper": t > 0.0, "lower": t < 0.0, "skins": np.isfinite(t)}[run.name]
        limits = np.where(t[:, None] < 0.0, [low[0], high[0]], [low[1], high[1]]).T
        here = side & (np.abs(t) >= limits[0]) & (np.abs(t) <= limits[1])
        ends = [np.insert(at.profile.points[here], 1, at.y, axis=1) for at in bay.ends]
        for share in (0.0, 0.5, 1.0):
            foam = ends[0] + share * (ends[1] - ends[0])
            half = (first.kerf + share * (last.kerf - first.kerf)) / 2.0
            assert_allclose(distances(foam, wires(bay, run, 8)), half, atol=0.005)


@pytest.mark.parametrize("kind", ["nose", "aft"])
def test_the_wire_rides_on_the_boards_of_both_ends(kind):
    of, plane = tapered(SECTIONS["thick nose"])
    bay = wire.bay(of, region(plane, kind, least=2.0), (60.0, 410.0), HOW)
    for end, at in enumerate(bay.ends):
        for board in template.boards(bay, end):
            edge = shapely.segmentize(shapely.LinearRing(board.outline), 0.05)
            edge = np.insert(shapely.get_coordinates(edge), 1, at.y, axis=1)
            for run in board.runs:
                ridden = slice(1, -1) if run.straight else slice(2, -2, 3)
                for one in wires(bay, run)[ridden]:
                    assert distances(edge, one[None]).min() == pytest.approx(0.3, abs=0.002)


def test_a_swept_wings_boards_are_parallels_in_the_plane_square_to_the_wire():
    # all wires are parallel: seen along them, kerf and wire are circles
    sweep = np.arctan(0.8)
    of = loft(SECTIONS["thick nose"], [0, 500], chord=[200, 200], le=[0, 400], skin=1.0)
    bay = wire.bay(of, Region("whole", (0.0, 500.0), least=2.0), (60.0, 410.0), How(0.6, (1.6, 1.6)))
    along = np.array([np.cos(sweep), 1.0])
    for end, at in enumerate(bay.ends):
        foam = shapely.Polygon(along * at.profile.points).buffer(0.5, quad_segs=64)
        (board,) = template.boards(bay, end)
        ahead = shapely.box(-1e3, -1e3, at.profile.at(0.9)[0] * along[0], 1e3)
        edges = [shape.intersection(ahead).exterior for shape in (foam, shapely.Polygon(along * board.outline))]
        assert shapely.hausdorff_distance(*edges, densify=0.02) < 0.005


def test_marks_stand_at_equal_chord_fraction():
    of, plane = tapered(SECTIONS["thick nose"])
    for kind in ("nose", "aft"):
        bay = wire.bay(of, region(plane, kind, least=1.6), (60.0, 410.0), HOW)
        numbers = [number for run in bay.runs for number, _ in run.marks]
        assert numbers == list(range(1, len(numbers) + 1))
        skins = [run for run in bay.runs if not run.straight]
        for run in skins:
            fractions = []
            for end, at in enumerate(bay.ends):
                half = bay.how.kerf[end] / 2.0
                foam = run.centre[end] - half * bay.aside(run, end)
                chord = of.planform(np.array(at.y), np.array(at.y))[0]
                c, le, z0 = chord
                back = profile.turned(foam, -bay.turn) - [le + 0.25 * c, z0]
                w = float(of.washout(np.array(at.y), np.array(at.y))[0])
                # unturned about the quarter chord: the section's own chord fraction, less the skin's lean
                p = (back @ [np.cos(w), np.sin(w)]) / c + 0.25
                fractions.append(p[[i for _, i in run.marks]])
            assert_allclose(fractions[0], fractions[1], atol=0.004)
        nose = skins[0]
        places = nose.centre[0][[i for _, i in nose.marks]]
        steps = np.hypot(*np.diff(places, axis=0).T)
        assert steps.max() < 31.0
        if kind == "nose":
            assert steps.argmin() in (len(steps) // 2 - 1, len(steps) // 2)


def test_pins_and_level_line_set_the_washout():
    of, plane = tapered(SECTIONS["thick nose"])
    bay = wire.bay(of, region(plane, "nose"), (0.0, 500.0), HOW)
    inner, outer = bay.ends
    assert_allclose(np.diff(inner.pins, axis=0), np.diff(outer.pins, axis=0), atol=1e-9)
    assert_allclose(inner.pins[0, 1], inner.pins[1, 1])
    assert (inner.pins[1, 0] - inner.pins[0, 0]) % 5.0 == pytest.approx(0.0, abs=1e-9)
    # laid on the pins, the two ends' chord lines differ by the stated washout, and the block's ends lie alike
    turn = [np.degrees(np.arctan2(at.profile.aft[1], at.profile.aft[0])) for at in bay.ends]
    assert turn[1] - turn[0] == pytest.approx(5.0, abs=1e-9)
    assert_allclose(np.array(outer.block) - np.array(inner.block), np.tile(bay.shift, 2), atol=1e-9)


def test_the_block_is_the_smallest_about_the_pins():
    of, plane = tapered(SECTIONS["thick nose"])
    bay = wire.bay(of, region(plane, "nose"), (60.0, 410.0), How(0.6, (1.1, 1.5), margin=0.0))
    both = shapely.union_all([shapely.Polygon(at.outline - at.pins[0]) for at in bay.ends])
    x0, z0, x1, z1 = both.bounds
    assert_allclose(bay.section, [x1 - x0, z1 - z0], atol=1e-9)
    for at in bay.ends:
        assert shapely.box(*at.block).buffer(1e-6).covers(shapely.Polygon(at.outline))


def test_a_kerf_wider_than_the_tail_is_refused():
    of, plane = tapered(SECTIONS["thin tail"])
    aft = region(plane, "aft", least=1.0)
    with pytest.raises(WideKerf) as refused:
        wire.bay(of, aft, (60.0, 410.0), How(0.6, (1.4, 0.9)))
    inside = profile.profile(of, 60.0, FINE)
    assert refused.value.y == 60.0
    here = np.sqrt(refused.value.fraction)
    assert float((inside.at(here) - inside.at(-here)) @ inside.up) == pytest.approx(1.4, abs=1e-3)


def test_a_core_too_small_for_pins_is_refused():
    of = loft(naca.naca("0006"), [0, 100], chord=60.0, skin=0.5)
    with pytest.raises((NoPins, NoFoam)):
        wire.bay(of, Region("whole", (0.0, 100.0), least=0.3), (0.0, 100.0), How(0.2, (0.3, 0.3), margin=1.0))


# --- a machine -------------------------------------------------------------------------------------

MACHINE = Machine(planes=(-90.0, 480.0), place=(160.0, 80.0), travel=(700.0, 320.0), speed=3.0)


@pytest.fixture(scope="module")
def bay():
    of, plane = tapered(SECTIONS["thick nose"])
    return wire.bay(of, region(plane, "nose"), (60.0, 410.0), HOW)


def test_planes_carry_on_the_wire(bay):
    found = path.path(bay, MACHINE)
    for plane, y in zip(np.moveaxis(found.planes, 1, 0), MACHINE.planes, strict=True):
        share = y / bay.length
        assert_allclose(plane, found.ends[:, 0] + share * (found.ends[:, 1] - found.ends[:, 0]), atol=1e-9)


def test_the_slower_end_keeps_its_speed(bay):
    found = path.path(bay, MACHINE)
    way = np.linalg.norm(np.diff(found.ends, axis=0, prepend=found.ends[:1]), axis=2)
    speeds = way[found.cutting] / found.seconds[found.cutting, None]
    assert_allclose(speeds.min(axis=1), 3.0, rtol=1e-9)


def test_moves_through_the_air_clear_the_block(bay):
    found = path.path(bay, MACHINE)
    for end in (0, 1):
        x0, z0, x1, z1 = np.array(bay.ends[end].block) - np.tile(np.array(bay.ends[0].block[:2]) - MACHINE.place, 2)
        block = shapely.box(x0, z0, x1, z1)
        places = found.ends[:, end]
        for i in np.flatnonzero(~found.cutting)[1:]:
            assert not shapely.LineString(places[[i - 1, i]]).intersects(block)


def test_there_is_no_move_where_both_ends_stand_still(bay):
    (skins,) = [run for run in bay.runs if not run.straight]
    twice = np.insert(np.arange(skins.centre.shape[1]), 40, 40)
    still = replace(skins, centre=skins.centre[:, twice], normals=skins.normals[:, twice], marks=((1, 41),))
    runs = still, replace(skins, marks=((1, 40),))
    found, plain = (path.path(replace(bay, runs=(run,)), MACHINE) for run in runs)
    assert np.all(np.isfinite(found.feed[found.cutting]))
    assert np.array_equal(found.ends, plain.ends)
    assert np.array_equal(found.mark, plain.mark)


def test_places_out_of_reach_are_refused(bay):
    with pytest.raises(OffTravel) as refused:
        path.path(bay, Machine((-90.0, 480.0), (160.0, 80.0), (250.0, 320.0), 3.0))
    assert (refused.value.axis, refused.value.reach > 250.0) == (0, True)
    with pytest.raises(OffTravel) as refused:
        path.path(bay, Machine((-90.0, 480.0), (160.0, 10.0), (700.0, 320.0), 3.0))
    assert refused.value.reach < 0.0
    with pytest.raises(BetweenPlanes) as short:
        path.path(bay, Machine((-90.0, 300.0), (160.0, 80.0), (700.0, 320.0), 3.0))
    assert short.value.plane == 1


def read(program: bytes):
    """RS-274, read by its own rules (ISO 6983: modal words, G20 and G21, comments in brackets): moves in mm."""
    letters, scale, modal = "XYUV", 1.0, {}
    moves = []
    for line in program.decode("ascii").splitlines():
        words = re.findall(r"([A-Z])(-?\d*\.?\d+)", re.sub(r"\([^)]*\)", "", line))
        assert "".join(a + b for a, b in words) == re.sub(r"\([^)]*\)|\s", "", line)
        for letter, number in words:
            if letter == "G":
                scale = {"21": 1.0, "20": 25.4}.get(number, scale)
                modal["G"] = number if number in "01" else modal.get("G")
            else:
                modal[letter] = float(number)
        if any(letter in letters for letter, _ in words):
            moves.append((modal["G"], [modal[a] * scale for a in letters], modal.get("F", np.nan) * scale))
    assert program.decode().rstrip().endswith("M2")
    return moves


@pytest.fixture(scope="module")
def saltpan():
    return jobs.load(EXAMPLES / "saltpan.toml")


@pytest.mark.parametrize("hand", ["right", "left"])
def test_a_program_read_back_cuts_the_profiles(saltpan, hand):
    stated = saltpan.record.wire
    for found in saltpan.wire_paths:
        bay = found.core.bays[found.index]
        moves = read(wire_export.to_rs274(saltpan, found, hand))
        axes = np.array([axes for _, axes, _ in moves])
        assert axes.min() >= 0.0
        assert np.all(axes.max(axis=0) <= np.tile(stated.travel, 2))
        planes = axes.reshape(-1, 2, 2) if hand == "right" else axes.reshape(-1, 2, 2)[:, ::-1]
        cutting = np.array([g == "1" for g, *_ in moves])
        starts, stops = np.flatnonzero(np.diff(cutting.astype(int))).reshape(-1, 2).T
        runs = [slice(i, j + 1) for i, j in zip(starts, stops, strict=True)]
        for end, at in enumerate(bay.ends):
            share = (end * bay.length - stated.planes[0]) / (stated.planes[1] - stated.planes[0])
            places = planes[:, 0] + share * (planes[:, 1] - planes[:, 0])
            places += np.array(bay.ends[0].block[:2]) - stated.place
            steep = (planes[:, 1] - planes[:, 0]) / (stated.planes[1] - stated.planes[0])
            burnt = [swept(places[i], steep[i], at.kerf / 2.0) for i in runs]
            left = shapely.box(*at.block).difference(shapely.union_all(burnt))
            piece = next(g for g in left.geoms if g.contains(shapely.Point(at.pins.mean(axis=0))))
            tail = 1e9 if bay.region.kind == "nose" else at.profile.at(at.limits.stop[1])[0] - 0.5
            window = shapely.box(-1e4, -1e4, tail, 1e4)
            want = shapely.Polygon(at.outline).intersection(window)
            assert shapely.hausdorff_distance(piece.intersection(window).exterior, want.exterior, densify=0.02) < 0.01


def test_feeds_are_the_first_axes_speed(saltpan):
    found = saltpan.wire_paths[0]
    moves = read(wire_export.to_rs274(saltpan, found, "right"))
    axes = np.array([axes for _, axes, _ in moves])
    way = np.linalg.norm(np.diff(axes[:, :2], axis=0), axis=1)
    minutes = sum(d / f for (g, _, f), d in zip(moves[1:], way, strict=True) if g == "1")
    assert minutes == pytest.approx(found.path.minutes, rel=1e-3)


def test_csv_says_the_same_as_the_program(saltpan):
    found = saltpan.wire_paths[-1]
    rows = list(csv.DictReader(io.StringIO(wire_export.to_csv(saltpan, found, "left").decode())))
    moves = read(wire_export.to_rs274(saltpan, found, "left"))
    assert len(rows) == len(moves)
    for row, (g, axes, feed) in zip(rows, moves, strict=True):
        assert_allclose([float(row[f"{a}_mm"]) for a in "XYUV"], axes, atol=1e-4)
        assert (row["feed_mm_per_min"] == "") == (g == "0")
        if g == "1":
            assert float(row["feed_mm_per_min"]) == pytest.approx(feed, abs=0.01)
    marks = [int(row["mark"]) for row in rows if row["mark"]]
    assert marks == list(range(1, len(marks) + 1))
