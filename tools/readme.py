"""Renews what the README and DEVELOPERS.md take from the program: pictures, the table of keys, the house."""

from __future__ import annotations

import ast
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
HOUSE, END_OF_HOUSE = "<!-- house: renewed by make pictures -->", "<!-- end of house -->"
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
    _between(ROOT / "README.md", START, keys.markdown(), END)
    _between(ROOT / "DEVELOPERS.md", HOUSE, house(), END_OF_HOUSE)


def house() -> str:
    """Every module of the three rooms with the first line of its docstring."""
    lines = []
    for room in ("shop", "geom", "export"):
        lines += [f"**`{room}/`**", ""]
        paths = sorted((ROOT / room).rglob("*.py"), key=lambda path: (len(path.relative_to(ROOT).parts) > 2, path))
        for path in paths:
            said = (ast.get_docstring(ast.parse(path.read_text(encoding="utf-8"))) or "").splitlines()[0]
            inside = path.relative_to(ROOT / room)
            if inside.name == "__init__.py":
                lines += [said] if path.parent.name == room else ["", f"`{room}/{inside.parent}/`: {said}"]
            else:
                lines.append(f"- `{inside.as_posix()}`: {said}")
        lines.append("")
    return "\n".join(lines).rstrip()


def _between(path: Path, start: str, content: str, end: str) -> None:
    text = path.read_text(encoding="utf-8")
    whole = f"{start}\n\n{content}\n\n{end}"
    path.write_text(re.sub(f"{start}.*?{end}", lambda _: whole, text, flags=re.DOTALL), encoding="utf-8")


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
