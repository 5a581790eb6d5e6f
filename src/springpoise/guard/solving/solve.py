"""What a file leaves open, found with the solvers of ``springpoise.balance``."""

from __future__ import annotations

import math
import os
from pathlib import Path
from typing import Any, NamedTuple

import attrs
import numpy as np

from springpoise.balance import (
    MethodComparison,
    Residual,
    StockCandidate,
    StockSearch,
    fit_springs,
    read_stock,
    residual,
    search_stock,
    sine_match,
)
from springpoise.errors import InputError, NoSolution, PoiseFileError, SpringpoiseError
from springpoise.guard.amounts import OfPeak
from springpoise.guard.builds.fields import kept_fields
from springpoise.guard.builds.scattered import Builds
from springpoise.guard.builds.study import ToleranceStudy, study_of
from springpoise.guard.check import CheckReport, builds_of, document_at, judge, keeps_all
from springpoise.guard.document import PoiseFile
from springpoise.guard.files import read_bytes
from springpoise.guard.solving.drilling import drilled
from springpoise.guard.solving.methods import compared
from springpoise.guard.solving.openings import OpenSpring
from springpoise.guard.solving.requests import FitRequest, SineRequest, StockRequest
from springpoise.mechanism import Mechanism

__all__ = ["Design", "design"]

LARGEST_STOCK = 20_000_000
"""A stock list has at most so many bytes."""

LISTED = 12
"""How many parts of a stock list are refined, ranked and held against the limits."""


@attrs.frozen(kw_only=True)
class Design:
    """What was found for a document that left something open."""

    document: PoiseFile
    """The document as it was given."""
    solved: PoiseFile | None
    """The complete document; None where nothing fits."""
    before: Residual
    """What was to be balanced: the mechanism as far as it was given, with the payload of the design."""
    after: Residual | None
    """What is left of it; None where nothing fits."""
    report: CheckReport | None
    """The verdicts on the limits; None where nothing fits."""
    search: StockSearch | None = None
    """The stock search, where it was one."""
    chosen: StockCandidate | None = None
    """The candidate of the search that was taken: with its mounts rounded the first that keeps all limits, else that fits."""
    methods: MethodComparison | None = None
    """Ways of balancing side by side, where the design asks for them."""
    study: ToleranceStudy | None = None
    """What the stated tolerances do to the solved mechanism; None where none are stated, or nothing fits."""
    status: str
    """One sentence on what was found."""

    @property
    def success(self) -> bool:
        """Whether something was found that keeps all limits there are."""
        return self.solved is not None and self.report is not None and not self.report.failures

    def require(self) -> Design:
        """The result itself, or an error where nothing fits or a limit fails.

        Raises
        ------
        NoSolution
            Nothing fits, or a limit fails; the message says which and by how much.
        """
        if not self.success:
            failures = () if self.report is None else self.report.failures
            raise NoSolution("; ".join([self.status, *(verdict.sentence for verdict in failures)]))
        return self

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
        from springpoise.guard.solving.report import design_dict

        return design_dict(self)

    def __str__(self) -> str:
        from springpoise.guard.solving.report import design_text

        return design_text(self)


def design(document: PoiseFile | str | os.PathLike[str], *, progress: Any = False) -> Design:
    """Find what a mechanism file leaves open.

    Parameters
    ----------
    document
        A document with a design request, or the path of a file with a ``[design]`` table.
    progress
        As for :func:`springpoise.balance.search_stock`; by default silent.

    Returns
    -------
    Design
        The solved document, what it leaves over, and the verdicts on its limits. Prints as a
        report to build from. A design for which nothing fits is a result too.

    Raises
    ------
    PoiseFileError
        The file or its stock list cannot be read, or asks for nothing.
    InputError
        A request that cannot be met by any spring: an arm that needs none, a mount that is not
        as the method needs it.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, guard
    >>> arm = Mechanism(Arm(Body("2 kg", (0.35, 0))), travel=("-60 deg", "60 deg"))
    >>> request = guard.SineRequest(attach_radius="80 mm", anchor_height="100 mm")
    >>> found = guard.design(guard.PoiseFile(mechanism=arm, design=request))
    >>> round(found.solved.mechanism.springs[0].spring.rate, 6)
    858.081875
    """
    given = document_at(document)
    request = given.design
    if request is None:
        kind = InputError if given.path is None else PoiseFileError
        raise kind(f"{given.called}: must have a table design that says what is to be found, got none")
    loaded = given.with_payload(request.payload)
    try:
        with np.errstate(all="ignore"):
            before = residual(loaded, loaded.poses(request.poses))
            if isinstance(request, StockRequest):
                found = _from_stock(given, request, loaded, before, progress)
            elif isinstance(request, SineRequest):
                found = _by_sine(given, request, loaded, before)
            else:
                assert isinstance(request, FitRequest)
                found = _by_fit(given, request, before)
            return attrs.evolve(found, methods=compared(request, loaded))
    except PoiseFileError:
        raise
    except InputError as error:
        raise PoiseFileError(f"{given.called}: design: {error}") from error


def _from_stock(given: PoiseFile, request: StockRequest, loaded: Mechanism, before: Residual, progress: Any) -> Design:
    list_file = (given.path.parent if given.path is not None else Path()) / request.stock
    read_bytes(list_file, LARGEST_STOCK)
    limit = request.residual_limit
    if isinstance(limit, OfPeak):
        limit = limit.share * before.peak_gravity_torque
    most = math.inf if limit is None else limit
    search = search_stock(
        loaded,
        read_stock(list_file),
        attach_radii=request.attach_radii.values,
        anchor_heights=request.anchor_heights.values,
        counts=request.counts,
        over=loaded.poses(request.poses),
        pulley=request.pulley,
        anchor_angles=request.anchor_angle,
        attach_skews=request.attach_skews,
        least_margin=request.least_margin,
        residual_limit=limit,
        keep=LISTED,
        refine=LISTED,
        resolution=request.resolution,
        progress=progress,
    )
    taken = _first_that_keeps(search, request, given, most)
    if taken is None:
        status = search.status
        if search.success:
            one = search.best
            status = (
                f"none of {len(search.candidates)} parts and counts fits with its mounts rounded to "
                f"{1e3 * request.resolution:g} mm; best is {one.count} x {one.part}: {drilled(one, request, most)[1]}"
            )
        return Design(document=given, solved=None, before=before, after=None, report=None, search=search, status=status)
    status = f"{taken.candidate.count} x {taken.candidate.part}, rank {taken.rank}"
    if taken.rank > 1 and taken.keeps:
        status += (
            ": the first that keeps all limits" if given.limits else ": the first that fits with its mounts rounded"
        )
    else:
        status += f" of {len(search.candidates)}" + ("" if taken.keeps else "; none of them keeps all limits")
    return _finished(given, taken.solved, before, status, taken.builds, search=search, chosen=taken.candidate)


class _Taken(NamedTuple):
    """A candidate of a search with its mounts rounded."""

    rank: int
    candidate: StockCandidate
    solved: PoiseFile
    builds: Builds | None
    keeps: bool


def _first_that_keeps(search: StockSearch, request: StockRequest, given: PoiseFile, limit: float) -> _Taken | None:
    """The first in rank that keeps all limits with its mounts rounded, else the first that fits so; None for none."""
    first = None
    for rank, one in enumerate(search.candidates, start=1):
        mounts, lacks = drilled(one, request, limit)
        if lacks:
            continue
        solved = _with_mounts(given, mounts)
        builds = builds_of(solved)
        taken = _Taken(rank, one, solved, builds, keeps_all(solved, builds))
        if taken.keeps:
            return taken
        first = first or taken
    return first


def _by_sine(given: PoiseFile, request: SineRequest, loaded: Mechanism, before: Residual) -> Design:
    found = sine_match(
        loaded,
        rate=request.rate,
        attach_radius=request.attach_radius,
        anchor_height=request.anchor_height,
        anchor_angle=request.anchor_angle,
        count=request.count,
    )
    solved = _with_mounts(given, found.mechanism.springs)
    return _finished(given, solved, before, found.status, builds_of(solved))


def _by_fit(given: PoiseFile, request: FitRequest, before: Residual) -> Design:
    opened = {one.place for one in given.open_springs}
    whole = given.with_payload(request.payload).with_springs(given.all_mounts)
    found = fit_springs(
        whole,
        norm=request.norm,  # type: ignore[arg-type]
        over=whole.poses(request.poses),
        preload=OpenSpring.preload(given.open_springs),  # type: ignore[arg-type]
        fixed=[i for i in range(len(whole.springs)) if i not in opened],
    )
    if not found.mechanism.springs or len(found.left_out) == len(opened):
        return Design(document=given, solved=None, before=before, after=None, report=None, status=found.status)
    left_out = f"; best left out: {', '.join(found.left_out)}" if found.left_out else ""
    names = [whole.mount_name(i) for i in range(len(whole.springs))]
    kept = [i for i, name in enumerate(names) if name not in found.left_out]
    tolerances = given.tolerances
    if tolerances is not None and len(kept) < len(names):
        tolerances = tolerances.with_springs_kept(kept_fields(tolerances, whole, kept))
    try:
        solved = _with_mounts(attrs.evolve(given, tolerances=tolerances), found.mechanism.springs)
    except InputError as error:
        if not found.left_out:
            raise
        raise InputError(f"without what is best left out ({', '.join(found.left_out)}) {error}") from error
    return _finished(given, solved, before, found.status + left_out, builds_of(solved))


def _with_mounts(given: PoiseFile, mounts: Any) -> PoiseFile:
    """The document with all springs in their place; what asked for them stays for now."""
    filled = attrs.evolve(given.mechanism, springs=mounts)
    return attrs.evolve(given, mechanism=filled, design=None, open_springs=(), path=None)


def _finished(
    given: PoiseFile, solved: PoiseFile, before: Residual, status: str, builds: Builds | None, **others: Any
) -> Design:
    assert given.design is not None
    loaded = solved.with_payload(given.design.payload)
    study = None
    if builds is not None:
        try:
            study = study_of(builds)
        except SpringpoiseError as error:
            raise PoiseFileError(f"{given.called}: tolerances: {str(error).removeprefix('tolerances: ')}") from error
    return Design(
        document=given,
        solved=solved,
        before=before,
        after=residual(loaded, loaded.poses(given.design.poses)),
        report=judge(solved, builds),
        study=study,
        status=status,
        **others,
    )
