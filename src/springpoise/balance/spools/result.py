"""What a shaped spool is: its lines, its mechanism, and whether a cable can wind on it."""

from __future__ import annotations

import os

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.residuals import Residual
from springpoise.balance.spools.checks import SpoolCheck
from springpoise.errors import NoSolution
from springpoise.mechanism import Mechanism
from springpoise.paths import GuideRoller
from springpoise.tables import degrees, facts, millimetres, number

__all__ = ["ShapedSpool"]

Array = NDArray[np.float64]


@attrs.frozen(eq=False)
class ShapedSpool:
    """A spool that lets one ordinary spring balance a mechanism, and whether it can be made.

    Lines lie in the frame of the link that the spool is fixed to, with the joint's axis as origin.
    """

    mechanism: Mechanism
    """The mechanism with the spool's spring as its last mount; without it where the spring cannot do the work."""
    angles: Array
    """Joint angles, closer where the spring lengthens fast [rad], shape (n,); the arrays below belong to them."""
    spring_lengths: Array
    """The spring's own length [m], shape (n,); NaN where it cannot hold the energy."""
    moment_radii: Array
    """Derivative of that length by the joint's angle [m], shape (n,)."""
    normals: Array
    """Direction of the line's outward normal where the cable leaves [rad], shape (n,)."""
    slopes: Array
    """Derivative of the moment radius' magnitude by ``normals`` [m/rad], shape (n,)."""
    curvature_radii: Array
    """Radius of curvature of the pitch line [m], shape (n,); not positive where a cable would bridge it."""
    straight_lengths: Array
    """Cable between spool and roller [m]; for a fixed direction, up to a line across it through the axis; shape (n,)."""
    pitch_line: Array
    """Where the middle of the cable lies [m], shape (n, 2)."""
    machined_line: Array
    """Bottom of the groove, half the cable's diameter inside the pitch line [m], shape (n, 2)."""
    cable_diameter: float
    """Diameter of the cable [m]."""
    leaves: float | GuideRoller
    """Direction in which the cable leaves the spool [rad], or the roller that it leaves over."""
    pull: str
    """Sense in which the cable's pull turns the spool: ``"cw"`` or ``"ccw"``."""
    start_angle: float
    """Joint angle at which the spring has its start length [rad]."""
    start_length: float
    """The spring's own length there [m]."""
    wound_length: float
    """Cable that lies on the spool at one end of the range and not at the other [m]."""
    roll_out_error: float
    """How far wound, straight and guided cable together stray from the spring's length [m], end to end."""
    checks: tuple[SpoolCheck, ...]
    """What has to hold for a cable to wind on the line, each at its worst pose."""
    residual: Residual
    """What the mechanism leaves over at the table's poses and midway between them."""

    def __attrs_post_init__(self) -> None:
        for field in attrs.fields(type(self)):
            value = getattr(self, field.name)
            if isinstance(value, np.ndarray):
                value.setflags(write=False)

    @property
    def success(self) -> bool:
        """Whether the spring can do the work and a cable can wind on the line."""
        return self._reaches and all(check.holds for check in self.checks)

    @property
    def _reaches(self) -> bool:
        return bool(np.all(np.isfinite(self.spring_lengths)))

    @property
    def least_curvature_radius(self) -> float:
        """Least radius of curvature of the pitch line [m]; not positive where it is not convex."""
        return self.checks[0].value

    @property
    def convex_over(self) -> tuple[tuple[float, float], ...]:
        """Ranges of the joint's angle over which the curvature is enough [rad]."""
        ends = [
            float(self.angles[0]),
            *(end for part in self.checks[0].fails_over for end in part),
            float(self.angles[-1]),
        ]
        return tuple((low, high) for low, high in zip(ends[::2], ends[1::2], strict=True) if high > low)

    @property
    def tie_at(self) -> int:
        """Number of the pose at which the least cable is wound: the cable is tied behind that end of the line."""
        return len(self.angles) - 1 if self.pull == "ccw" else 0

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if not self._reaches:
            bad = float(self.angles[np.isnan(self.spring_lengths)][0])
            way = f"on the way from {degrees(self.start_angle)} to {degrees(bad)}"
            if self.mechanism.energy(bad) > self.mechanism.energy(self.start_angle):
                return f"the spring goes slack {way}; it has to be longer at the start"
            return f"the spring cannot take up the work that gravity does {way}"
        # A cable that misses its roller has no curvature to speak of.
        failing = [check for check in (*self.checks[1:], self.checks[0]) if not check.holds]
        if not failing:
            return "balanced at every angle of the range, and a cable can wind on the line"
        text = f"{failing[0].what} {failing[0].sentence}"
        if failing[0] is self.checks[0] and self.convex_over:
            kept = " and ".join(f"{degrees(low)} to {degrees(high)}" for low, high in self.convex_over)
            text += f"; it would do from {kept}"
        return text

    def require(self) -> ShapedSpool:
        """The result itself, or an error where the spool cannot be made.

        Raises
        ------
        NoSolution
            The spring cannot do the work, or the line fails a check; the message has the angle.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def write_csv(self, path: str | os.PathLike[str]) -> None:
        """Write all arrays to a CSV file, lengths in mm and angles in deg, in one step.

        Raises
        ------
        InputError
            The spring cannot do the work, so that there is no line.
        PoiseFileError
            The file cannot be written.
        """
        from springpoise.balance.spools.files import csv_text
        from springpoise.writing import write_whole

        write_whole(csv_text(self), path)

    def write_svg(self, path: str | os.PathLike[str]) -> None:
        """Write a drawing to scale, one unit for one mm, with pitch line, machined line and axis; raises as `write_csv`."""
        from springpoise.balance.spools.drawing import svg_text
        from springpoise.writing import write_whole

        write_whole(svg_text(self), path)

    def write_dxf(self, path: str | os.PathLike[str]) -> None:
        """Write the lines in mm to a DXF file, on layers ``PITCH``, ``MACHINED`` and ``AXIS``; raises as `write_csv`.

        Raises
        ------
        ImportError
            The package ``ezdxf`` is not installed.
        """
        from springpoise.balance.spools.files import dxf_text
        from springpoise.writing import write_whole

        write_whole(dxf_text(self), path)

    def __str__(self) -> str:
        rows = [("status", self.status)]
        if self._reaches:
            lengths, arms = self.spring_lengths, np.abs(self.moment_radii)
            rows += [
                ("spring length", f"{millimetres(float(lengths.min()))} to {millimetres(float(lengths.max()))}"),
                ("moment radius", f"{millimetres(float(arms.min()))} to {millimetres(float(arms.max()))}"),
                ("start", f"{millimetres(self.start_length)} at {degrees(self.start_angle)}"),
                ("pull turns the spool", self.pull),
                ("cable wound", millimetres(self.wound_length)),
                *[(check.what, check.sentence) for check in self.checks],
                ("roll-out error", number(self.roll_out_error * 1e3, "mm", 2)),
            ]
        rows.append(("residual", str(self.residual)))
        return "shaped spool\n" + facts(rows)
