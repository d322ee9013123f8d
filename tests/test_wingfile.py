"""The wing file: what it means, and every way to get it wrong."""

import math
import os
import re
from dataclasses import FrozenInstanceError
from pathlib import Path

import pytest
from pydantic import ValidationError

from wrywing.geom import coordinates, naca
from wrywing.shop import wingfile
from wrywing.shop.stock import Cloth, Foam
from wrywing.shop.values import Cant
from wrywing.shop.wingfile import WingError, load

MARSH = """\
name  = "Marsh survey wing, outer panel"
units = "mm"
[wing]
twist_axis = 0.25
planform   = "straight"
[[wing.stations]]
y = 0
chord = 520
le = 0
z = 0
airfoil = "naca 2412"
washout = 0.0
[[wing.stations]]
y = 2100
chord = 260
le = 560
z = 90
airfoil = "sections/outer.dat"
washout = 7.5
[wing.washout]
law = "smooth"
[skin]
thickness = 1.2
[web]
ends = [0, 2050]
line = [0.30, 0.32]
thickness = 8
cant = 0
edge = "full bevel"
bond = 0.3
foam = "pvc foam 80"
filler = "microballoon paste"
"""


def lens(thickness: float = 0.1) -> str:
    """Coordinates of a section whose sides are two parabolas, trailing edge round the nose and back."""
    at = [math.cos(math.pi * i / 30) for i in range(61)]
    side = [1 if i <= 30 else -1 for i in range(61)]
    rows = (f"{(1 + x) / 2:.6f} {s * thickness * (1 - x * x) / 2:.6f}" for x, s in zip(at, side, strict=True))
    return "two parabolas\n" + "\n".join(rows) + "\n"


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "sections").mkdir()
    (tmp_path / "sections" / "outer.dat").write_text(lens())
    return tmp_path


def edited(*edits: tuple[str, str]) -> str:
    text = MARSH
    for old, new in edits:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


def loaded(folder: Path, *edits: tuple[str, str]) -> wingfile.Loaded:
    path = folder / "marsh.toml"
    path.write_text(edited(*edits), encoding="utf-8")
    return load(path)


def refusal(path: Path) -> str:
    """Error of a wing file, which is one line without any phrase of a library."""
    with pytest.raises(WingError) as caught:
        load(path)
    line = str(caught.value)
    assert line.isprintable()
    assert line.startswith(f"{path.name}: ")
    assert not re.search(r"input should|pydantic|validation|<|valid (number|string)|Errno", line, re.IGNORECASE)
    return line


def test_what_it_says_is_what_is_meant(folder):
    wing = loaded(folder)
    record, web = wing.record, wing.record.web
    assert record.name == "Marsh survey wing, outer panel"
    assert [s.washout for s in record.wing.stations] == [0, 7.5]
    assert (web.ends, web.line, web.thickness, web.bond) == ((0, 2050), (0.30, 0.32), 8, 0.3)
    assert record.skin.thickness == 1.2
    assert web.cant == Cant("angle", 0.0)
    assert (web.adhesive, web.runs, web.angle_step, web.aim, web.cant_limit) == (
        "laminating epoxy",
        1,
        0.5,
        "filler",
        15,
    )
    assert wing.stock.find(web.foam, Foam).density == 80
    assert [s.name for s in wing.sections] == ["NACA 2412", "sections/outer.dat"]
    with pytest.raises(ValidationError):
        web.thickness = 9.0
    with pytest.raises(FrozenInstanceError):
        wing.stamp = ""


def test_inches_mean_the_same_wing(folder):
    """Every bare length turned into inches, or given its unit, leaves each number what it was."""
    figure = r"(?m)^(y|chord|le|z|thickness|bond)(\s*=\s*)([\d.]+)$"
    metric = loaded(folder).record.model_dump(exclude={"units"})
    inches = re.sub(figure, lambda m: f"{m[1]}{m[2]}{float(m[3]) / 25.4!r}", MARSH)
    inches = inches.replace('"mm"', '"in"').replace("[0, 2050]", f"[0, {2050 / 25.4!r}]")
    strings = re.sub(figure, r'\1\2"\3 mm"', MARSH)
    strings = strings.replace('"mm"\n[wing]', '"in"\n[wing]').replace("[0, 2050]", '["0 mm", "205 cm"]')
    for text in (inches, strings):
        assert 'units = "in"' in text
        (folder / "inch.toml").write_text(text)
        record = load(folder / "inch.toml").record
        assert record.units == "in"
        for key, value in record.model_dump(exclude={"units"}).items():
            assert numbers(value) == pytest.approx(numbers(metric[key]), rel=1e-12), key


def numbers(value: object) -> list[float]:
    if isinstance(value, dict | list | tuple):
        return [n for item in (value.values() if isinstance(value, dict) else value) for n in numbers(item)]
    return [value] if isinstance(value, float) else []


@pytest.mark.parametrize(
    ("text", "cant"),
    [
        ("2.5", Cant("angle", 2.5)),
        ('"-2 deg"', Cant("angle", -2.0)),
        ('"square at 900"', Cant("square", 900.0)),
        ('"Square  at 36 in"', Cant("square", 914.4)),
        ('"least filler"', Cant("least filler")),
        ('"least gap"', Cant("least gap")),
    ],
)
def test_cant(folder, text, cant):
    assert loaded(folder, ("cant = 0", f"cant = {text}")).record.web.cant == cant


def test_washout_laws(folder):
    root, tip, law = "washout = 0.0\n", "washout = 7.5\n", 'law = "smooth"'
    power = loaded(folder, (law, 'law = "power"\nexponent = 2.4')).record.wing
    assert (power.washout.law, power.washout.exponent) == ("power", 2.4)
    table = (law, 'law = "table"\npoints = [[0, 0], [1000, "3 deg"], [2100, -1]]')
    assert loaded(folder, (root, ""), (tip, ""), table).record.wing.washout.points == ((0, 0), (1000, 3), (2100, -1))


def test_skin_table(folder):
    rows = loaded(folder, ("thickness = 1.2", 'thickness = [[0, "1/16 in"], [2050, 1]]')).record.skin.thickness
    assert rows == ((0, 1.5875), (2050, 1))


def test_materials_of_the_workshops_own(folder):
    own = """
[web.facing]
cloth = "house cloth"
layers = 2
[limits]
max_mass = "9 oz"
[materials."house cloth"]
kind = "cloth"
areal_weight = "3 oz/yd^2"
fibre_density = 2550
[materials."PVC foam 80"]
density = "5 lb/ft^3"
sheets = [8, "3/8 in"]
"""
    wing = loaded(folder, ('filler = "microballoon paste"\n', 'filler = "microballoon paste"\n' + own))
    assert wing.stock.find("house cloth", Cloth).areal_weight == pytest.approx(101.72, abs=0.01)
    assert wing.stock.find("pvc foam 80", Foam).density == pytest.approx(80.09, abs=0.01)
    assert wing.stock.find("pvc foam 80", Foam).sheets_in == (8, 9.525)
    assert wing.record.web.facing.resin_fraction == 0.5
    assert wing.record.limits.max_mass == pytest.approx(255.1, abs=0.1)


def test_stamp_follows_every_byte(folder):
    stamp = loaded(folder).stamp
    assert re.fullmatch("[0-9a-f]{8}", stamp)
    assert loaded(folder).stamp == stamp
    assert loaded(folder, ("thickness = 8", "thickness = 8 ")).stamp != stamp
    (folder / "sections" / "outer.dat").write_text(lens(0.11))
    assert loaded(folder).stamp != stamp


def test_a_section_is_read_once(folder, monkeypatch):
    calls = []
    monkeypatch.setattr(coordinates, "read", lambda data, name: calls.append(name) or naca.naca("0012"))
    one, two = loaded(folder, ('"naca 2412"', '"sections/outer.dat"')).sections
    assert one is two
    assert calls == ["sections/outer.dat"]


def test_editors_marks_and_line_ends_do_not_matter(folder):
    (folder / "w.toml").write_bytes(b"\xef\xbb\xbf" + MARSH.replace("\n", "\r\n").encode())
    assert load(folder / "w.toml").record == loaded(folder).record


STATION = '[[wing.stations]]\ny = 1000\nchord = 400\nairfoil = "naca 0012"\n'
LAW = 'law = "smooth"'
END = 'filler = "microballoon paste"\n'
OUTER = '"sections/outer.dat"'
OUTER_STATION = MARSH[MARSH.index("[[wing.stations]]\ny = 2100") : MARSH.index("[wing.washout]")]
OUTER_AIRFOIL = "wing.stations[2].airfoil (y = 2100)"


def material(text: str) -> tuple[str, str]:
    return END, f"{END}{text}\n"


BAD: list[tuple[tuple[str, str], str, str]] = [
    # keys
    (("thickness = 8", "thicknes = 8"), "web.thicknes", "unknown key, did you mean web.thickness?"),
    (("bond = 0.3", "twist_axis = 0.25"), "web.twist_axis", "unknown key, did you mean wing.twist_axis?"),
    (("bond = 0.3", "qqq = 1"), "web.qqq", "unknown key, known here: ends, line, thickness"),
    (("[web]", "[webb]"), "webb", "unknown key, did you mean web?"),
    (("chord = 520", "cord = 520"), "wing.stations[1].cord (y = 0)", "did you mean wing.stations[1].chord?"),
    (('foam = "pvc foam 80"\n', ""), "web.foam", "is missing, wanted the web sheet's material"),
    (("chord = 260\n", ""), "wing.stations[2].chord (y = 2100)", "is missing, wanted the section's chord"),
    (("y = 2100\n", ""), "wing.stations[2].y", "is missing"),
    (("[skin]\nthickness = 1.2\n", ""), "skin", "is missing, wanted the skin, a table [skin]"),
    # types and dimensions
    (("thickness = 8", 'thickness = "3 kg"'), "web.thickness", """such as 6, "0.8 mm" or "1/4 in", got '3 kg'"""),
    (("thickness = 8", "thickness = true"), "web.thickness", "got true"),
    (("thickness = 8", "thickness = [8]"), "web.thickness", "got [8]"),
    (("thickness = 8", "thickness = nan"), "web.thickness", "got nan"),
    (("thickness = 8", "thickness = inf"), "web.thickness", "got inf"),
    (("thickness = 8", "thickness = 2020-01-01"), "web.thickness", "got 2020-01-01"),
    (("thickness = 8", "thickness = 1e300"), "web.thickness", "wanted a length within 100 m, got 1e+300"),
    (('"mm"', '"cm"'), "units", "wanted \"mm\" or \"in\", got 'cm'"),
    (('"straight"', "3"), "wing.planform", 'wanted "straight" or "smooth", got 3'),
    (('"full bevel"', '"round"'), "web.edge", '"square", "set bevel" or "full bevel"'),
    (('"Marsh survey wing, outer panel"', '"two\\nlines"'), "name", "a line of text"),
    (('"Marsh survey wing, outer panel"', '" "'), "name", "a line of text"),
    (("ends = [0, 2050]", "ends = [0]"), "web.ends[2]", "is missing"),
    (("ends = [0, 2050]", "ends = [0, 1, 2]"), "web.ends", "wanted the ribs [y1, y2]"),
    (("ends = [0, 2050]", "ends = 3"), "web.ends", "got 3"),
    (("bond = 0.3", "runs = 0"), "web.runs", "a whole number of 1 or more, got 0"),
    (("bond = 0.3", "runs = 1.5"), "web.runs", "a whole number of 1 or more, got 1.5"),
    (("bond = 0.3", "runs = true"), "web.runs", "a whole number of 1 or more, got true"),
    # stations
    ((OUTER_STATION, ""), "wing.stations", "two or more [[wing.stations]], root outwards, got a list of 1 table"),
    (("y = 2100", "y = 0"), "wing.stations[2].y", "wanted y above the one before, 0 mm, got 0 mm"),
    (("y = 0\n", "y = 2200\n"), "wing.stations[2].y", "wanted y above the one before, 2200 mm, got 2100 mm"),
    (("y = 0\n", "y = -1\n"), "wing.stations[1].y", "wanted a length of 0 or more, got -1"),
    (("chord = 260", "chord = 0"), "wing.stations[2].chord (y = 2100)", "wanted a length above 0, got 0"),
    (("chord = 260", "chord = -260"), "wing.stations[2].chord (y = 2100)", "wanted a length above 0, got -260"),
    (("twist_axis = 0.25", "twist_axis = 1.5"), "wing.twist_axis", "a chord fraction from 0 to 1, got 1.5"),
    # washout
    (("washout = 7.5", "washout = 61"), "wing.stations[2].washout (y = 2100)", "from -60 to 60 degrees, got 61"),
    (("washout = 7.5\n", ""), "wing.stations[2].washout (y = 2100)", 'is missing, wanted degrees at every station'),
    (("washout = 0.0\n", ""), "wing.stations[1].washout (y = 0)", "is missing"),
    ((LAW, 'law = "cubic"'), "wing.washout.law", "got 'cubic'"),
    ((LAW, 'law = "power"'), "wing.washout.exponent", "is missing"),
    ((LAW, 'law = "power"\nexponent = 0.9'), "wing.washout.exponent", "a number from 1 to 20, got 0.9"),
    ((LAW, "exponent = 2"), "wing.washout.exponent", 'only with law = "power", got law = "smooth"'),
    ((LAW, "points = [[0, 0], [2100, 1]]"), "wing.washout.points", 'only with law = "table"'),
    ((LAW, 'law = "table"'), "wing.washout.points", "is missing"),
    ((LAW, 'law = "table"\npoints = [[0, 0]]'), "wing.washout.points", "two or more [y, degrees]"),
    ((LAW, 'law = "table"\npoints = [[0, 0], [0, 1]]'), "wing.washout.points[2]", "above the one before"),
    ((LAW, 'law = "table"\npoints = [[0, 0], [2100, 99]]'), "wing.washout.points[2][2]", "got 99"),
    ((LAW, 'law = "table"\npoints = [[0, 0], [2100, 1]]'), "wing.stations[1].washout (y = 0)", "wanted none here"),
    # skin
    (("thickness = 1.2", "thickness = 0"), "skin.thickness", "wanted a length above 0, got 0"),
    (("thickness = 1.2", "thickness = [[0, 1]]"), "skin.thickness", "two or more rows"),
    (("thickness = 1.2", "thickness = [[0, 1], [3000]]"), "skin.thickness[2][2]", "is missing"),
    (("thickness = 1.2", "thickness = [[0, 1], [2100, -1]]"), "skin.thickness[2][2]", "a length above 0, got -1"),
    (("thickness = 1.2", "thickness = [[9, 1], [0, 1]]"), "skin.thickness[2]", "above the one before"),
    (("thickness = 1.2", "thickness = [[0, 1], [2000, 1]]"), "skin.thickness", "cover the web's ends, 0 mm to 2050 mm"),
    # web
    (("thickness = 8", "thickness = 0"), "web.thickness", "wanted a length above 0, got 0"),
    (("thickness = 8", "thickness = -3"), "web.thickness", "wanted a length above 0, got -3"),
    (("bond = 0.3", "bond = -0.3"), "web.bond", "wanted a length of 0 or more, got -0.3"),
    (("ends = [0, 2050]", "ends = [0, 2101]"), "web.ends[2]", "within the stations, 0 mm to 2100 mm, got 2101 mm"),
    (("ends = [0, 2050]", "ends = [-1, 2050]"), "web.ends[1]", "within the stations"),
    (("ends = [0, 2050]", "ends = [2050, 0]"), "web.ends[2]", "above the one before"),
    (("line = [0.30, 0.32]", "line = [0.30, 1.0]"), "web.line[2]", "between 0 and 1, got 1.0"),
    (("line = [0.30, 0.32]", "line = [0, 0.3]"), "web.line[1]", "between 0 and 1, got 0"),
    (("cant = 0", "cant = 46"), "web.cant", "wanted an angle within 45 degrees"),
    (("cant = 0", 'cant = "square"'), "web.cant", "got 'square'"),
    (("cant = 0", 'cant = "square at 3 kg"'), "web.cant", "got 'square at 3 kg'"),
    (("cant = 0", 'cant = "square at 2200"'), "web.cant", "within the stations, 0 mm to 2100 mm, got 2200 mm"),
    (("cant = 0", "cant_limit = 0"), "web.cant_limit", "above 0, up to 45 degrees, got 0"),
    (("cant = 0", "angle_step = -0.5"), "web.angle_step", "an angle from 0.05 to 45 degrees, got -0.5"),
    (("cant = 0", 'aim = "mass"'), "web.aim", 'wanted "filler" or "gap"'),
    # airfoils
    ((OUTER, '"naca 99"'), OUTER_AIRFOIL, "wanted a NACA code of 4 or 5 digits"),
    ((OUTER, '"flat plate"'), OUTER_AIRFOIL, "flat plate: no such file, wanted a coordinate file or"),
    ((OUTER, '"sections/inner.dat"'), OUTER_AIRFOIL, "sections/inner.dat: no such file"),
    ((OUTER, '"sections"'), OUTER_AIRFOIL, "sections: is a folder"),
    ((OUTER, '"empty.dat"'), OUTER_AIRFOIL, "empty.dat: holds no section"),
    ((OUTER, '"binary.dat"'), OUTER_AIRFOIL, "binary.dat: holds no section"),
    ((OUTER, '"prose.dat"'), OUTER_AIRFOIL, "prose.dat: holds no section"),
    ((OUTER, '"\\u0000"'), OUTER_AIRFOIL, "a line of text"),
    ((OUTER, f'"{"x" * 999}"'), OUTER_AIRFOIL, "1 to 120 characters"),
    # materials and limits
    (("pvc foam 80", "pvc foam 81"), "web.foam", 'a known foam or wood, got \'pvc foam 81\' (nearest: "pvc foam 80"'),
    (("pvc foam 80", "microballoon paste 2"), "web.foam", "a known foam"),
    (("pvc foam 80", "glass cloth 105"), "web.foam", "got 'glass cloth 105', which is a cloth"),
    (("microballoon paste", "micro"), "web.filler", "a known filler, got 'micro'"),
    (("bond = 0.3", 'adhesive = "glue"'), "web.adhesive", "a known adhesive, got 'glue'"),
    (material('[materials."pvc foam 80"]\ndensity = -80'), 'materials."pvc foam 80".density', "a density from 5 to"),
    (material('[materials.goo]\nkind = "filler"\ndensity = 0.6'), "materials.goo.density", "from 5 to 25000 kg/m^3"),
    (material("[materials.goo]\ndensity = 600"), "materials.goo.kind", "is missing"),
    (material('[materials.goo]\nkind = "gas"'), "materials.goo.kind", '"foam", "wood", "filler", "adhesive", "cloth"'),
    (material('[materials.goo]\nkind = "foam"'), "materials.goo.density", "is missing"),
    (material('[materials.goo]\nfamily = "cheese"'), "materials.goo.family", 'one of "extruded polystyrene"'),
    (material('[materials."pvc foam 80"]\nhot_wire = true'), 'materials."pvc foam 80".hot_wire', "poisonous gas"),
    (material('[materials."pvc foam 80"]\nhot_wire = 1'), 'materials."pvc foam 80".hot_wire', "true or false"),
    (material('[materials."pvc foam 80"]\nsheets = []'), 'materials."pvc foam 80".sheets', "one or more lengths"),
    (material('[materials."pvc foam 80"]\ndensty = 3'), 'materials."pvc foam 80".densty', ".density?"),
    (material("[web.facing]\nlayers = 1"), "web.facing.cloth", "is missing"),
    (material('[web.facing]\ncloth = "wool"\nlayers = 1'), "web.facing.cloth", "a known cloth, got 'wool'"),
    (material('[web.facing]\ncloth = "glass cloth 105"\nlayers = 0'), "web.facing.layers", "got 0"),
    (material("[web.facing]\nareal_weight = 9\nlayers = 1\nresin_fraction = 1"), "web.facing.resin_fraction", "got 1"),
    (material("[limits]\nmax_gap = -1"), "limits.max_gap", "a length of 0 or more, got -1"),
    (material("[limits]\nmax_mass = 0"), "limits.max_mass", "a mass above 0, got 0"),
    (material('[limits]\nmax_mass = "3 mm"'), "limits.max_mass", "got '3 mm'"),
]  # fmt: skip


@pytest.mark.parametrize(("edit", "key", "words"), BAD, ids=[f"{key}-{i}" for i, (_, key, _) in enumerate(BAD)])
def test_bad_input(folder, edit, key, words):
    (folder / "empty.dat").touch()
    (folder / "binary.dat").write_bytes(bytes(range(256)))
    (folder / "prose.dat").write_text("the quick brown fox\n")
    (folder / "marsh.toml").write_text(edited(edit))
    line = refusal(folder / "marsh.toml")
    assert line.startswith(f"marsh.toml: {key}: ")
    assert words in line
    assert " more)" not in line


def test_power_leaves_inner_stations_out(folder):
    tip, law = "[[wing.stations]]\ny = 2100", (LAW, 'law = "power"\nexponent = 2')
    assert len(loaded(folder, (tip, STATION + tip), law).sections) == 3
    (folder / "marsh.toml").write_text(edited((tip, f"{STATION}washout = 3\n{tip}"), law))
    line = refusal(folder / "marsh.toml")
    assert 'wing.stations[2].washout (y = 1000): wanted none here with washout law "power", got 3' in line


def test_the_first_of_several_faults_in_file_order(folder):
    edits = ("chord = 260", "chord = 0"), ("bond = 0.3", "bond = -1"), ('units = "mm"', 'units = "mm"\nwarp = 9')
    (folder / "marsh.toml").write_text(edited(*edits))
    line = refusal(folder / "marsh.toml")
    assert line.startswith("marsh.toml: warp: unknown key")
    assert line.endswith("(and 2 more)")


def test_inch_files_are_answered_in_inches(folder):
    inch = ('"mm"', '"in"'), ("ends = [0, 2050]", "ends = [0, 2101]")
    (folder / "marsh.toml").write_text(edited(*inch))
    assert "0 in to 2100 in, got 2101 in" in refusal(folder / "marsh.toml")


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"\x89PNG\r\n\x1a\n\x00", "line 1: wanted UTF-8 text, got byte 0x89"),
        (MARSH.encode("utf-16"), "line 1: wanted UTF-8 text, got byte 0xff"),
        ('name = "caf\xe9"'.encode("latin-1"), "wanted UTF-8 text"),
        (b"units = 'mm'\nbond = 1/4 in\n", "line 2: wanted TOML, got 'bond = 1/4 in' (column 9"),
        (b"[web\n", "line 1: wanted TOML"),
        (b'name = "', "wanted TOML"),
        (b"a = " + b"[" * 5000, "wanted TOML, got brackets nested too deep"),
        (b"a = " + b"9" * 5000, "wanted TOML"),
        (b"", "name: is missing"),
    ],
)
def test_not_a_wing_file(tmp_path, content, words):
    (tmp_path / "w.toml").write_bytes(content)
    assert words in refusal(tmp_path / "w.toml")


def test_no_file_to_read(tmp_path):
    assert refusal(tmp_path / "w.toml") == "w.toml: no such file, wanted a wing file"
    assert "is a folder" in refusal(tmp_path)
    os.mkfifo(tmp_path / "pipe")
    assert "is no ordinary file" in refusal(tmp_path / "pipe")


def test_a_file_that_may_not_be_read(folder, monkeypatch):
    def denied(self: Path) -> bytes:
        raise PermissionError(13, "Permission denied")

    loaded(folder)
    monkeypatch.setattr(Path, "read_bytes", denied)
    assert "cannot be read (Permission denied)" in refusal(folder / "marsh.toml")


ODD = [
    "0",
    "-1",
    "1e999",
    "nan",
    "true",
    '""',
    '"x"',
    '"3 kg"',
    "[]",
    "[[1, 2]]",
    "{}",
    "{y = 1}",
    "[{}, 3]",
    "1979-05-27",
]
ODD += ["0x" + "f" * 4000, '"\\u0007"', "[nan, true]"]


def test_any_value_gone_odd_is_read_or_refused_in_one_line(folder):
    """Every value of the file replaced in turn by each odd one, and every line left out."""
    path = folder / "marsh.toml"
    lines = MARSH.splitlines()
    for i, line in enumerate(lines):
        key = line.split("=")[0] if "=" in line else None
        for new in [*(f"{key}= {odd}" for odd in ODD if key), ""]:
            path.write_text("\n".join([*lines[:i], new, *lines[i + 1 :]]))
            try:
                load(path)
            except WingError:
                refusal(path)


def test_every_key_is_described():
    for path, record in wingfile.tables().items():
        for key, info in record.model_fields.items():
            assert info.description, (path, key)
    assert ("web", "facing") in wingfile.tables()
    assert ("materials", '"name"') in wingfile.tables()
