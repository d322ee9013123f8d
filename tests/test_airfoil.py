"""Sections: against published ordinates and closed forms, and coordinate files in every untidy style."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from wrywing.geom.airfoil import N, Section
from wrywing.geom.coordinates import from_points, parse, read
from wrywing.geom.naca import mean_line, naca, naca_code

Floats = NDArray[np.float64]

P = np.linspace(0.0, 1.0, 501)
GRID = np.arange(-N, N + 1) / N

# --- published and closed forms


def test_published_ordinates_to_the_last_digit() -> None:
    # Published: NACA Report 824 and Abbott & von Doenhoff, in percent of chord. 5.737 is 5.73754 by the formula.
    x = np.array([5, 10, 20, 30, 40, 50, 60, 70, 80, 90, 95, 100]) / 100
    table = [3.555, 4.683, 5.737, 6.002, 5.803, 5.294, 4.563, 3.664, 2.623, 1.448, 0.807, 0.126]
    assert 100 * naca("0012").upper(x) == pytest.approx(table, abs=0.00055)
    assert -100 * naca("0012").lower(x) == pytest.approx(table, abs=0.00055)
    x = np.array([0.1, 0.3, 0.5, 0.7])
    assert 100 * naca("2412").upper(x) == pytest.approx([5.63, 7.88, 7.24, 5.18], abs=0.0051)


def test_published_lower_side_of_2412() -> None:
    # Published, as above. At these four stations the old table, worked by hand, stands up to 0.014 above the formula.
    x = np.array([0.1, 0.3, 0.5, 0.7])
    assert 100 * naca("2412").lower(x) == pytest.approx([-3.75, -4.12, -3.34, -2.14], abs=0.015)
    # From memory: stations of the same table that agree to the last digit.
    x = np.array([1.25, 2.5, 5, 7.5, 15, 20, 25, 40, 80, 95, 100]) / 100
    table = [-1.65, -2.27, -3.01, -3.46, -4.10, -4.23, -4.22, -3.80, -1.50, -0.48, -0.13]
    assert 100 * naca("2412").lower(x) == pytest.approx(table, abs=0.0051)


def test_ordinates_of_23012() -> None:
    # From memory: NACA Report 537 and Abbott & von Doenhoff; worked by hand, good to about 0.03.
    x = np.array([2.5, 5, 10, 15, 20, 30, 40, 50, 60, 70, 80, 90]) / 100
    upper = [3.61, 4.91, 6.43, 7.19, 7.50, 7.55, 7.14, 6.41, 5.47, 4.36, 3.08, 1.68]
    lower = [-1.71, -2.26, -2.92, -3.50, -3.97, -4.46, -4.48, -4.17, -3.67, -3.00, -2.16, -1.23]
    assert 100 * naca("23012").upper(x) == pytest.approx(upper, abs=0.03)
    assert 100 * naca("23012").lower(x) == pytest.approx(lower, abs=0.03)


def outline(code: str, x: Floats) -> tuple[Floats, Floats]:
    """Upper and lower points of a code by the published formulas, at the mean line's stations x."""
    rise = mean_line(code)(x, 1)
    half = int(code[-2:]) / 20 * (0.2969 * np.sqrt(x) - 0.126 * x - 0.3516 * x**2 + 0.2843 * x**3 - 0.1015 * x**4)
    normal = half[:, None] * np.column_stack([-rise, np.ones_like(x)]) / np.hypot(1.0, rise)[:, None]
    middle = np.column_stack([x, mean_line(code)(x)])
    return middle + normal, middle - normal


@pytest.mark.parametrize("code", ["0012", "2412", "6409", "23012", "23112", "25112"])
def test_section_is_the_formula(code: str) -> None:
    section = naca(code)
    x = np.linspace(0.02, 0.99, 20001)
    upper, lower = outline(code, x)
    miss = np.maximum(
        np.abs(section.upper(upper[:, 0]) - upper[:, 1]), np.abs(section.lower(lower[:, 0]) - lower[:, 1])
    )
    at_joint = np.abs(x - mean_line(code).joint) < 0.02
    assert miss[~at_joint].max() < 1.5e-8
    assert miss[at_joint].max() < 3e-7


@pytest.mark.parametrize("line", ["210", "220", "230", "240", "250", "221", "231", "241", "251"])
def test_five_digit_mean_lines(line: str) -> None:
    # Closed forms by which the constants were chosen (NACA Report 537; thin-airfoil theory): the crest stands at
    # 5 % times the second digit, the design lift coefficient is 0.3, a reflexed line has no moment about the quarter
    # chord. The tolerances are the rounding of the published constants.
    mean = mean_line(line + "12")
    theta = (np.arange(20000) + 0.5) * np.pi / 20000
    x = 0.5 * (1.0 - np.cos(theta))
    a1, a2 = (2.0 * np.mean(mean(x, 1) * np.cos(k * theta)) for k in (1, 2))
    assert x[np.argmax(mean(x))] == pytest.approx(0.05 * int(line[1]), abs=4e-4)
    assert np.pi * a1 == pytest.approx(0.3, rel=0.03)
    moment = 0.25 * np.pi * (a2 - a1)
    assert (abs(moment) < 1.5e-3) == (line[2] == "1")
    assert mean([0.0, 1.0]) == pytest.approx(0.0, abs=1e-15)


def test_first_digit_scales_the_mean_line() -> None:
    assert mean_line("43012")(P) == pytest.approx(2.0 * mean_line("23012")(P), abs=1e-15)
    # From memory: the 230 mean line rises 1.84 % at 15 % chord; 2412 (by its definition) 2 % at 40 %.
    assert float(mean_line("23012")(0.15)) == pytest.approx(0.0184, abs=5e-5)
    assert float(mean_line("2412")(0.4)) == 0.02


def nose_radius(section: Section) -> float:
    """Radius at t = 0, where p - nose = (1 - nose) t^2 and q = q0 + c1 t."""
    return float(section.coef[N, 1] ** 2 / (2.0 * (1.0 - section.nose)))


def test_leading_edge_radius() -> None:
    # Published: NACA Report 460, 1.1019 t^2. The file's spline meets the nose's change of curvature within 2 %.
    assert nose_radius(naca("0012")) == pytest.approx(1.1019 * 0.12**2, rel=1e-4)
    upper, lower = outline("0012", 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, 101))))
    assert nose_radius(from_points(np.vstack([upper[::-1], lower]), "file")) == pytest.approx(
        1.1019 * 0.12**2, rel=0.02
    )


# --- laws


def test_nose_of_2412_bulges_ahead_of_the_chord_line() -> None:
    # Closed form: x = v^2 - y_t sin(theta) with y_t = 5 t 0.2969 v near v = 0 has its least value -(y_t' sin)^2 / 4.
    sin = 0.1 / np.hypot(1.0, 0.1)
    assert naca("2412").nose == pytest.approx(-((0.6 * 0.2969 * sin) ** 2) / 4, rel=0.01)
    assert naca("0012").nose == 0.0
    assert naca("2412").p([-1.0, 0.0, 1.0]) == pytest.approx([1.0, naca("2412").nose, 1.0])
    assert naca("2412").t_of(0.25, upper=False) == pytest.approx(-0.5, abs=1e-4)


@given(st.integers(1, 40), st.floats(-1.0, 1.0))
def test_symmetric_sections_mirror(thickness: int, t: float) -> None:
    section = naca(f"00{thickness:02d}")
    assert section.q(-t) == pytest.approx(-section.q(t), abs=1e-15)
    # Published formula, from the table above: half thickness 6.002 % at 30 % for 12 %, and in proportion.
    assert section.upper(0.3) - section.lower(0.3) == pytest.approx(2 * 0.06002 * thickness / 12, rel=1e-4)


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 6), st.integers(2, 7), st.integers(6, 21), st.floats(0.01, 0.98))
def test_any_four_digit_section_is_the_formula(m: int, p: int, thickness: int, x: float) -> None:
    code = f"{m}{p}{thickness:02d}"
    section = naca(code)
    upper, lower = outline(code, np.array([x]))
    assert section.upper(upper[:, 0]) == pytest.approx(upper[:, 1], abs=1e-5)
    assert section.lower(lower[:, 0]) == pytest.approx(lower[:, 1], abs=1e-5)
    assert section.upper(0.3) - section.lower(0.3) == pytest.approx(2 * 0.06002 * thickness / 12, rel=0.05)
    # The cubics meet in height and slope.
    c, d = section.coef, 1.0 / N
    assert c[1:, 0] == pytest.approx(c[:-1] @ [1.0, d, d**2, d**3], abs=1e-13)
    assert c[1:, 1] == pytest.approx(c[:-1] @ [0.0, 1.0, 2 * d, 3 * d**2], abs=1e-11)


# --- coordinate files

UPPER, LOWER = outline("2412", 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, 101))))
LOOP = np.vstack([UPPER[::-1], LOWER[1:]])


def rows(points: Floats, form: str = "{:.6f} {:.6f}") -> str:
    return "".join(form.format(x, y) + "\n" for x, y in points)


SIDES = rows(UPPER) + "\n" + rows(LOWER)

UNTIDY: dict[str, str] = {
    "plain": "NACA 2412\n" + rows(LOOP),
    "no title": rows(LOOP),
    "title of several lines": "A section\nas measured, 3 stations\n\n" + rows(LOOP),
    "numbers in the title": "NACA 2412 at 12 %\n2412\n101 points a side\n" + rows(LOOP),
    "commas": "t\n" + rows(LOOP, "{:.6f},{:.6f}"),
    "commas and blanks": "t\n" + rows(LOOP, "  {:.6f} , {:.6f} ,"),
    "semicolons": "t\n" + rows(LOOP, "{:.6f}; {:.6f}"),
    "tabs": "t\n" + rows(LOOP, "\t{:.6f}\t{:.6f}\t"),
    "blank lines": "t\n\n" + rows(LOOP, "{:.6f} {:.6f}\n"),
    "carriage returns": ("t\n" + rows(LOOP)).replace("\n", "\r\n"),
    "powers of ten": "t\n" + rows(LOOP, "{:+.8E} {:.8e}"),
    "powers of ten, D": "t\n" + rows(LOOP, "{:.8E} {:.8E}").replace("E", "D"),
    "no leading nought": "t\n" + rows(LOOP).replace(" 0.", " .").replace("-0.", "-."),
    "minus signs": "t\n" + rows(LOOP).replace("-", "\N{MINUS SIGN}"),
    "leading edge twice": "t\n" + rows(np.vstack([UPPER[::-1], LOWER])),
    "leading edge all but twice": "t\n" + rows(np.vstack([UPPER[::-1], [[0.0, -1e-5]], LOWER[1:]])),
    "every point twice": "t\n" + rows(np.repeat(LOOP, 2, axis=0)),
    "chord 100": "t\n" + rows(100.0 * LOOP),
    "chord 400": "t\n" + rows(400.0 * LOOP),
    "text at the end": rows(LOOP) + "\nmeasured in March\nRe 200000, 12 % thick\n",
    "other way round": "t\n" + rows(LOOP[::-1]),
    "counts": "t\n101. 101.\n\n" + SIDES,
    "counts, whole, chord 400": "t\n 101 101\n" + rows(400.0 * UPPER) + rows(400.0 * LOWER),
    "counts, lower side first": "t\n101 101\n" + rows(LOWER) + rows(UPPER),
    "two sides": "t\n" + SIDES,
    "two sides with headings": "t\nUpper side\n" + rows(UPPER) + "Lower side\n" + rows(LOWER),
    "two sides, no blank": rows(UPPER) + rows(LOWER),
    "two sides from behind": rows(UPPER[::-1]) + "\n" + rows(LOWER[::-1]),
    "closed by repeating the first point": "t\n" + rows(np.vstack([LOOP, LOOP[:1]])),
    "closed by a face": "t\n" + rows(np.vstack([[1.0, 0.0], LOOP, [1.0, 0.0]])),
}


@pytest.mark.parametrize("text", UNTIDY.values(), ids=UNTIDY.keys())
def test_untidy_files_hold_the_same_section(text: str) -> None:
    # 4e-6 of the chord: the sixth decimal, swung two or three times as far by the spline between close points, and
    # 1e-6 where the spline rounds off the joint of the mean line. On a chord of 500 mm that is 0.002 mm.
    section, exact = parse(text, "file"), naca("2412")
    assert section.doubts == ()
    assert section.nose == pytest.approx(exact.nose, abs=1e-6)
    assert section.q(GRID) == pytest.approx(exact.q(GRID), abs=4e-6)


@pytest.mark.parametrize(
    "encode",
    [
        lambda s: s.encode(),
        lambda s: s.encode("utf-8-sig"),
        lambda s: s.encode("latin-1"),
        lambda s: s.encode("utf-16"),
        lambda s: s.encode().replace(b"\n", b"\r") + b"\x1a",
    ],
)
def test_bytes_of_many_encodings(encode: Callable[[str], bytes]) -> None:
    section = read(encode("Möwe, 2,5 % gewölbt\n" + rows(LOOP)), "Möwe")
    assert section.name == "Möwe"
    assert section.q(GRID) == pytest.approx(naca("2412").q(GRID), abs=4e-6)


@pytest.mark.parametrize("half_gap", [0.0, 0.0005, 0.00126, 0.002])
def test_trailing_edge_open_closed_and_crossed(half_gap: float) -> None:
    # A wedge taken off each side shifts heights, not stations, so the result is known exactly.
    sheared = LOOP.copy()
    sheared[:101, 1] -= half_gap * LOOP[:101, 0]
    sheared[101:, 1] += half_gap * LOOP[101:, 0]
    section = from_points(sheared, "file")
    assert section.upper(P) == pytest.approx(naca("2412").upper(P) - half_gap * P, abs=4e-6)
    assert section.lower(P) == pytest.approx(naca("2412").lower(P) + half_gap * P, abs=4e-6)
    crossed = float(section.lower(1.0) - section.upper(1.0))
    if crossed < 0.0:
        assert section.doubts == ()
    else:
        (doubt,) = section.doubts
        said = re.fullmatch(r"the trailing edge is crossed by (\d\.\d+) of the chord", doubt)
        assert said is not None
        assert float(said[1]) == pytest.approx(crossed, abs=6e-6)


def test_flat_sides_stay_flat() -> None:
    s = np.linspace(0.0, 1.0, 151)
    x = s**2
    upper = np.column_stack([x, 0.2 * s * (1.0 - x)])
    lower = np.column_stack([x, np.where(x < 0.1, -0.1 * s * (1.0 - x / 0.1) ** 2, 0.0)])
    section = from_points(np.vstack([upper[::-1], lower[1:]]), "flat")
    aft = np.linspace(0.3, 1.0, 300)
    assert np.abs(section.lower(aft)).max() < 1e-9
    assert np.abs(np.diff(section.coef[: N // 3, 1])).max() < 1e-7


@settings(max_examples=20, deadline=None)
@given(st.floats(-29, 29), st.floats(0.01, 3000), st.floats(-5, 5), st.floats(-5, 5))
def test_drawn_anywhere_at_any_size(degrees: float, size: float, dx: float, dy: float) -> None:
    # Off its own axes an outline is laid on its chord line, wherever and however large it was drawn.
    drawn = np.add(LOOP, 2.0)
    home = from_points(drawn, "home")
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    away = from_points(size * (drawn @ [[c, s], [-s, c]] + [dx, 20.0 + dy]), "away")
    assert away.q(GRID) == pytest.approx(home.q(GRID), abs=1e-9)
    assert [home.nose, float(home.q(0.0))] == pytest.approx([0.0, 0.0], abs=1e-12)
    assert float(home.upper(1.0) + home.lower(1.0)) == pytest.approx(0.0, abs=1e-4)


def test_turning_is_reported() -> None:
    c, s = np.cos(np.radians(5.0)), np.sin(np.radians(5.0))
    upper, lower = outline("0012", 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, 101))))
    tail_up = 120.0 * np.vstack([upper[::-1], lower[1:]]) @ [[c, s], [-s, c]] + [7.0, 30.0]
    section = from_points(tail_up, "file")
    assert "turned by 5.00 degrees, nose up" in section.doubts[0]
    assert section.upper(P) == pytest.approx(naca("0012").upper(P), abs=4e-6)


def test_a_side_that_stops_short() -> None:
    short = LOOP[np.arange(len(LOOP)) < 101 + np.count_nonzero(LOWER[1:, 0] < 0.985)]
    assert from_points(short, "file").q(GRID) == pytest.approx(naca("2412").q(GRID), abs=3e-5)
    shorter = short[:-4]
    with pytest.raises(ValueError, match="lower side to reach the trailing edge"):
        from_points(shorter, "file")


def test_few_points_are_doubtful() -> None:
    assert "17 points only" in from_points(np.vstack([UPPER[::-12], LOWER[12::12]]), "file").doubts[-1]


# --- a figure that is wrong

STATIONS = np.array([0, 1.25, 2.5, 5, 7.5, 10, 15, 20, 25, 30, 40, 50, 60, 70, 80, 90, 95, 100]) / 100


def listed(code: str, x: Floats, digits: int = 4) -> Floats:
    """A loop as it is printed: rounded."""
    upper, lower = outline(code, x)
    return np.round(np.vstack([upper[::-1], lower[1:]]), digits)


@pytest.mark.parametrize(("place", "wrong"), [(0.3, 0.0987), (0.7, 0.0156), (0.1, 0.0954), (0.05, 0.0301)])
@pytest.mark.parametrize("form", ["one list", "other way round", "two sides"])
def test_a_wrong_figure_is_reported_with_its_line(place: float, wrong: float, form: str) -> None:
    # One digit wrong (0.0787, 0.0554, 0.0401) or two of them exchanged (0.0516).
    loop = listed("2412", STATIONS)
    i = int(np.abs(loop[:18, 0] - place).argmin())
    loop[i, 1] = wrong
    text, line = {
        "one list": ("t\n" + rows(loop), i + 2),
        "other way round": ("t\n" + rows(loop[::-1]), len(loop) - i + 1),
        "two sides": ("t\n18 18\n" + rows(loop[17::-1]) + "\n" + rows(loop[17:]), 20 - i),
    }[form]
    (doubt,) = parse(text, "file").doubts
    said = re.fullmatch(rf"the point in line {line}, at ([\d.]+) chord on the upper side, stands ([\d.]+) of .*", doubt)
    assert said is not None
    assert float(said[1]) == pytest.approx(place, abs=0.004)
    assert 0.005 < float(said[2]) < 0.05


@pytest.mark.parametrize("by", [-0.005, 0.005])
def test_a_wrong_figure_is_found_anywhere_in_a_close_list(by: float) -> None:
    plain = listed("2412", 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, 61))))
    for i in np.flatnonzero((plain[:, 0] > 0.02) & (plain[:, 0] < 0.997)):
        loop = plain.copy()
        loop[i, 1] += by
        (doubt,) = from_points(loop, "file").doubts
        side = "upper" if i < 60 else "lower"
        assert doubt.startswith(f"the point, at {loop[i, 0]:.3f} chord on the {side} side, stands 0.00")


def test_more_points_than_one_are_counted() -> None:
    loop = listed("0012", STATIONS)
    loop[[5, 9, 25], 1] += 0.02
    (doubt,) = from_points(loop, "file").doubts
    assert "of its neighbours, and 2 more stand out so: is a figure wrong?" in doubt


@pytest.mark.parametrize("code", ["0006", "2412", "4424", "23012", "25112"])
@pytest.mark.parametrize("digits", [3, 4, 5])
def test_rounded_figures_however_spaced_are_not_doubted(code: str, digits: int) -> None:
    for count in (10, 20, 40, 101):
        u = np.linspace(0.0, 1.0, count)
        for x in (STATIONS, u, u**2, 0.5 * (1.0 - np.cos(np.pi * u)), 1.0 - np.cos(np.pi * u / 2.0)):
            loop = listed(code, x, digits)
            said = from_points(loop, "file").doubts
            assert not any("neighbours" in doubt for doubt in said)


@pytest.mark.parametrize("degrees", [-20.0, -6.0, 6.0, 20.0])
def test_kinks_and_blunt_ends_are_not_doubted(degrees: float) -> None:
    upper, lower = outline("2412", 0.5 * (1.0 - np.cos(np.linspace(0.0, np.pi, 41))))
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    sides = []
    for side in (upper, lower):
        flap = (side[side[:, 0] > 0.72] - [0.7, 0.02]) @ [[c, s], [-s, c]] + [0.7, 0.02]
        sides.append(np.vstack([side[side[:, 0] < 0.69], flap[flap[:, 0] > 0.71]]))
    assert not any("neighbours" in d for d in from_points(np.vstack([sides[0][::-1], sides[1][1:]]), "flap").doubts)
    a = np.linspace(0.5, 1.5, 9) * np.pi
    nose = 0.04 * np.column_stack([1.0 + np.cos(a), np.sin(a)])
    plate = np.vstack([[[1.0, 0.04], [0.6, 0.04]], nose, [[0.6, -0.04], [1.0, -0.04]]])
    assert not any("neighbours" in d for d in from_points(plate, "plate").doubts)


def test_sections_of_the_examples_are_not_doubted() -> None:
    for path in (Path(__file__).parent.parent / "examples" / "sections").iterdir():
        assert read(path.read_bytes(), path.name).doubts == ()


LINES = rows(LOOP).splitlines(keepends=True)
JUMBLED = np.vstack([LOOP[:20], LOOP[20:60][::-1], LOOP[60:]])


@pytest.mark.parametrize(
    ("text", "why"),
    [
        ("a title and no more\n", "7 lines or more of two numbers"),
        (rows(LOOP[::40]), "7 lines or more of two numbers, x and y, got 6"),
        (rows(np.repeat(LOOP[:1], 20, axis=0)), "starts and ends at the least x"),
        (rows(np.column_stack([P, 0.1 * P])), "points that lie on one line"),
        (rows(LOOP * [1.0, 0.0]), "points that lie on one line"),
        (rows(LOOP).replace(".", ","), "decimal points in line 1, got '1,0"),
        ("".join([*LINES[:50], "nan 0.1\n", *LINES[50:]]), "nan or infinity"),
        ("".join([*LINES[:-1], "1.0 inf\n"]), "nan or infinity"),
        ("".join([*LINES[:50], "0.5 0.O3\n", *LINES[50:]]), "in line 51, got '0.5 0.O3'"),
        ("".join([*LINES[:50], "0.5\n", *LINES[50:]]), "in line 51, got '0.5'"),
        ("".join([*LINES, "1.0 0.0 0.0\n"]), "in line 202"),
        ("99 101\n" + SIDES, "99 and 101 points as its first numbers say, got 202"),
        (rows(JUMBLED), "upper side to run aft all the way"),
        (rows(LOOP * [-1.0, 1.0]), "x to run aft"),
        (rows(np.vstack([LOOP[100:], LOOP[:101]])), "starts and ends at the least x"),
        (
            rows(LOOP - [[0.0, 0.02]] * (LOOP[:, :1] * np.where(np.arange(201) < 101, 1, -1)[:, None])),
            "above the lower",
        ),
    ],
)
def test_what_holds_no_section(text: str, why: str) -> None:
    with pytest.raises(ValueError, match=why) as caught:
        parse(text, "file")
    assert re.fullmatch(r"holds no section: wanted .+, got .+", str(caught.value))


def test_points_that_hold_no_section() -> None:
    for points, why in (
        (LOOP * [-1.0, 1.0], "x running aft from the nose, within 30 degrees, got a chord line at 180"),
        (LOOP @ [[0.8, 0.6], [-0.6, 0.8]] + 1.0, "got a chord line at 37 degrees"),
        (LOOP[:101], "got points that never turn back"),
        (LOOP * 1e300, "a chord between"),
        (np.full((20, 2), np.nan), "nan or infinity"),
        (LOOP[:6], "7 points or more, got 6"),
    ):
        with pytest.raises(ValueError, match=f"^holds no section: wanted .*{why}"):
            from_points(points, "points")


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_a_spoilt_file_gives_a_section_or_one_line(data: st.DataObject) -> None:
    text = rows(LOOP[::4])
    for _ in range(data.draw(st.integers(1, 3))):
        at = data.draw(st.integers(0, len(text)))
        cut = data.draw(st.integers(0, 200))
        text = (
            text[:at]
            + data.draw(st.sampled_from(["", " ", "\n", "x", ",", "-", "9", "1e99", "nan", "\0"]))
            + text[at + cut :]
        )
    try:
        said = None if np.all(np.isfinite(parse(text, "file").coef)) else "not finite"
    except ValueError as error:
        said = str(error)
    assert said is None or re.fullmatch(r"holds no section: wanted .+, got .+", said)


@pytest.mark.parametrize(("data", "got"), [(b"", "empty"), (b" \r\n", "empty"), (bytes(range(256)) * 9, "not text")])
def test_bytes_that_are_no_coordinate_file(data: bytes, got: str) -> None:
    with pytest.raises(ValueError, match=f"holds no section: .*{got}"):
        read(data, "file")


# --- codes


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("naca 2412", "2412"),
        ("NACA2412", "2412"),
        (" Naca-0012 ", "0012"),
        ("naca_23012", "23012"),
        ("naca 64-210", "64-210"),
        ("naca 2412.dat", None),
        ("sections/naca2412", None),
        ("naca 2412/outer", None),
        ("outer.dat", None),
        ("naca root", None),
        ("", None),
    ],
)
def test_code_or_file(text: str, code: str | None) -> None:
    assert naca_code(text) == code


@pytest.mark.parametrize(
    "code", ["", "12", "241", "24x2", "64-210", "241200", "2400", "2012", "26012", "23312", "03012", "23000", "٢٤١٢"]
)
def test_bad_codes(code: str) -> None:
    with pytest.raises(ValueError, match=rf"^wanted a .*, got '{code}'$"):
        naca(code)


@pytest.mark.parametrize(("code", "line", "meant"), [("64012", "240", "64-012"), ("65012", "250", "65-012")])
def test_five_digits_that_look_like_the_6_series_are_doubted(code: str, line: str, meant: str) -> None:
    # Published: Abbott & von Doenhoff; 64-012 is of the 6-series and symmetrical, five digits have a mean line.
    (doubt,) = naca(code).doubts
    for word in (f"mean line {line}", "lift coefficient of 0.9", f"if {meant} is meant", "needs a coordinate file"):
        assert word in doubt
    assert naca("23012").doubts == naca("6412").doubts == ()


@pytest.mark.parametrize("code", ["63-412", "64A210", "66012", "65(2)-415"])
def test_a_code_of_the_6_series_is_refused_with_a_way_out(code: str) -> None:
    with pytest.raises(ValueError, match="a section of the 6-series needs a coordinate file"):
        naca(code)


def test_a_code_too_bent_to_be_a_section() -> None:
    with pytest.raises(ValueError, match="holds no section: wanted the lower side to run aft"):
        naca("9140")
