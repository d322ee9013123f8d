"""One wing file's results, each computed once, when first asked for."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..geom import blank, cant, runs, seat, web
from ..geom.joint import Pad, Tube
from ..geom.loft import Loft
from ..geom.rib import Cradle, Rib
from ..geom.seat import Aim, Cut, Run, Survey, Treatment
from ..geom.web import SIDES, NothingInside, OffSection, Plane, Side
from . import bevels, blame, flanges, joint, loads, panel, ribs, strength, strips, wingfile
from .bevels import Row
from .built import BuiltWeb
from .cores import BuiltCore, WirePath, wire_paths
from .cores import built as built_cores
from .flanges import BuiltFlange
from .joint import JointEnd
from .results import Results
from .values import KeyedError
from .wingfile import Loaded, WingError
from .wording import Wording

Array = NDArray[np.float64]

FINE, COARSE = 20.0, 40.0  # mm, longest cells of a survey; a search makes coarse ones
SWEEP = np.radians(1.0)
CLOSE = np.radians(0.01)
TOLD_APART: dict[Aim, float] = {"filler": 100.0, "gap": 0.02}  # mm^3, mm: what a workshop cannot tell from the least
REGISTER = 5.0  # mm between the middle of a register hole and the joint's tube
FINEST = 0.01  # degrees
FINE_SAW = 20  # a saw this many times finer than the real one stands for one without steps


class Job(Results):
    """What a wing file leads to.

    Parameters
    ----------
    loaded
        The checked wing file with its sections and stock.
    """

    def __init__(self, loaded: Loaded) -> None:
        self.record, self.stock, self.stamp, self.path = (
            loaded.record,
            loaded.stock,
            loaded.stamp,
            loaded.path,
        )
        self._sections = loaded.sections
        self._flanges: dict[tuple[float, float], tuple[BuiltFlange, ...]] = {}

    @cached_property
    def wording(self) -> Wording:
        """How figures are written for this file's reader."""
        return Wording(self.record.units)

    def error(self, key: str, text: str) -> WingError:
        """The one-line error for a key of this wing file."""
        return WingError(self.path, key, text)

    @cached_property
    def loft(self) -> Loft:
        """The panel's surfaces."""
        return panel.loft(self.record, self._sections)

    @cached_property
    def cant(self) -> float:
        """The web's cant, radians: stated, square to a rib's chord line, or the best for the stated edge."""
        stated = self.record.web.cant
        if stated.kind == "angle":
            return float(np.radians(stated.value or 0.0))
        if stated.kind == "square":
            return self.square_at(stated.value or 0.0)
        try:
            return self.best_cant("gap" if stated.kind == "least gap" else "filler")[0]
        except KeyedError as fault:
            raise self._keyed(fault) from None

    def square_at(self, y: float) -> float:
        """Cant, radians, at which the web stands square to the chord line of rib y."""
        return web.cant_square_at(self.loft, ends=self.record.web.ends, line=self.record.web.line, y=y)

    def best_cant(
        self,
        aim: Aim,
        thickness: float | None = None,
        treatment: Treatment | None = None,
        surveys: Callable[[float], Survey] | None = None,
    ) -> tuple[float, float]:
        """Cant within the stated limit that makes the filler (mm^3) or the largest gap (mm) least, and that figure.

        Of cants that a workshop could not tell from the best one, the most upright. Filler is that at the cut edges
        and the stack of the strips, of which all that is not strip and glue is filled: what a tilted edge adds to it.

        Parameters
        ----------
        surveys
            Where surveys of this sheet by cant come from, if not from `trial_survey`.

        Raises
        ------
        KeyedError
            If the web fits inside the wing at no cant that may be tried.
        """
        limit = float(np.radians(self.record.web.cant_limit))

        def figure(angle: float) -> float:
            try:
                survey = surveys(angle) if surveys else self.trial_survey(angle, thickness)
                built = self.fit(angle, survey, treatment)
            except (OffSection, NothingInside):
                return float("inf")
            return built.filler + self._trial_stack(survey) if aim == "filler" else built.gap

        angle, least = cant.least(figure, -limit, limit, step=float(SWEEP), close=float(CLOSE), near=TOLD_APART[aim])
        if not np.isfinite(least):
            limits = f"{-np.degrees(limit):g} to {np.degrees(limit):g} degrees"
            raise KeyedError(
                ("web", "cant_limit"),
                f"wanted a cant at which the web fits inside the wing, got none from {limits}",
            )
        return angle, least

    def trial_survey(self, angle: float, thickness: float | None = None) -> Survey:
        """The coarser survey that a search for the best cant makes do with."""
        return self.survey(angle, thickness, coarse=True, depth=self._trial_depth)

    def plane_at(self, angle: float) -> Plane:
        """The web plane at a cant in radians."""
        if angle not in self._planes:
            stated = self.record.web
            self._planes[angle] = web.plane(self.loft, ends=stated.ends, line=stated.line, cant=angle)
        return self._planes[angle]

    @cached_property
    def _planes(self) -> dict[float, Plane]:
        return {}

    @cached_property
    def joint(self) -> JointEnd | None:
        """The web's thickened end, if one is stated."""
        try:
            return joint.joint_end(self)
        except KeyedError as fault:
            raise self._keyed(fault) from None

    def _keyed(self, fault: KeyedError) -> WingError:
        return self.error(".".join(map(str, fault.where)), fault.text)

    def over(self, sheet: float | None = None) -> tuple[seat.Along, seat.Along]:
        """Thickness of the web along s, and where its middle stands across it, over a sheet (mm; the stated one)."""
        sheet = self.record.web.thickness if sheet is None else sheet
        if self.joint is None:
            return seat.constant(sheet), seat.CENTRED
        return self.joint.thickening.over(sheet)

    @cached_property
    def thickness(self) -> seat.Along:
        """Thickness of the web along s."""
        return self.over()[0]

    def face(self, name: blank.FaceName, sheet: float | None = None) -> seat.Along:
        """Where a face stands across the web along s."""
        thickness, middle = self.over(sheet)
        half = thickness.value / 2.0
        return seat.Along(thickness.s, middle.value + (half if name == "rear" else -half))

    @cached_property
    def load(self) -> loads.Load | None:
        """What the web has to carry, at limit load."""
        stated = self.record.load
        return None if stated is None else loads.stated(stated, self.record.wing.stations[-1].y)

    @cached_property
    def caps(self) -> strips.Schedule | None:
        """The cap strips as the load asks for them, and what they carry; None without a load.

        Raises
        ------
        WingError
            If they cannot carry it or do not fit.
        """
        return None if self.record.load is None else strips.schedule(self, self.plane_at(self.cant))

    @cached_property
    def layers(self) -> tuple[strips.Layer, ...]:
        """Every layer of cap strips at both edges, the longest of each first."""
        return strips.layers(self)

    @cached_property
    def strength(self) -> strength.Strength | None:
        """How much the caps and the web's core have in reserve; None without a load."""
        return None if self.caps is None else strength.assess(self, self.caps)

    @cached_property
    def depth(self) -> dict[Side, seat.Along]:
        """What lies between skin and web at each edge: bond line, cover and cap strips."""
        return self._depth(self.caps if self.record.caps else None)

    def _depth(self, caps: strips.Schedule | None) -> dict[Side, seat.Along]:
        under = strips.under(self)
        if caps is None:
            return dict.fromkeys(SIDES, seat.constant(under))
        return {side: seat.Along(stack.s, under + stack.value) for side in SIDES for stack in [caps.height(side)]}

    @cached_property
    def _trial_caps(self) -> strips.Schedule | None:
        """The strips while a cant is searched: as an upright web asks for them, none where those do not fit."""
        if self.record.caps is None or self.record.web.cant.kind in ("angle", "square"):
            return self.caps if self.record.caps else None
        try:
            return strips.schedule(self, self.plane_at(0.0))
        except (OffSection, WingError):
            return None

    @cached_property
    def _trial_depth(self) -> dict[Side, seat.Along]:
        return self._depth(self._trial_caps)

    def _trial_stack(self, survey: Survey) -> float:
        """Volume of the stacks of strips between the skin and the seats of a trial survey, mm^3."""
        caps = self._trial_caps
        if caps is None:
            return 0.0
        share = {side: caps.height(side)(survey.s) / self._trial_depth[side](survey.s) for side in SIDES}
        return sum(survey.bedding(side, share[side]) for side in SIDES)

    def survey(
        self,
        angle: float,
        thickness: float | None = None,
        *,
        coarse: bool = False,
        depth: Mapping[Side, seat.Along] | None = None,
    ) -> Survey:
        """Skin and seat over a web of a given cant (radians) and, unless the stated one, thickness (mm)."""
        sheet, middle = self.over(thickness)
        return seat.survey(
            self.loft,
            self.plane_at(angle),
            thickness=sheet,
            middle=middle,
            depth=depth or self.depth,
            longest=COARSE if coarse else FINE,
            every_node=not coarse,
        )

    def fit(self, angle: float, survey: Survey, treatment: Treatment | None = None) -> BuiltWeb:
        """Cut both edges of a surveyed web, as the wing file states unless told otherwise."""
        treatment = treatment or self.record.web.edge
        top, bottom = (self._cut(survey, side, treatment) for side in SIDES)
        return BuiltWeb(self.plane_at(angle), survey, top, bottom)

    def _cut(self, survey: Survey, side: Side, treatment: Treatment) -> Cut:
        if treatment != "set bevel":
            return seat.cut(survey, side, treatment)
        return seat.cut(survey, side, treatment, self._runs(survey, side, self.record.web.angle_step))

    def _runs(self, survey: Survey, side: Side, step: float) -> tuple[Run, ...]:
        angles = runs.saw_angles(survey, side, float(np.radians(step)))
        stated = self.record.web
        try:
            return runs.best_runs(survey, side, runs=stated.runs, angles=angles, aim=stated.aim)
        except ValueError as fault:
            raise KeyedError(("web", "runs"), f"wanted {fault}") from None

    @cached_property
    def web(self) -> BuiltWeb:
        """The web as stated.

        Raises
        ------
        WingError
            If it does not fit inside the wing; the key at fault is named.
        """
        try:
            built = self.fit(self.cant, self.survey(self.cant))
            self.laid_tube(built)
            return built
        except KeyedError as fault:
            raise self._keyed(fault) from None
        except OffSection as fault:
            raise blame.outside(self, fault) from None
        except NothingInside as fault:
            raise blame.nothing_inside(self, fault) from None

    def laid_tube(self, built: BuiltWeb) -> Tube | None:
        """Where the joint's pin lies in a web, tube and overwrap round it; None without a joint.

        Raises
        ------
        KeyedError
            If it does not fit between the seats.
        """
        return None if self.joint is None else joint.tube(self, self.joint, built.plane, built.survey)

    @cached_property
    def tube(self) -> Tube | None:
        """Where the joint's pin lies in the stated web."""
        return self.laid_tube(self.web)

    @cached_property
    def pads(self) -> tuple[Pad, ...]:
        """What is laid on the sheet's faces at the joint."""
        return () if self.joint is None else joint.pads(self, self.joint, self.web)

    @cached_property
    def flanges(self) -> tuple[BuiltFlange, ...]:
        """The flanges along the web as stated."""
        try:
            return self.laid_flanges(self.web)
        except KeyedError as fault:
            raise self._keyed(fault) from None

    def laid_flanges(self, built: BuiltWeb) -> tuple[BuiltFlange, ...]:
        """The stated flanges along any web; how its edges are cut makes no difference to them.

        Raises
        ------
        KeyedError
            If one has no room, or would be sprung too far.
        """
        key = built.plane.cant, built.plain
        if key not in self._flanges:
            self._flanges[key] = flanges.built(self, built)
        return self._flanges[key]

    @cached_property
    def register(self) -> Array:
        """(k, 2) places (s, h) of the holes that register one face with the other, clear of the joint's tube."""
        if self.tube is None:
            return blank.register_places(*self.web.faces)
        along = self.tube.outline()[:, 0]
        keep_off = float(along.min()) - REGISTER, float(along.max()) + REGISTER
        return blank.register_places(*self.web.faces, keep_off=keep_off)

    @cached_property
    def cores(self) -> tuple[BuiltCore, ...]:
        """The foam cores, each divided into bays and laid out for the wire."""
        return built_cores(self)

    @cached_property
    def wire_paths(self) -> tuple[WirePath, ...]:
        """The path of the wire for each bay, where a machine is stated."""
        return wire_paths(self)

    @cached_property
    def ribs(self) -> tuple[Rib, ...]:
        """The stated ribs."""
        return ribs.built(self)

    @cached_property
    def cradles(self) -> tuple[Cradle, ...]:
        """The stated cradles."""
        return ribs.cradles(self)

    @cached_property
    def rounding(self) -> float:
        """Filler in mm^3 that a set bevel costs more than it would with a saw that has no steps; 0 for other edges."""
        if self.record.web.edge != "set bevel":
            return 0.0
        step = max(self.record.web.angle_step / FINE_SAW, FINEST)
        survey = self.web.survey
        ideal = [seat.cut(survey, side, "set bevel", self._runs(survey, side, step)) for side in SIDES]
        return self.web.filler - sum(c.filler for c in ideal)

    def places(self, every: float) -> Array:
        """Places s from end to end of the web line, `every` mm apart and both ends."""
        length = self.web.plane.length
        return np.append(np.arange(0.0, length - 1e-6, every), length)

    def rows(self, places: ArrayLike) -> list[Row]:
        """The bevel table at places s (k,) in mm; see `bevels.rows`."""
        return bevels.rows(self, places)


def load(path: str | Path, changes: Mapping[str, object] | None = None) -> Job:
    """The job of a wing file, or of what it would be with some values changed: see `changes.changed`.

    Raises
    ------
    WingError
        If the file cannot be used; one line that names the file and the key.
    """
    return Job(wingfile.load(Path(path), changes))
