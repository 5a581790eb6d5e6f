"""What a file leaves open, found with the solvers of ``springpoise.balance``."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import attrs
import numpy as np

from springpoise import units
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
from springpoise.guard.solving.methods import compared
from springpoise.guard.solving.openings import OpenSpring
from springpoise.guard.solving.requests import FitRequest, SineRequest, StockRequest
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable

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
    """The candidate of the search that was taken: the first in rank that keeps all limits, else the first."""
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
        residual_limit=limit.share * before.peak_gravity_torque if isinstance(limit, OfPeak) else limit,
        keep=LISTED,
        refine=LISTED,
        resolution=request.resolution,
        progress=progress,
    )
    if not search.success:
        return Design(
            document=given, solved=None, before=before, after=None, report=None, search=search, status=search.status
        )
    tried = [(one, _with_mounts(given, _to_drill(one, request.resolution))) for one in search.candidates]
    builds: list[Builds | None] = []
    keeping = None
    for rank, (_, solved) in enumerate(tried):
        builds.append(builds_of(solved))
        if keeps_all(solved, builds[-1]):
            keeping = rank
            break
    chosen, solved = tried[keeping or 0]
    status = f"{chosen.count} x {chosen.part}, rank 1 of {len(search.candidates)}"
    if keeping:
        status = f"{chosen.count} x {chosen.part}, rank {keeping + 1}: the first that keeps all limits"
    elif keeping is None and given.limits:
        status += "; none of them keeps all limits"
    return _finished(given, solved, before, status, builds[keeping or 0], search=search, chosen=chosen)


def _to_drill(candidate: StockCandidate, step: float) -> list[SpringMount]:
    """The candidate's mounts, the new one named, with coordinates and cable rounded to what can be made."""
    *others, last = candidate.mechanism.springs
    rigid = _stepped(last.rigid_length, step)
    return [*others, attrs.evolve(last, name=candidate.part, path=_rounded(last.path, step), rigid_length=rigid)]


def _rounded(part: Any, step: float) -> Any:
    """A path, or a part of one, with every point on a multiple of the step."""
    if isinstance(part, Point):
        return attrs.evolve(part, at=(_stepped(part.at[0], step), _stepped(part.at[1], step)))
    if isinstance(part, Cable):
        return Cable(*(_rounded(element, step) for element in part.along))
    names = [field.name for field in attrs.fields(type(part)) if isinstance(getattr(part, field.name), Point)]
    return attrs.evolve(part, **{name: _rounded(getattr(part, name), step) for name in names})


def _stepped(value: float, step: float) -> float:
    """The nearest multiple of a step, as it reads when a person writes it in mm."""
    return units.parse(f"{1e3 * round(value / step) * step + 0.0:.10g} mm", "m")


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
    solved = _with_mounts(attrs.evolve(given, tolerances=tolerances), found.mechanism.springs)
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
