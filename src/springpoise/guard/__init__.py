"""Guard: mechanism files, limits that they state, and what changed between two versions of one.

A ``.poise.toml`` file describes an arm, its springs, its limits and, where something is still to be
found, how. Everything that has a unit is a text with that unit, ``"0.12 m"``; plain numbers are pure
numbers and counts. The keys of a table are the fields of the class that it describes.

```text
schema = 1        version of the format
title, description
[gravity]         latitude and height, or magnitude, or components; tilt. Standard gravity without.
[arm]             Arm: length; [[arm.bodies]] Body: name, mass, com
[linkage]         in place of [arm]. kind = "planar chain" ([[linkage.chain]] Link), "planar linkage"
                  ([[linkage.parts]], kind = "link", "dyad" or "slider dyad"), "four bar", "five bar" or
                  "spatial chain" ([[linkage.links]] SpatialLink), and the fields of that class; a joint
                  that follows others has follows = { ratios = { NAME = ratio }, offset }. Or kind = "urdf":
                  file, a URDF file beside this one, whose limits are the travel where none is stated.
[travel]          from, to. A full turn without. Of several joints [[travel]], a table for each; an
                  empty one for a full turn.
[friction]        Friction: coulomb, pivot_friction, pivot_radius. [[friction]] for each joint another.
[[springs]]       SpringMount: name, count, rigid_length, moving_mass
[springs.spring]  kind = "extension", "zero length", "compression", "torsion", "constant force",
                  "gas spring", "rubber tube", "strip spring", "torque curve", "in parallel",
                  "in series", "offset" or "scaled", and the fields of that class; of springs in
                  springs each is a table that names its kind, and so is a tube's law.
                  "gas spring from forces": the arguments of GasSpring.from_forces.
                  "measured": lengths, loads, unloading; "measured torsion": angles, torques,
                  unloading; or for either file, a CSV file beside this one.
                  "extension coil", "compression coil", "torsion coil", "strip", "spiral": the fields
                  of the part, its wire by name, and how it is used (see spring_of).
[springs.path]    kind = "straight": first, last. "cable": along = [point, disc or point ..., point].
                  "joint travel": joint, ratio. "spool": angles, moment_radii, joint. A point is { body = "ground", at = ["0 m", "0.2 m"] },
                  a disc { centre = {a point}, radius = "15 mm", turn = "cw" } with its friction.
[[service]]       Service: what springs need to be judged warm or cold; spring names one of them
[[payloads]]      Payload: name, mass, at; none of them is on the arm until a limit names it
[actuator]        Actuator: ratio, efficiency, sign, zero; [actuator.motor] Motor. [[actuator]] for
                  each joint another.
[[limits]]        what = "residual torque", "holding torque", "stretch", "stored energy",
                  "balance angles", "motor current", "pivot load", "yield margin", "fatigue margin",
                  "buckling margin" or "service temperature", and the fields of that class. Of several
                  joints the worst counts, or the one that joint names; over is a range for each.
                  "yield": at_least, adjuster; judged by [tolerances].
[tolerances]      Tolerances: residual_limit, payload, builds, seed, poses, adjusters (each an Adjustable:
                  field, name, reach), adjusted_builds, coverage; [[tolerances.spreads]] FieldSpread: field,
                  name, one of normal, uniform and samples, in_order, shared. A field is a number of the
                  mechanism by the names of springpoise.tolerance, "springs[main].spring.rate"; where a
                  number stands in the brackets, parts are counted from 0.
[design]          method = "stock", "sine" or "fit", and the fields of that class. With "fit", what is
                  to be found is written "open" in the springs: rate or pull, and either
                  initial_tension and free_angle, or rigid_length.
[design.compare]  MethodsRequest: ways of balancing to be put beside the design, between attach_radius and
                  anchor_height, which with "stock" are those of the search where they are left out.
```
"""

from springpoise.guard.amounts import OfPeak
from springpoise.guard.builds.scattered import AdjustedBuilds, SpreadCost
from springpoise.guard.builds.study import ToleranceStudy
from springpoise.guard.builds.tolerances import Adjustable, FieldSpread, Tolerances
from springpoise.guard.builds.widths import Width
from springpoise.guard.check import CheckReport, check
from springpoise.guard.compare import Change, Comparison, TextChange, compare
from springpoise.guard.document import Payload, PoiseFile
from springpoise.guard.files import dump, load, save
from springpoise.guard.joints import JointPose, JointRanges
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
from springpoise.guard.limits.verdict import Case, LimitVerdict
from springpoise.guard.limits.yields import BuildYield
from springpoise.guard.part_springs import spring_of
from springpoise.guard.service import Service
from springpoise.guard.solving.methods import MethodsRequest
from springpoise.guard.solving.openings import OpenSpring
from springpoise.guard.solving.requests import DesignRequest, FitRequest, SineRequest, Steps, StockRequest
from springpoise.guard.solving.solve import Design, design

__all__ = [
    "Adjustable",
    "AdjustedBuilds",
    "BalanceAngles",
    "BucklingMargin",
    "BuildYield",
    "Case",
    "Change",
    "CheckReport",
    "Comparison",
    "Design",
    "DesignRequest",
    "FatigueMargin",
    "FieldSpread",
    "FitRequest",
    "HoldingTorque",
    "JointPose",
    "JointRanges",
    "Limit",
    "LimitVerdict",
    "MethodsRequest",
    "MotorCurrent",
    "OfPeak",
    "OpenSpring",
    "Payload",
    "PivotLoad",
    "PoiseFile",
    "ResidualTorque",
    "Service",
    "ServiceTemperature",
    "SineRequest",
    "SpreadCost",
    "Steps",
    "StockRequest",
    "StoredEnergy",
    "Stretch",
    "TextChange",
    "ToleranceStudy",
    "Tolerances",
    "Width",
    "YieldMargin",
    "check",
    "compare",
    "design",
    "dump",
    "load",
    "save",
    "spring_of",
]
