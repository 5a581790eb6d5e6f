"""The limit on the yield: how many builds have to be good enough."""

from __future__ import annotations

from typing import Any, ClassVar

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.guard.amounts import share_of, text_of_share
from springpoise.guard.builds.widths import read_width
from springpoise.guard.limits.mechanism import Limit
from springpoise.guard.limits.verdict import Case, LimitVerdict, judged
from springpoise.tables import number

__all__ = ["BuildYield"]


def _at_least(value: Any) -> float:
    return share_of(value, "BuildYield.at_least")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class BuildYield(Limit):
    """At least so many builds keep the residual limit of the tolerances.

    Builds, seed, payload and poses are those of the tolerances, so that the verdict is the same
    wherever the file is checked. It says nothing of a wire that yields; that is ``YieldMargin``.
    """

    what: ClassVar[str] = "yield"

    at_least: float = attrs.field(
        converter=_at_least,
        metadata={"read": read_width, "write": text_of_share},
    )
    """Least part of the builds [1], above 0 and at most 1; in files such as ``"95 %"``."""
    adjuster: str | None = None
    """Name or field of one of the adjusters of the tolerances, which is then set in each build; None for as built."""

    def __attrs_post_init__(self) -> None:
        for name in ("payload", "over", "at_temperature"):
            if getattr(self, name) is not None:
                raise InputError(
                    f"BuildYield.{name} must be left out, got {getattr(self, name)!r}; "
                    f"payload and poses of a yield are stated in the tolerances"
                )

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        builds = case.builds
        if builds is None:
            raise InputError("yield must have tolerances that say how the parts scatter, got none")
        count, share, about, subject = builds.tolerances.builds, builds.yield_share, "", self.what
        if self.adjuster is not None:
            chosen = builds.tolerances.adjuster(self.adjuster)
            if chosen is None:
                raise InputError(f"adjuster must be one of the tolerances' adjusters, got {self.adjuster!r}")
            count, share, about = builds.adjusted_count, builds.adjusted(chosen).yield_share, chosen.label
            subject = f"{self.what} with {about} adjusted"
        joints = zip(builds.limits, case.joints, strict=True)
        limits = ", ".join(number(limit, "N*m" if unit == "rad" else "N") for limit, (_, unit) in joints)
        also = f" of {count} builds within {limits}"
        return judged(
            case,
            self.what,
            100.0 * share,
            100.0 * self.at_least,
            "%",
            None,
            at_least=True,
            subject=subject,
            adjuster=about,
            also=also,
        )
