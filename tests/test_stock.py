"""What the workshop keeps, and what a wing file may change of it."""

from dataclasses import replace

import pytest

from wrywing.shop import stock
from wrywing.shop.stock import Adhesive, Cloth, Filler, Foam, MaterialError, Stock

# Common practice (facts.md, Stock): densities in kg/m^3.
RANGES = {
    "extruded polystyrene": (28, 45),
    "expanded polystyrene": (15, 30),
    "pvc foam": (48, 130),
    "expanded polypropylene": (20, 45),
    "balsa": (100, 250),
    "sitka spruce": (425, 435),
    "microballoon paste": (500, 700),
    "cotton-fibre paste": (1100, 1200),
    "laminating epoxy": (1100, 1200),
}


@pytest.mark.parametrize("start", RANGES)
def test_densities_lie_where_the_trade_has_them(start):
    low, high = RANGES[start]
    found = [m.density for name, m in Stock().materials.items() if name.startswith(start)]
    assert found
    assert low <= min(found) <= max(found) <= high


def test_every_figure_has_a_source():
    everything = [*Stock().materials.values(), *stock.PAPERS.values()]
    assert all(item.source.strip() for item in everything)
    assert all(name == item.name == name.lower() for name, item in Stock().materials.items())


def test_only_polystyrene_and_polypropylene_meet_a_hot_wire():
    foams = [m for m in Stock().materials.values() if isinstance(m, Foam)]
    for foam in foams:
        assert foam.hot_wire == ("polystyrene" in foam.family or "polypropylene" in foam.family)
        assert foam.why
    assert {foam.family for foam in foams} == set(stock.FAMILIES) - {"other"}
    for name in ("pvc foam 80", "polyurethane foam 32"):
        assert "poisonous gas" in Stock().find(name, Foam).why


def test_usual_sheets():
    assert stock.usual_sheets("mm") == (3, 4, 5, 6, 8, 10, 12, 15, 20)
    assert stock.usual_sheets("in") == pytest.approx(
        [25.4 * n for n in (1 / 8, 3 / 16, 1 / 4, 3 / 8, 1 / 2, 5 / 8, 3 / 4)]
    )
    foam = Stock().find("polyurethane foam 32", Foam)
    assert stock.usual_sheets("mm", 10, 20, foam) == (10, 15, 20)
    own = Stock().with_material("pvc foam 80", {"sheets": (9.0, 7.0, 30.0)}).find("pvc foam 80", Foam)
    assert stock.usual_sheets("mm", foam=own) == stock.usual_sheets("in", foam=own) == (7, 9)


# Published: ISO 216 and ASME Y14.1, sizes in mm; legal is common practice.
@pytest.mark.parametrize(
    ("name", "size"),
    [
        *(("a4", (210, 297)), ("A3", (297, 420)), ("a2", (420, 594)), ("a1", (594, 841)), ("a0", (841, 1189))),
        *(("letter", (8.5 * 25.4, 11 * 25.4)), ("legal", (8.5 * 25.4, 14 * 25.4)), ("tabloid", (11 * 25.4, 17 * 25.4))),
    ],
)
def test_papers(name, size):
    paper = stock.paper(name)
    assert (paper.width, paper.height) == pytest.approx(size)


def test_unknown_names_bring_the_nearest():
    with pytest.raises(
        ValueError, match=r"a known foam or wood, got 'pvc fom 81' \(nearest: .pvc foam 80.*`wrywing stock foam` l"
    ):
        Stock().find("pvc fom 81", Foam)
    with pytest.raises(ValueError, match="got 'microballoon paste', which is a filler"):
        Stock().find("microballoon paste", Adhesive)
    with pytest.raises(ValueError, match=r"a paper size, .* got 'a7'"):
        stock.paper("a7")


def test_a_figure_can_be_overridden():
    mine = Stock().with_material("Glass  cloth 105", {"areal_weight": 108.0})
    kept = Stock().find("glass cloth 105", Cloth)
    assert mine.find("glass cloth 105", Cloth) == replace(kept, areal_weight=108.0, source=stock.OWN)
    assert Stock().find("glass cloth 105", Cloth).areal_weight == 105
    wary = Stock().with_material("extruded polystyrene 33", {"hot_wire": False})
    assert not wary.find("extruded polystyrene 33", Foam).hot_wire


def test_new_materials():
    mine = Stock().with_material("shop mix", {"kind": "filler", "density": 700.0})
    assert mine.find("shop mix", Filler) == Filler("shop mix", 700.0, stock.OWN)
    grey = {"kind": "foam", "density": 40.0}
    assert not Stock().with_material("grey foam", grey).find("grey foam", Foam).hot_wire
    polypropylene = Stock().with_material("grey foam", {**grey, "family": "expanded polypropylene", "source": "scales"})
    assert polypropylene.find("grey foam", Foam).hot_wire
    assert polypropylene.find("grey foam", Foam).source == "scales"
    for kind in ({"kind": "wood"}, {"kind": "foam", "family": "wood"}):
        ply = Stock().with_material("birch plywood", {**kind, "density": 680.0}).find("birch plywood", Foam)
        assert (ply.family, ply.hot_wire, stock.kind_of(ply)) == ("wood", False, "wood")


@pytest.mark.parametrize(
    ("name", "given", "key", "words"),
    [
        ("grey foam", {"density": 40.0}, "kind", "is missing"),
        ("grey foam", {"kind": "foam"}, "density", "is missing"),
        ("grey cloth", {"kind": "cloth", "areal_weight": 100.0}, "fibre_density", "is missing"),
        ("grey foam", {"kind": "foam", "density": 40.0, "hot_wire": True}, "hot_wire", "not known"),
        ("pvc foam 80", {"hot_wire": True}, "hot_wire", "poisonous gas"),
        ("pvc foam 80", {"family": "extruded polystyrene"}, "family", "cross-linked PVC"),
        ("pvc foam 80", {"kind": "filler"}, "kind", "'foam'"),
        ("birch plywood", {"kind": "wood", "density": 680.0, "family": "PET"}, "family", "for a wood, got 'PET'"),
        ("pvc foam 80", {"fibre_density": 2000.0}, "fibre_density", "wanted none for a foam"),
        ("shop mix", {"kind": "filler", "density": 700.0, "sheets": (3.0,)}, "sheets", "wanted none for a filler"),
    ],
)
def test_refuses(name, given, key, words):
    with pytest.raises(MaterialError, match=words) as caught:
        Stock().with_material(name, given)
    assert caught.value.key == key
