"""Renews what the README takes from the program: its pictures in examples/pictures, and the table of keys."""

from __future__ import annotations

import io
import re
from pathlib import Path

import pypdfium2
from matplotlib.figure import Figure

import wrywing
from wrywing.export import figures, figures_edge, pdf, plot, view3d
from wrywing.export.pdf import Print
from wrywing.shop import keys, stock
from wrywing.shop.job import Job

ROOT = Path(__file__).parent.parent
PICTURES = ROOT / "examples" / "pictures"
START, END = "<!-- keys: renewed by make pictures -->", "<!-- end of keys -->"


def main() -> None:
    """Write every picture, then the table."""
    PICTURES.mkdir(exist_ok=True)
    swept, faired = (wrywing.load(ROOT / "examples" / f"{name}.toml") for name in ("saltpan", "highmoor"))
    with plot.style():
        _save("panel", view3d.still(faired))
        _save("bevel", figures_edge.bevels(swept))
        _save("section", figures_edge.section(faired, figures_edge.places(faired)[0]))
        _save("trade", figures.trade(swept, swept.usual_candidates, swept.verdict))
    (PICTURES / "page.png").write_bytes(_page(swept))
    readme = ROOT / "README.md"
    text = readme.read_text(encoding="utf-8")
    table = f"{START}\n\n{keys.markdown()}\n\n{END}"
    readme.write_text(re.sub(f"{START}.*?{END}", lambda _: table, text, flags=re.DOTALL), encoding="utf-8")


def _save(name: str, made: Figure) -> None:
    made.set_facecolor("white")
    (PICTURES / f"{name}.svg").write_text(plot.to_svg(made, name) + "\n", encoding="utf-8")


def _page(job: Job) -> bytes:
    """The first page of the web blank's first template, at half the size of the paper."""
    drawing = job.drawings()[0]
    content = pdf.render(drawing, Print(stock.paper("a4", "mm")))
    picture = pypdfium2.PdfDocument(content)[0].render(scale=1.1).to_pil()
    out = io.BytesIO()
    picture.convert("P", palette=1, colors=32).save(out, "PNG", optimize=True)
    return out.getvalue()


if __name__ == "__main__":
    main()
