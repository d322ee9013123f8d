"""Quantities as builders write them."""

import subprocess
import sys

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wrywing.shop import units

READERS = [
    units.length,
    units.angle,
    units.mass,
    units.density,
    units.areal,
    units.force,
    units.stress,
    units.fraction,
]


# Published: international yard and pound (1959): 1 in = 25.4 mm, 1 lb = 453.59237 g; standard gravity 9.80665 m/s^2.
@pytest.mark.parametrize(
    ("reader", "text", "expected"),
    [
        (units.length, "1/4 in", 6.35),
        (units.length, "1 1/2 in", 38.1),
        (units.length, "1-1/2 in", 38.1),
        (units.length, "-1 1/2 in", -38.1),
        (units.length, "−2 mm", -2.0),
        (units.length, '3/8"', 9.525),
        (units.length, '1 1/2 "', 38.1),
        (units.length, "24 thou", 0.6096),
        (units.length, "0.8 mm", 0.8),
        (units.length, "0.8mm", 0.8),
        (units.length, "1.5e-1 m", 150.0),
        (units.length, "2 ft", 609.6),
        (units.length, "12", 12.0),
        (units.length, 12, 12.0),
        (units.angle, "3 deg", 3.0),
        (units.angle, "3°", 3.0),
        (units.angle, "30 arcmin", 0.5),
        (units.mass, "1 1/2 oz", 1.5 * 453.59237 / 16),
        (units.mass, "0.25 kg", 250.0),
        (units.density, 80, 80.0),
        (units.density, "1.15 g/cm^3", 1150.0),
        (units.density, "6 lb/ft^3", 6 * 0.45359237 / 0.3048**3),
        (units.areal, "5.5 oz/yd^2", 5.5 * 453.59237 / 16 / 0.9144**2),
        (units.areal, "200 g/m²", 200.0),
        (units.force, "9000 lbf", 9000 * 0.45359237 * 9.80665),
        (units.stress, "1 psi", 0.45359237 * 9.80665 / 25.4**2),
        (units.stress, "2 N/mm^2", 2.0),
        (units.fraction, "30 %", 0.3),
    ],
)
def test_reads(reader, text, expected):
    assert reader(text) == pytest.approx(expected, rel=1e-13)


def test_bare_lengths_are_in_the_files_units():
    assert [units.length(v, "in") for v in (2, "2", "1/2", "2 mm")] == [50.8, 50.8, 12.7, 2.0]


ODD_STRINGS = """
    mm|in|__import__|__import__('os')|1e999 mm|1e308 km|1/0 in|1/0|nan mm|inf|3 furlong^-1|3 degC|3 dB|3 mm^2
    |2 mm**9**9**9**9|5 mm + 3 mm|1,5 mm|7 mm; 3|3 mm[0]|lambda: 3|(((((|5 in/|5 in/4|1 1/2 1/2 in|5" in|3 x|3 mm.real
    |3 mm mm|
"""
ODD_VALUES = [float("nan"), float("inf"), 10**400, 10**5000, True, False, None, [3], [10**5000], {"mm": 3}, b"3 mm"]


@pytest.mark.parametrize("reader", READERS)
def test_refuses_in_one_line(reader):
    for value in [*ODD_STRINGS.split("|"), *ODD_VALUES]:
        with pytest.raises(ValueError, match=r"\Aan? [a-z ]+ such as .+, got .+\Z") as caught:
            reader(value)
        assert type(caught.value) is ValueError


def test_says_what_was_wanted():
    with pytest.raises(ValueError, match="such as") as caught:
        units.length("3 kg")
    assert str(caught.value) == """a length such as 6, "0.8 mm" or "1/4 in", got '3 kg'"""


NUMBERS = st.sampled_from(["3", "1/4", "1 1/2", "-2.5", "1e400", "1e-400", "0", "1/0", ".5", "5.", ""])
WORDS = ["mm", "in", "deg", "degC", "dB", "kg", "m", "lb", "ft", "**", "^", "/", "*", " ", "(", ")", "-", "9", "2", '"']


@given(
    st.sampled_from(READERS),
    st.one_of(
        st.text(max_size=12),
        st.builds(lambda n, words: n + " " + "".join(words), NUMBERS, st.lists(st.sampled_from(WORDS), max_size=6)),
        st.none() | st.booleans() | st.integers() | st.floats(),
    ),
)
@settings(max_examples=400, deadline=None)
def test_whatever_is_written_gives_a_finite_number_or_the_one_error(reader, value):
    try:
        got = str(reader(value))
    except ValueError as error:
        got = str(error)
    assert " such as " in got or abs(float(got)) < float("inf")
    assert got.isprintable()


@given(st.integers(0, 99), st.integers(1, 63), st.sampled_from([2, 4, 8, 16, 32, 64]))
def test_mixed_fractions_add_up(whole, top, bottom):
    assert units.length(f"{whole} {top}/{bottom} in") == pytest.approx(25.4 * (whole + top / bottom), rel=1e-12)


def test_pint_waits_until_a_unit_needs_it():
    code = """if True:
        import sys
        from wrywing.shop import stock, units
        stock.Stock(), units.length('1 1/2"'), units.length("0.8 mm"), units.angle("3"), units.fraction("30 %")
        assert not {"pint", "scipy", "pydantic"} & set(sys.modules)
        assert units.length("10 thou") == 0.254 and "pint" in sys.modules"""
    subprocess.run([sys.executable, "-c", code], check=True)
