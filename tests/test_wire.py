"""Wire templates and paths: a simulated wire leaves the wanted profile, and a program read back cuts the same."""

from __future__ import annotations

import csv
import io
import re
from pathlib import Path

import kernel
import numpy as np
import pytest
import shapely
from numpy.testing import assert_allclose
from wings import loft

from wrywing.export import wire as wire_export
from wrywing.geom import airfoil, path, profile, template, web, wire
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
    return airfoil.read((EXAMPLES / "sections" / "highmoor-reflex.dat").read_bytes(), "reflex")


def rolled(board, wire_diameter):
    """The way of the middle of a wire that rides round a board, or along its straight edge."""
    if not board.runs[0].straight:
        return shapely.Polygon(board.outline).buffer(wire_diameter / 2.0, quad_segs=64).exterior
    edges = zip(board.outline, np.roll(board.outline, -1, axis=0), strict=True)
    a, b = max(edges, key=lambda edge: abs(edge[1][1] - edge[0][1]))
    out = np.array([b[1] - a[1], a[0] - b[0]]) / np.hypot(*(b - a))
    out *= np.sign((a - board.outline.mean(axis=0)) @ out)
    return shapely.LineString([a + wire_diameter / 2.0 * out, b + wire_diameter / 2.0 * out])


def left_over(bay, end):
    """What a wire that rides round every board of an end leaves of the block, about the pins."""
    at = bay.ends[end]
    burnt = [rolled(b, bay.how.wire).buffer(at.kerf / 2.0, quad_segs=64) for b in template.boards(bay, end)]
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
    low, high = profile.turned(reg.face_at(at.y), bay.turn)
    away = high - low
    side = (-1.0 if reg.kind == "nose" else 1.0) * np.array([away[1], -away[0]])
    corners = [low - 9 * away, high + 9 * away, high + 9 * away + 9 * side, low - 9 * away + 9 * side]
    return shape.intersection(shapely.Polygon(corners))


SECTIONS = {"thick nose": airfoil.naca("2415"), "thin tail": airfoil.naca("0009"), "reflexed": reflexed()}


@pytest.mark.parametrize("passes", ["one", "separate"])
@pytest.mark.parametrize("kind", ["nose", "aft", "whole"])
@pytest.mark.parametrize("section", SECTIONS)
def test_a_wire_round_the_boards_leaves_the_core(section, kind, passes):
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


def test_boards_stand_off_by_half_the_kerf_less_the_wires_radius():
    of, plane = tapered(SECTIONS["thick nose"])
    bay = wire.bay(of, region(plane, "nose"), (60.0, 410.0), HOW)
    for end, kerf in enumerate(HOW.kerf):
        edge = shapely.LinearRing(template.boards(bay, end)[1].outline)
        profile_ = bay.ends[end].profile
        points = profile_.points[np.abs(profile_.t) < 0.5][::7]
        assert_allclose(shapely.distance(edge, shapely.points(points)), (kerf - 0.6) / 2.0, atol=0.003)


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
                foam = run.centre[end] - half * run.normals[end]
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
    of = loft(airfoil.naca("0006"), [0, 100], chord=60.0, skin=0.5)
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
        for end, at in enumerate(bay.ends):
            share = (end * bay.length - stated.planes[0]) / (stated.planes[1] - stated.planes[0])
            places = planes[:, 0] + share * (planes[:, 1] - planes[:, 0])
            places += np.array(bay.ends[0].block[:2]) - stated.place
            cuts = [shapely.LineString(places[[i - 1, i]]) for i in np.flatnonzero(cutting)]
            burnt = shapely.union_all(cuts).buffer(at.kerf / 2.0, quad_segs=64)
            left = shapely.box(*at.block).difference(burnt)
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
