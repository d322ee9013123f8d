"""What a browser shows measures what it should, at the 96 px to an inch of CSS."""

import numpy as np
import pytest

pytest.importorskip("resource")  # POSIX
import browser
from samples import LETTER

from wrywing.export import pdf, svg
from wrywing.export.pdf import Print
from wrywing.geom.drawing import Drawing, Role, Stroke

pytestmark = pytest.mark.skipif(browser.CHROMIUM is None, reason=browser.WHY)
SQUARE = np.array([[0.0, 0.0], [100.0, 0.0], [100.0, 100.0], [0.0, 100.0]])
DRAWING = Drawing("square", "Square", "3fa9c1d2", strokes=(Stroke(SQUARE, Role.CUT_OUTSIDE, True),))


@pytest.fixture(scope="module")
def chromium(tmp_path_factory):
    with browser.Browser(tmp_path_factory.mktemp("profile"), (1300, 1400)) as shown:
        yield shown


def lines(grey, axis):
    """Middles, in mm, of the black lines that run 60 mm or more across the page, from left to right or downwards."""
    light = grey > 250.0
    rows, columns = (np.flatnonzero(light.mean(axis=1 - i) > 0.2) for i in (0, 1))
    page = grey[rows[0] : rows[-1] + 1, columns[0] : columns[-1] + 1]
    px = browser.MM / browser.FINE
    black = np.flatnonzero((page < 90.0).sum(axis=axis) * px > 60.0)
    dark = (255.0 - page).sum(axis=axis)
    found = []
    for line in np.split(black, np.flatnonzero(np.diff(black) > 1) + 1):
        at = np.arange(line[0] - 2, line[-1] + 3)
        found.append(float((at * dark[at]).sum() / dark[at].sum()) * px)
    return found


@pytest.mark.parametrize("axis", [0, 1])
def test_a_hundred_millimetres_of_svg(chromium, tmp_path, axis):
    (tmp_path / "square.svg").write_bytes(svg.render(DRAWING))
    first, last = lines(chromium.show((tmp_path / "square.svg").as_uri()), axis)
    assert last - first == pytest.approx(100.0, abs=0.1)


@pytest.mark.parametrize("axis", [0, 1])
def test_a_hundred_millimetres_of_pdf(chromium, tmp_path, axis):
    # 8.5 x 11 in are whole px; the viewer cuts other pages down to that, A4 by 0.09 %
    (tmp_path / "square.pdf").write_bytes(pdf.render(DRAWING, Print(LETTER)))
    found = lines(chromium.show((tmp_path / "square.pdf").as_uri() + "#toolbar=0&navpanes=0&zoom=100"), axis)
    first, last = found[-2:] if axis == 0 else found[:2]  # left of the square, and below it, stands a check bar
    assert last - first == pytest.approx(100.0, abs=0.1)
    assert len(found) == 3
