"""Wing files at random, within what a builder might build."""

from __future__ import annotations

from hypothesis import strategies as st

SECTIONS = ("naca 0012", "naca 2412", "naca 4415", "naca 1408", "naca 23012", "naca 0009")


@st.composite
def wing_files(draw) -> str:
    """A wing file in mm: two to four stations, any edge and cant, some with flanges, ribs, cradles and a core."""

    def number(low: float, high: float) -> float:
        return round(draw(st.floats(low, high)), 2)

    long, chord = number(400, 2500), number(160, 600)
    count = draw(st.integers(2, 4))
    lines = ['name = "random"', "[wing]", f'planform = "{draw(st.sampled_from(["straight", "smooth"]))}"']
    y, le, twist = 0.0, 0.0, 0.0
    places = []
    for _ in range(count):
        places.append(y)
        lines += ["[[wing.stations]]", f"y = {y}", f"chord = {chord}", f"le = {le}", f"z = {number(-20, 60)}"]
        lines += [f'airfoil = "{draw(st.sampled_from(SECTIONS))}"', f"washout = {round(twist, 2)}"]
        step = round(long / (count - 1) * number(0.8, 1.2), 1)
        y = round(y + step, 1)
        le = round(le + step * number(-0.1, 0.5), 1)
        chord = round(chord * number(0.6, 1.0), 1)
        twist += number(-2.0, 5.0)
    start, stop = round(0.02 * places[-1], 1), round(number(0.6, 0.98) * places[-1], 1)
    lines += ["[skin]", f"thickness = {number(0.3, 1.5)}", "[web]", f"ends = [{start}, {stop}]"]
    lines += [f"line = [{number(0.2, 0.45)}, {number(0.2, 0.45)}]", f"thickness = {number(2, 10)}"]
    lines += [f"cant = {number(-10, 10)}", f"bond = {number(0, 0.5)}", f"runs = {draw(st.integers(1, 4))}"]
    lines += [f'edge = "{draw(st.sampled_from(["square", "set bevel", "full bevel"]))}"']
    lines += ['foam = "pvc foam 80"', 'filler = "microballoon paste"']
    if draw(st.booleans()):
        lines += [
            "[flanges]",
            f"web_leg = {number(8, 15)}",
            f"skin_leg = {number(10, 25)}",
            f"inner_radius = {number(0.5, 3)}",
        ]
        lines += [
            'cloth = "glass cloth 105"',
            "layers = 2",
            f"bar = {number(85, 95)}",
            "[flanges.front_top]",
            "[flanges.rear_bottom]",
        ]
    if draw(st.booleans()):
        lines += ["[ribs]", f"at = [{start}, {round((start + stop) / 2, 1)}]", "thickness = 3", "margin = 10"]
        lines += ["[cradles]", f"at = [{places[-1] / 2}]"]
    if draw(st.booleans()):
        lines += [
            "[[cores]]",
            f'region = "{draw(st.sampled_from(["nose", "aft"]))}"',
            'foam = "extruded polystyrene 33"',
        ]
        lines += [f"bays = {draw(st.integers(1, 3))}", "kerf = 1.0", 'passes = "separate"', "least_thickness = 2"]
        lines += ["[wire]", "diameter = 0.5"]
    return "\n".join(lines) + "\n"
