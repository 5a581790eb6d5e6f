"""A spring known from a test bench only."""

from __future__ import annotations

import functools
import os

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, interpolate
from springpoise.columns import Column, heading_names, read_columns
from springpoise.errors import InputError, PoiseFileError
from springpoise.lookup import Lookup
from springpoise.springs.service import remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["MeasuredSpring"]

Array = NDArray[np.float64]

_BENCHES = {("length", "load"): ("m", "N"), ("angle", "torque"): ("rad", "N*m")}
"""The two pairs of columns that a file of readings may have, and their SI units."""


@attrs.frozen(field_transformer=units.named_fields)
class MeasuredSpring:
    """A spring given by the loads that a test bench read at increasing lengths.

    Between the readings the load follows a shape-preserving cubic (no overshoot between two
    readings), whose energy is exact. Outside the readings every result is NaN: a measured spring
    is never extrapolated. Readings in a file are taken with :meth:`read`. With both branches ``load`` is their middle and ``hysteresis`` half
    their distance. Give lengths in m and loads in N; a torsion spring's angles in rad and torques
    in N·m serve as well, as plain numbers.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Fewer than two readings, lengths that do not increase, branches of different length, or
        an unloading branch above the loading branch.

    References
    ----------
    Fritsch, F. N. and Carlson, R. E. (1980), Monotone piecewise cubic interpolation, SIAM Journal
    on Numerical Analysis 17(2):238-246.

    Examples
    --------
    >>> spring = MeasuredSpring([0.10, 0.15, 0.20], [12.0, 30.0, 50.0], unloading=[11.0, 28.0, 50.0])
    >>> spring.load(0.15), spring.hysteresis(0.15), spring.load(0.30)
    (29.0, 1.0, nan)
    """

    lengths: Array = attrs.field(converter=units.metre)
    """Lengths of the readings [m], shape (n,), n >= 2, strictly increasing."""
    loads: Array = attrs.field(converter=units.newton)
    """Loads read while lengthening [N], shape (n,); positive pulls the ends together."""
    unloading: Array | None = attrs.field(default=None, converter=units.optional_newton, kw_only=True)
    """Loads read while shortening, at the same lengths [N], shape (n,); None where only one branch was read."""

    def __attrs_post_init__(self) -> None:
        lengths = np.asarray(self.lengths)
        if lengths.ndim != 1 or lengths.size < 2:
            raise InputError(f"MeasuredSpring.lengths must be at least two readings, got shape {lengths.shape}")
        steps = np.diff(lengths)
        if not np.all(steps > 0):
            i = int(np.flatnonzero(~(steps > 0))[0])
            raise InputError(
                f"MeasuredSpring.lengths must increase from reading to reading, got {lengths[i]:g} before {lengths[i + 1]:g} m"
            )
        for name in ("loads", "unloading"):
            branch = getattr(self, name)
            if branch is not None and np.shape(branch) != lengths.shape:
                raise InputError(
                    f"MeasuredSpring.{name} must be of shape {lengths.shape} like lengths, got {np.shape(branch)}"
                )
        if self.unloading is not None:
            above = np.flatnonzero(np.asarray(self.unloading) > np.asarray(self.loads))
            if above.size:
                i = int(above[0])
                raise InputError(
                    f"MeasuredSpring.unloading must not exceed loads, got {self.unloading[i]:g} over {self.loads[i]:g} N "
                    f"at {lengths[i]:g} m; are the branches swapped?"
                )

    @classmethod
    def read(cls, file: str | os.PathLike[str]) -> MeasuredSpring:
        r"""The spring whose readings are in a CSV file.

        The heading line names the columns, in any order, with units in brackets: ``length [mm]``
        and ``load [N]``, or for a torsion spring ``angle [deg]`` and ``torque [N*m]``; and where
        the other branch was read too ``unloading`` in the unit of a load or torque. Rows stand in
        order of increasing length. Other columns are passed over, and so are empty lines and lines
        that begin with ``#``.

        Parameters
        ----------
        file
            Path of a CSV file in UTF-8, comma or semicolon separated.

        Raises
        ------
        PoiseFileError
            The file cannot be read, a column is missing, doubled or without its unit, a cell is no
            number, or the readings make no spring; the message names the file and what was found.

        Examples
        --------
        >>> from pathlib import Path
        >>> from tempfile import mkdtemp
        >>> file = Path(mkdtemp()) / "bench.csv"
        >>> _ = file.write_text("length [mm], load [N], unloading [N]\n100, 12, 11\n150, 30, 28\n200, 50, 50\n")
        >>> spring = MeasuredSpring.read(file)
        >>> round(spring.load(0.15), 9), round(spring.hysteresis(0.15), 9)
        (29.0, 1.0)
        """
        called = "a spring's readings"
        names = heading_names(file, called)
        angular = "angle" in names or "torque" in names
        pair = ("angle", "torque") if angular else ("length", "load")
        unit, load_unit = _BENCHES[pair]
        table = read_columns(
            file,
            needed={pair[0]: Column(unit), pair[1]: Column(load_unit)},
            optional={"unloading": Column(load_unit)},
            called=called,
            row="reading",
        )
        try:
            return cls(table.numbers[pair[0]], table.numbers[pair[1]], unloading=table.numbers.get("unloading"))
        except InputError as error:
            raise PoiseFileError(f"{table.path}: {error}") from error

    @functools.cached_property
    def _curve(self) -> Lookup:
        return _shape_preserving(
            self.lengths, self.loads if self.unloading is None else 0.5 * (self.loads + self.unloading)
        )

    @functools.cached_property
    def _slope(self) -> Lookup:
        return self._curve.derivative()

    @functools.cached_property
    def _work(self) -> Lookup:
        return self._curve.antiderivative()

    @functools.cached_property
    def _band(self) -> Lookup | None:
        return None if self.unloading is None else _shape_preserving(self.lengths, 0.5 * (self.loads - self.unloading))

    @property
    def working_range(self) -> tuple[float, float]:
        """First and last length that were measured [m]."""
        return float(self.lengths[0]), float(self.lengths[-1])

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], the middle of both branches; NaN outside the readings."""
        return interpolate(x, self._curve)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m]; NaN outside the readings."""
        return interpolate(x, self._slope)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], counted from the first reading; NaN outside the readings."""
        return interpolate(x, self._work)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half the distance of the branches at ``x`` [N]; zero where only one was read."""
        return 0.0 * x if self._band is None else interpolate(x, self._band)

    def at_temperature(
        self, temperature: ScalarLike, *, load_slope: ScalarLike, reference: ScalarLike
    ) -> MeasuredSpring:
        """The spring at another temperature.

        Parameters
        ----------
        temperature
            Temperature [K]; ``"40 degC"`` as a string.
        load_slope
            Relative change of its load with temperature [1/K].
        reference
            Temperature of the bench [K].
        """
        return self._scaled(warmed(temperature, load_slope, reference, "load_slope"))

    def after(self, *, load_loss: ScalarLike) -> MeasuredSpring:
        """The spring after it has lost the share ``load_loss`` [1] of its load at every length."""
        return self._scaled(remaining(load_loss))

    def _scaled(self, factor: float) -> MeasuredSpring:
        unloading = None if self.unloading is None else factor * self.unloading
        return MeasuredSpring(self.lengths, factor * self.loads, unloading=unloading)


def _shape_preserving(lengths: Array, loads: Array) -> Lookup:
    from scipy.interpolate import PchipInterpolator

    return Lookup(lengths, PchipInterpolator(lengths, loads).c[::-1].T)
