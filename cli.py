"""The command line: reads arguments, prints, exits; computes nothing."""

from __future__ import annotations

import os
import sys
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, NoReturn, TypeVar

import typer

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator

    from .export.bundle import Bundle, Options
    from .export.cover import Revision
    from .geom.drawing import Hand
    from .geom.seat import Treatment
    from .shop.job import Job
    from .shop.stock import Paper
    from .shop.units import Units

WingPath = Annotated[Path, typer.Argument(metavar="WING.toml", help="The wing file.", show_default=False)]
AsJson = Annotated[bool, typer.Option("--json", help="Print JSON: lengths in mm, angles in degrees, masses in grams.")]
AsCsv = Annotated[bool, typer.Option("--csv", help="Print CSV: lengths in mm, angles in degrees, masses in grams.")]

_Value = TypeVar("_Value")
_PATHS = ("csv", "nc")  # formats of a path, not of a drawing
_MESHES = ("stl", "3mf", "glb")

app = typer.Typer(
    name="wrywing",
    help="Full-size templates and cutting decisions for the flat web in a twisted composite wing.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
)


class UsageError(ValueError):
    """An argument that cannot be used, in one line."""


@app.command()
def new(
    path: Annotated[Path, typer.Argument(metavar="PATH", help="Where to write it.", show_default=False)],
    units: Annotated[str, typer.Option(help='What bare lengths mean: "mm" or "in".')] = "mm",
) -> None:
    """Write a commented wing file to start from."""
    from .shop import starter

    text = starter.text(_units(units))
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        raise UsageError(f"{path}: wanted a new file, got one that exists") from None
    except OSError as fault:
        raise UsageError(f"{path}: wanted a file that can be written, got {_reason(fault)}") from None
    typer.echo(f"wrote {path}; next: wrywing check {path}")


@app.command()
def check(wing: WingPath, as_json: AsJson = False) -> None:
    """Say what a wing file describes and what is doubtful about it."""
    from dataclasses import asdict

    from .export import table, table_strength
    from .shop.describe import facts

    with _waiting("checking"):
        job = _job(wing)
        found = job.facts
        lines, tables = ([], []) if as_json else (facts.lines(job), table_strength.tables(job))
    if as_json:
        typer.echo(table.to_json(asdict(found)))
        return
    for what, figures in lines:
        _say(what, figures)
    for doubt in found.doubts:
        _say("doubt", doubt)
    for shown in tables:
        _show(shown)


@app.command()
def bevels(
    wing: WingPath,
    every: Annotated[str | None, typer.Option(help="Distance between rows; 50 mm or 2 in unless given.")] = None,
    at: Annotated[str | None, typer.Option(help="Places along the web instead: 0,120,240.", show_default=False)] = None,
    as_json: AsJson = False,
    as_csv: AsCsv = False,
) -> None:
    """Print the table along the web: heights, bevels, crown, gap and cut of both edges."""
    from dataclasses import asdict

    from .export import table
    from .shop import masses
    from .shop.bevels import OffWeb

    _one_format(as_json, as_csv)
    job = _job(wing)
    try:
        with _waiting("working out the table"):
            rows = job.rows(_places(job, every, at))
    except OffWeb as fault:
        raise UsageError(f"--at: {fault}") from None
    if as_json:
        typer.echo(table.to_json(table.bevels_record(job, rows)))
    elif as_csv:
        typer.echo(table.to_csv([asdict(row) for row in rows]), nl=False)
    else:
        for shown in table.bevels(job, rows):
            _show(shown)
        if job.record.web.edge == "set bevel":
            _show(table.runs(job))
            typer.echo(f"Rounding to the saw's steps costs {job.wording.mass(masses.rounding(job))} of filler.")


@app.command()
def weigh(
    wing: WingPath,
    thickness: Annotated[
        str | None, typer.Option(help="Sheets to try: 4,6,8. Usual ones from 3 to 20 mm unless given.")
    ] = None,
    edge: Annotated[str | None, typer.Option(help='Edge cuts to try: "square,full bevel". All unless given.')] = None,
    cant: Annotated[
        str | None, typer.Option(help='Cants: "0,5,square at 900,least filler,least gap". The stated one unless given.')
    ] = None,
    as_json: AsJson = False,
    as_csv: AsCsv = False,
) -> None:
    """Say what each sheet thickness, edge cut and cant costs, and which one to take."""
    from .export import table
    from .shop import verdict as choice
    from .shop import weigh as scales

    _one_format(as_json, as_csv)
    job = _job(wing)
    sheets, edges = _sheets(job, thickness), _edges(edge)
    cants = _cants(job, cant)
    total = len(sheets) * len(edges) * len(cants)
    with _waiting("weighing") as say:
        found = list(_one_by_one(scales.candidates(job, sheets, edges, cants), total, "weighing", say))
    verdict, saving = choice.verdict(found, job), choice.saving(job)
    if as_json:
        typer.echo(table.to_json(table.weighed_record(job, found, verdict, saving)))
    elif as_csv:
        typer.echo(table.to_csv(table.candidate_records(found, verdict)), nl=False)
    else:
        _show(table.weighed(job, found, verdict))
        typer.echo(table.WEIGHED_NOTE)
        typer.echo(verdict.sentence)
        typer.echo(choice.saving_sentence(saving, job))
        for what, figures in choice.cautions(job):
            _say(what, figures)


@app.command()
def templates(
    wing: WingPath,
    out: Annotated[Path, typer.Option(help="The folder to write into.", show_default=False)],
    formats: Annotated[
        str, typer.Option(help="Any of dxf,svg,pdf; csv: lists, a wire's path; nc: that path; solids: stl,3mf,glb.")
    ] = "dxf,svg,pdf,csv,nc",
    hand: Annotated[str, typer.Option(help="right, left or both.")] = "right",
    paper: Annotated[
        str | None, typer.Option(help='a4 to a0, letter, legal, tabloid or "roll 610 mm"; else as the wing file says.')
    ] = None,
    dxf_version: Annotated[str, typer.Option(help="R12 for old controllers, R2000 or R2010.")] = "R2010",
    arcs: Annotated[bool, typer.Option("--arcs", help="DXF: arcs where they replace many points.")] = False,
    kerf: Annotated[str, typer.Option(help="DXF: what a laser burns away, 0.2mm; cuts are moved by half.")] = "0",
) -> None:
    """Write every drawing at full size.

    DXF files are in millimetres (1 unit is 1 mm), those of a wing file in inches too.
    """
    from .export import bundle, contours, folder, tiles

    job = _job(wing)
    kinds = _list_of(formats, {kind: kind for kind in (*bundle.FORMATS, *_PATHS, *_MESHES)}, "--formats")
    hands = _hands(hand)
    options = _options(job, paper, dxf_version, arcs, kerf)
    try:
        with _waiting("laying out the drawings") as say:
            made = _bundle(job, hands, kinds, options, say)
    except tiles.PaperError as fault:
        raise (UsageError(f"--paper: {fault}") if paper else job.error("paper.size", str(fault))) from None
    except contours.KerfError as fault:
        raise UsageError(f"--kerf: {fault}") from None
    gone = folder.write(out, made.files, made.records, stamp=job.stamp)
    earlier = f"; {gone} of an earlier run, which this one does not make, are gone" if gone else ""
    typer.echo(f"wrote {len(made.files)} files and manifest.json to {out}{earlier}")


@app.command()
def report(
    wing: WingPath,
    out: Annotated[Path, typer.Option(metavar="FILE.html", help="The page to write.", show_default=False)],
) -> None:
    """Write one page to look at: figures, a 3D view, lists and cautions; it needs no network."""
    from .export import onefile

    onefile.require_page(out)
    job = _job(wing)
    from .export import report as page

    with _waiting("writing the report"):
        content = page.render(job)
    onefile.write(out, content)
    typer.echo(f"wrote {out}; open it in a browser")


@app.command("stock")
def list_stock(
    kind: Annotated[
        str | None, typer.Argument(metavar="[KIND]", help="foam, wood, filler, adhesive, cloth, strip or pin.")
    ] = None,
    units: Annotated[str, typer.Option(help='In what units: "mm" or "in", with pounds and psi.')] = "mm",
    as_json: AsJson = False,
    as_csv: AsCsv = False,
) -> None:
    """List the materials that a wing file may name, with what they weigh and bear."""
    from .export import table, table_stock
    from .shop.stock import KINDS, Stock

    _one_format(as_json, as_csv)
    stock, kinds = Stock(), [*KINDS] if kind is None else [_one_of(kind, {k: k for k in KINDS}, "KIND")]
    if as_json:
        typer.echo(table.to_json(table_stock.records(stock, kinds)))
    elif as_csv:
        typer.echo(table.to_csv(table_stock.rows(table_stock.records(stock, kinds))), nl=False)
    else:
        for shown in table_stock.tables(stock, kinds, _units(units)):
            _show(shown)
        for sentence in (*table_stock.why(stock, kinds), *table_stock.NOTES):
            _say("", sentence)


@app.command()
def compare(
    wing: Annotated[Path, typer.Argument(metavar="A.toml", help="A wing file.", show_default=False)],
    other: Annotated[Path, typer.Argument(metavar="B.toml", help="The one to compare it with.", show_default=False)],
    as_json: AsJson = False,
) -> None:
    """Say what differs between two wing files, in A's units, and what comes of it."""
    from .export import table, table_compare
    from .shop import compare as side_by_side

    with _waiting("comparing"):
        found = side_by_side.compare(_job(wing), _job(other))
    if as_json:
        typer.echo(table.to_json(table_compare.record(found)))
        return
    for shown in table_compare.tables(found):
        _show(shown, 140)
    for sentence in table_compare.sentences(found):
        _say("", sentence)


def _options(job: Job, paper: str | None, version: str, arcs: bool, kerf: str) -> Options:
    from .export.bundle import Options
    from .export.dxf import VERSIONS
    from .export.pdf import Print

    units = job.record.units
    how = Print(_paper(job, paper), units, job.record.paper.printed(units))
    burnt = _length(job, kerf, "--kerf")
    if not 0.0 <= burnt <= 10.0:
        raise UsageError(f"--kerf: wanted a length from 0 to 10 mm, got {kerf!r}")
    return Options(how, _one_of(version, {v: v for v in VERSIONS}, "--dxf-version"), arcs, burnt)


def _bundle(job: Job, hands: list[Hand], kinds: list[str], options: Options, say: Callable[[str], None]) -> Bundle:
    """Every file of the kinds asked for."""
    from .export import bundle
    from .shop.nesting import nestings
    from .shop.sheets.drawings import drawings
    from .shop.sheets.stock import stock_sheets

    laid = job.nestings if len(hands) == 2 else nestings(job, hands)
    drawn = [drawing for side in hands for drawing in drawings(job, side)]
    drawn += stock_sheets(job, laid, hands)
    told = _one_by_one(drawn, len(drawn), "writing drawing", say)
    made = bundle.build(told, [k for k in kinds if k in bundle.FORMATS], options, _revision(job))
    say("writing what is no drawing")
    for side in hands:
        for kind in (k for k in kinds if k in _PATHS):
            for name, content in _paths(job, kind, side):
                made.add(f"{name}-{side}.{kind}", kind, name, side, content)
        for kind, name, content in _meshes(job, [k for k in kinds if k in _MESHES], side):
            made.add(f"{name}-{side}.{kind}", kind, name, side, content)
    for name, content in _lists(job) if "csv" in kinds else ():
        made.add(f"{name}.csv", "csv", name, "both", content)
    return made


def _revision(job: Job) -> Revision:
    from .export.cover import Revision

    return Revision(job.record.name, job.stamp, job.record.date.isoformat() if job.record.date else "")


def _paths(job: Job, kind: str, hand: Hand) -> list[tuple[str, bytes]]:
    """Name and content of each path of the hot wire; none where no machine is stated."""
    from .export import wire

    render = {"csv": wire.to_csv, "nc": wire.to_rs274}[kind]
    return [(wire.name(found), render(job, found, hand)) for found in job.wire_paths]


def _meshes(job: Job, kinds: list[str], hand: Hand) -> list[tuple[str, str, bytes]]:
    """Format, name and content of each file of solids."""
    if not kinds:
        return []
    from .export import mesh
    from .shop.solids import solids

    found, words = solids(job, hand), {"wing": job.record.name, "stamp": job.stamp}
    return [(kind, name, content) for kind in kinds for name, content in mesh.files(found, kind, **words)]


def _lists(job: Job) -> list[tuple[str, bytes]]:
    """Name and content of the cut list and the shopping list, which are for both hands."""
    from .export import table_lists
    from .export.table import to_csv

    tables = {"cut-list": table_lists.records(job.cut_list), "shopping-list": table_lists.records(job.shopping_list)}
    return [(name, to_csv(rows).encode()) for name, rows in tables.items()]


def _job(wing: Path) -> Job:
    from .shop import job

    return job.load(wing)


def _say(what: str, figures: str) -> None:
    """Print figures beside what they are, broken before the hundredth column."""
    import textwrap
    from itertools import zip_longest

    lines = textwrap.wrap(figures, 90, break_long_words=False, break_on_hyphens=False)
    typer.echo("\n".join(f"{head:<10}{line}" for head, line in zip_longest([what], lines, fillvalue="")))


def _show(shown: Any, width: int = 100) -> None:
    from rich.console import Console

    console = Console(width=None if sys.stdout.isatty() else width)
    console.print(shown.rich())


@contextmanager
def _waiting(what: str) -> Iterator[Callable[[str], None]]:
    """Say on a terminal what is being done, once that takes more than a second; gives what changes the words."""
    if not sys.stderr.isatty():
        yield lambda words: None
        return
    from threading import Timer

    from rich.console import Console

    status = Console(stderr=True).status(what)
    timer = Timer(1.0, status.start)
    timer.start()
    try:
        yield status.update
    finally:
        timer.cancel()
        timer.join()
        status.stop()


def _one_by_one(found: Iterable[_Value], total: int, what: str, say: Callable[[str], None]) -> Iterator[_Value]:
    """Give what an iterator gives, and say of each how many there are."""
    for number, item in enumerate(found, start=1):
        say(f"{what} {number} of {total}")
        yield item


def _places(job: Job, every: str | None, at: str | None) -> Any:
    if at is not None:
        return [_length(job, part, "--at") for part in _parts(at, "--at")]
    default = "2 in" if job.record.units == "in" else "50 mm"
    step = _length(job, default if every is None else every, "--every")
    if step < 0.1:
        raise UsageError(f"--every: wanted a length of 0.1 mm or more, got {every!r}")
    return job.places(step)


def _sheets(job: Job, thickness: str | None) -> list[float]:
    from .shop import stock

    if thickness is None:
        return list(stock.usual_sheets(job.record.units))
    sheets = [_length(job, part, "--thickness") for part in _parts(thickness, "--thickness")]
    if min(sheets) <= 0.0:
        raise UsageError(f"--thickness: wanted lengths above 0, got {thickness!r}")
    return sheets


def _edges(edge: str | None) -> list[Treatment]:
    from .shop.weigh import TREATMENTS

    return list(TREATMENTS) if edge is None else _list_of(edge, {t: t for t in TREATMENTS}, "--edge")


def _cants(job: Job, cant: str | None) -> list[float | str]:
    import math

    from .shop import units

    if cant is None:
        return [math.degrees(job.cant)]
    cants: list[float | str] = []
    for part in _parts(cant.lower(), "--cant"):
        if part in ("least filler", "least gap"):
            cants.append(part)
            continue
        if part.startswith("square at "):
            angle = _square_at(job, part.removeprefix("square at "))
        else:
            try:
                angle = units.angle(part)
            except ValueError as fault:
                raise UsageError(f'--cant: wanted "square at Y", "least filler", "least gap" or {fault}') from None
        if abs(angle) > 45.0:
            raise UsageError(f"--cant: wanted angles within 45 degrees, got {part!r}: {angle:.1f} degrees")
        cants.append(angle)
    return cants


def _square_at(job: Job, rib: str) -> float:
    """Degrees of the cant that is square to the chord line of a rib."""
    import math

    y, stations = _length(job, rib, "--cant"), job.record.wing.stations
    if not stations[0].y <= y <= stations[-1].y:
        within = f"{job.wording.length(stations[0].y)} to {job.wording.length(stations[-1].y)}"
        raise UsageError(f"--cant: wanted y within the stations, {within}, got {rib!r}")
    return math.degrees(job.square_at(y))


def _paper(job: Job, name: str | None) -> Paper:
    from .shop import stock

    units = job.record.units
    try:
        return stock.paper(name or job.record.paper.size or ("letter" if units == "in" else "a4"), units)
    except ValueError as fault:
        raise UsageError(f"--paper: wanted {fault}") from None


def _length(job: Job, text: str, option: str) -> float:
    from .shop import units

    try:
        return units.length(text, job.record.units)
    except ValueError as fault:
        raise UsageError(f"{option}: wanted {fault}") from None


def _parts(text: str, option: str) -> list[str]:
    import re

    parts = [part.strip() for part in text.split(",")]
    if not all(parts):
        raise UsageError(f"{option}: wanted a list with commas between, got {text!r}")
    if unclear := re.search(r"(\d+),(\d+\s*[a-zµ°\"″]+)", text, re.IGNORECASE):  # is 4,5mm two figures or 4.5 mm?
        one, two = unclear.groups()
        raise UsageError(f"{option}: wanted {one}.{two} with a point, or {one}, {two} with a blank, got {text!r}")
    return parts


def _one_of(text: str, known: dict[str, _Value], option: str) -> _Value:
    """What a word stands for, whatever its case."""
    plain = {word.lower(): value for word, value in known.items()}
    if text.lower() not in plain:
        raise UsageError(f"{option}: wanted one of {', '.join(known)}, got {text!r}")
    return plain[text.lower()]


def _list_of(text: str, known: dict[str, _Value], option: str) -> list[_Value]:
    parts = dict.fromkeys(part.lower() for part in _parts(text, option))
    return [_one_of(part, known, option) for part in parts]


def _hands(text: str) -> list[Hand]:
    known: dict[str, list[Hand]] = {"right": ["right"], "left": ["left"], "both": ["right", "left"]}
    return [*dict.fromkeys(hand for hands in _list_of(text, known, "--hand") for hand in hands)]


def _units(text: str) -> Units:
    known: dict[str, Units] = {"mm": "mm", "in": "in"}
    return _one_of(text, known, "--units")


def _one_format(as_json: bool, as_csv: bool) -> None:
    if as_json and as_csv:
        raise UsageError("--csv: wanted none beside --json")


def _reason(fault: OSError) -> str:
    return (fault.strerror or str(fault)).lower()


def main() -> NoReturn:
    """Run the command line; every error is one line on stderr and exit status 2."""
    try:
        status = app(standalone_mode=False)
    except KeyboardInterrupt:
        _fail("stopped", 130)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        raise SystemExit(1) from None
    except Exception as fault:
        if hasattr(fault, "exit_code") and hasattr(fault, "format_message"):
            _fail(f"wrywing: {fault.format_message()}", 2)
        if _is_the_users(fault):
            _fail(str(fault), 2)
        _fail(f"wrywing: a fault of the program itself, please report it: {type(fault).__name__}: {fault}", 1)
    raise SystemExit(status if isinstance(status, int) else 0)


def _is_the_users(fault: Exception) -> bool:
    """Whether an error is one that a user can cause, with a line of its own."""
    from .export.folder import FolderError
    from .shop.wingfile import WingError

    return isinstance(fault, UsageError | WingError | FolderError)


def _fail(text: str, status: int) -> NoReturn:
    print(" ".join(text.split()), file=sys.stderr)
    raise SystemExit(status)
