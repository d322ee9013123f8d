"""What the commands print, as properties of a job: each computed once, when first asked for.

The modules that reckon them know the job, so they are imported only when one of them is asked for.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import cached_property
from typing import TYPE_CHECKING, cast

from ..geom.drawing import Drawing, Hand
from ..geom.seat import Treatment

if TYPE_CHECKING:
    from .cutlist import Cut
    from .describe.facts import Facts
    from .job import Job
    from .masses import Masses
    from .nesting import Nesting
    from .shopping import Buy
    from .solids import Solid
    from .verdict import Saving, Verdict
    from .weigh import Candidate


class Results:
    """The part of a job that commands print."""

    @property
    def _job(self) -> Job:
        return cast("Job", self)

    @cached_property
    def facts(self) -> Facts:
        """What `check` says, in figures: mm, degrees, grams."""
        from .describe import facts

        return facts.facts(self._job)

    @property
    def doubts(self) -> tuple[str, ...]:
        """What `check` says a builder should look at twice."""
        return self.facts.doubts

    @cached_property
    def masses(self) -> Masses:
        """What the web as stated weighs, grams."""
        from . import masses

        return masses.masses(self._job, self._job.web)

    def candidates(
        self,
        thicknesses: Sequence[float] | None = None,
        edges: Sequence[Treatment] | None = None,
        cants: Sequence[float | str] | None = None,
    ) -> list[Candidate]:
        """What `weigh` prints: every combination of sheet (mm), edge cut and cant (degrees or ``least filler``).

        Unless given: the usual sheets, all edge cuts, and the stated cant.
        """
        from . import stock, weigh

        job = self._job
        sheets = stock.usual_sheets(job.record.units) if thicknesses is None else thicknesses
        tried = [math.degrees(job.cant)] if cants is None else cants
        return list(weigh.candidates(job, sheets, weigh.TREATMENTS if edges is None else edges, tried))

    @cached_property
    def usual_candidates(self) -> list[Candidate]:
        """The candidates that `weigh` looks at unless told otherwise."""
        return self.candidates()

    @cached_property
    def verdict(self) -> Verdict:
        """Which of the usual candidates to take, and why."""
        from . import verdict

        return verdict.verdict(self.usual_candidates, self._job)

    @cached_property
    def saving(self) -> Saving | None:
        """What the cant of least filler would save."""
        from . import verdict

        return verdict.saving(self._job)

    @cached_property
    def nestings(self) -> list[Nesting]:
        """How the pieces for both hands lie on sheets of stock."""
        from . import nesting

        return nesting.nestings(self._job)

    @cached_property
    def cut_list(self) -> list[Cut]:
        """Every piece with its size, how many of it there are, and what it weighs."""
        from . import cutlist

        return cutlist.cut_list(self._job, self.nestings)

    @cached_property
    def shopping_list(self) -> list[Buy]:
        """What has to be bought for the panels of both hands."""
        from . import shopping

        return shopping.shopping_list(self._job, self.nestings, self.cut_list)

    def drawings(self, hand: Hand = "right") -> list[Drawing]:
        """Every drawing that `templates` writes, for one hand."""
        from .sheets.drawings import drawings

        return drawings(self._job, hand)

    @cached_property
    def solids(self) -> list[Solid]:
        """The closed meshes of the right-hand panel: web blank, filler, strips, cores."""
        from . import solids

        return solids.built(self._job)
