"""Which names files use for which classes. A new spring, path, linkage or limit is a line here."""

from __future__ import annotations

from springpoise.guard.format.linkage_kinds import LINKAGES, MEMBERS
from springpoise.guard.format.models import Family, Registry
from springpoise.guard.format.spring_kinds import ANGULAR, SPRING_FAMILIES, SPRINGS
from springpoise.guard.limits.mechanism import (
    BalanceAngles,
    HoldingTorque,
    Limit,
    MotorCurrent,
    PivotLoad,
    ResidualTorque,
    StoredEnergy,
    Stretch,
)
from springpoise.guard.limits.parts import BucklingMargin, FatigueMargin, ServiceTemperature, YieldMargin
from springpoise.guard.limits.yields import BuildYield
from springpoise.guard.solving.requests import DesignRequest, FitRequest, SineRequest, StockRequest
from springpoise.linkages import Arm
from springpoise.paths import Cable, JointTravel, Spool, Straight
from springpoise.paths.protocol import Path
from springpoise.springs.protocol import Spring

__all__ = ["ANGULAR_REGISTRY", "DESIGNS", "LIMITS", "LINKAGE_TABLES", "PATHS", "REGISTRY", "SPRINGS"]

LINKAGE_TABLES: dict[str, type | Family] = {"arm": Arm, "linkage": LINKAGES}
"""Sections of which a file has exactly one, and the linkage, or the kinds of linkages, that each describes."""

PATHS = Family("kind", "path", {"straight": Straight, "cable": Cable, "joint travel": JointTravel, "spool": Spool})

LIMITS = Family(
    "what",
    "limit",
    {
        cls.what: cls
        for cls in (
            ResidualTorque,
            HoldingTorque,
            Stretch,
            StoredEnergy,
            BalanceAngles,
            MotorCurrent,
            PivotLoad,
            YieldMargin,
            FatigueMargin,
            BucklingMargin,
            ServiceTemperature,
            BuildYield,
        )
    },
)

DESIGNS = Family("method", "design", {cls.method: cls for cls in (StockRequest, SineRequest, FitRequest)})

REGISTRY: Registry = {**SPRING_FAMILIES, **MEMBERS, Path: PATHS, Limit: LIMITS, DesignRequest: DESIGNS}
"""The family for each type of a field that says only what it is for."""

ANGULAR_REGISTRY: Registry = {**REGISTRY, Spring: ANGULAR}
"""The same for springs whose coordinate is an angle."""
