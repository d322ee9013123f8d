"""DXF and SVG, read back by other means and measured; the same bytes from every process."""

import hashlib
import io
import os
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import ezdxf
import numpy as np
import pytest
import shapely
from samples import A4, WING, blank, card

from wrywing.export import dxf, pdf, svg
from wrywing.export.pdf import Print
from wrywing.geom.drawing import Label, Role

SVG = "{http://www.w3.org/2000/svg}"
DRAWINGS = {"blank": blank(), "left": blank().mirrored("left"), "card": card()}


@pytest.fixture(params=DRAWINGS)
def drawing(request):
    return DRAWINGS[request.param]


def rings(drawing):
    return [s.points for s in drawing.strokes if s.closed]


class TestDxf:
    @pytest.fixture
    def document(self, drawing):
        return ezdxf.read(io.StringIO(dxf.render(drawing, wing=WING).decode()))

    def test_audit_is_clean(self, document):
        audit = document.audit()
        assert not audit.errors
        assert not audit.fixes

    def test_millimetres_and_extents(self, document, drawing):
        # published: DXF reference, $INSUNITS 4 is millimetres, $MEASUREMENT 1 is metric
        assert (document.header["$INSUNITS"], document.header["$MEASUREMENT"]) == (4, 1)
        x0, y0, x1, y1 = drawing.bounds()
        low = document.header["$EXTMIN"]
        assert low[0] == pytest.approx(x0, abs=0.001)
        assert 4.0 < y0 - low[1] < 10.0  # a line of lettering below the drawing says what a unit is
        assert document.header["$EXTMAX"][:2] == pytest.approx((x1, y1), abs=0.001)

    def test_outlines_are_closed_and_where_they_were(self, document, drawing):
        found = [
            np.array([p[:2] for p in e.get_points()])
            for e in document.modelspace().query('LWPOLYLINE[layer=="CUT_OUTSIDE"]')
            if e.closed
        ]
        assert len(found) == len(rings(drawing))
        for ring, wanted in zip(found, rings(drawing), strict=True):
            assert np.abs(ring - wanted).max() < 0.001

    def test_holes_are_circles(self, document, drawing):
        found = {(*e.dxf.center.vec2, 2 * e.dxf.radius, e.dxf.layer) for e in document.modelspace().query("CIRCLE")}
        assert found == {(h.x, h.y, h.diameter, h.role.name) for h in drawing.holes}

    def test_one_layer_for_each_role(self, document):
        layers = [document.layers.get(role.name) for role in Role]
        assert len({layer.color for layer in layers}) == len(Role)
        assert all(layer.dxf.lineweight >= 20 for layer in layers)
        assert {e.dxf.layer for e in document.modelspace()} <= {role.name for role in Role}

    def test_lettering_is_lines(self, document, drawing):
        lines = document.modelspace().query('LWPOLYLINE[layer=="NOTE"]')
        texts = [label.text for label in drawing.labels] + ["DXF: 1 unit is 1 mm"]  # whatever the wing file's units
        assert len(lines) == sum(len(Label(text, 0.0, 0.0).strokes()) for text in texts)
        assert not document.modelspace().query("TEXT MTEXT")

    def test_it_says_what_it_is(self, document, drawing):
        said = " ".join(value for _, value in document.header.custom_vars.properties)
        assert all(word in said for word in (WING, drawing.title, drawing.stamp, *drawing.notes))

    def test_no_option_leaks(self):
        dxf.render(card())
        assert not ezdxf.options.write_fixed_meta_data_for_testing


class TestSvg:
    @pytest.fixture
    def root(self, drawing):
        return ElementTree.fromstring(svg.render(drawing, wing=WING))

    def test_a_unit_is_a_millimetre(self, root, drawing):
        x, y, wide, high = map(float, root.get("viewBox").split())
        assert (root.get("width"), root.get("height")) == (f"{wide}mm", f"{high}mm")
        x0, y0, x1, y1 = drawing.bounds()
        assert min(x0 - x, -y1 - y, x + wide - x1, y + high + y0) > 3.0

    def test_outlines_are_where_they_were(self, root, drawing):
        paths = root.findall(f"{SVG}g[@id='CUT_OUTSIDE']/{SVG}path")
        found = [p.get("d") for p in paths if p.get("d").endswith("Z")]
        assert len(found) == len(rings(drawing))
        for d, ring in zip(found, rings(drawing), strict=True):
            assert np.abs(points(d) - ring).max() < 0.001

    def test_holes_are_circles(self, root, drawing):
        found = [tuple(float(c.get(k)) for k in ("cx", "cy", "r")) for c in root.iter(f"{SVG}circle")]
        assert np.allclose(found, [(h.x, -h.y, h.diameter / 2) for h in drawing.holes], atol=0.001)

    def test_one_group_for_each_role_and_no_hair_lines(self, root):
        groups = root.findall(f"{SVG}g")
        ids = [g.get("id") for g in groups]
        assert len(set(ids)) == len(ids)
        assert set(ids) <= {role.name for role in Role}
        assert all(float(g.get("stroke-width")) >= 0.2 for g in groups)

    def test_lettering_is_drawn_where_it_stands_and_said(self, root, drawing):
        texts = [g for g in root.iter(f"{SVG}g") if g.get("aria-label")]
        assert [g.get("aria-label") for g in texts] == [label.text for label in drawing.labels]
        for text, label in zip(texts, drawing.labels, strict=True):
            drawn = points(text.find(f"{SVG}path").get("d"))
            assert all(label.box().buffer(0.01).covers(shapely.points(drawn)))

    def test_it_says_what_it_is(self, root, drawing):
        said = root.find(f"{SVG}title").text + root.find(f"{SVG}desc").text
        assert all(word in said for word in (WING, drawing.title, drawing.stamp, *drawing.notes))
        assert {"right": "right-hand", "left": "left-hand", "both": "both hands"}[drawing.hand] in said


def points(d):
    """Points of an SVG path of straight lines, y up."""
    pairs = d.replace("M", "").replace("Z", "").split()
    return np.array([pair.split(",") for pair in pairs], dtype=float) * [1.0, -1.0]


@pytest.mark.parametrize("name", ["a\nb", 'a < b & "c"', "翼\x01", ""])
def test_any_name_makes_a_sound_file(name):
    odd = card(title=name)
    assert not ezdxf.read(io.StringIO(dxf.render(odd, wing=name).decode())).audit().errors
    ElementTree.fromstring(svg.render(odd, wing=name))
    assert pdf.render(odd, Print(A4), wing=name).startswith(b"%PDF")


def sums():
    made = [render(d, wing=WING) for d in DRAWINGS.values() for render in (dxf.render, svg.render)]
    made += [pdf.render(d, Print(A4), wing=WING) for d in DRAWINGS.values()]
    return " ".join(hashlib.sha256(m).hexdigest() for m in made)


def test_same_bytes_from_every_process():
    code = f"import sys; sys.path[:0] = {sys.path!r}; import test_export; print(test_export.sums())"
    for seed in ("1", "8"):
        other = subprocess.run(
            [sys.executable, "-c", code],
            env=os.environ | {"PYTHONHASHSEED": seed, "TZ": f"UTC+{seed}"},
            capture_output=True,
            text=True,
            check=True,
        )
        assert other.stdout.strip() == sums()


@pytest.mark.parametrize("command", ["templates", "report"])
@pytest.mark.parametrize("home", ["/dev/null/nowhere", "/proc/nowhere", "locked"])
def test_a_home_that_cannot_be_used_is_done_without(tmp_path, home, command):
    if home == "locked":  # root may do all, so that it shows only to others
        (tmp_path / home).mkdir(mode=0o000)
        home = str(tmp_path / home)
    wing = Path(__file__).parent.parent / "examples" / "saltpan.toml"
    out = tmp_path / ("page.html" if command == "report" else "out")
    words = ["-c", "from wrywing import cli; cli.main()", command, str(wing), "--out", str(out)]
    words += ["--formats", "dxf,pdf"] if command == "templates" else []
    env = {k: v for k, v in os.environ.items() if not k.startswith(("XDG_", "MPL"))} | {"HOME": home}
    done = subprocess.run([sys.executable, *words], env=env, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (0, "")
    assert out.exists()
