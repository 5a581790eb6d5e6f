"""The rubber tube or cord as a spring."""

from __future__ import annotations

import warnings
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.rubber.creep import Crept, Environment
from springpoise.springs.rubber.law import RubberLaw, fitted_over_of, fitted_range, highest_stretch_of, increasing
from springpoise.springs.rubber.limits import StretchLimits, StretchMargins, stretch_margins
from springpoise.springs.rubber.scaled import Stiffened
from springpoise.springs.rubber.softening import Softened
from springpoise.springs.rubber.straightness import ZeroLengthFit, zero_length_fit
from springpoise.springs.rubber.temperature import thermal_factor
from springpoise.springs.warnings import RubberModulusWarning, RubberStretchWarning
from springpoise.units import ScalarLike

__all__ = ["RubberTube"]

_SOFTEST, _HARDEST = 1e4, 1e7
"""Shear moduli [Pa] between which every rubber lies (values from memory)."""


def _law(value: Any) -> Any:
    missing = [name for name in ("stress", "tangent", "energy_density") if not callable(getattr(value, name, None))]
    if missing or isinstance(value, type):
        what = f"the class {value.__name__}, not an object of it" if isinstance(value, type) else repr(value)
        hint = "; give its .law" if callable(getattr(getattr(value, "law", None), "stress", None)) else ""
        raise InputTypeError(f"RubberTube.law must have stress, tangent and energy_density methods, got {what}{hint}")
    return value


def _below_one(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if isinstance(value, float | np.ndarray) and not np.all(np.asarray((value >= 0.0) & (value < 1.0))):
        raise InputError(f"RubberTube.loop_loss must be from 0 to below 1, got {value}; 5 % is 0.05")


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class RubberTube:
    """A rubber tube, cord or band: ``load = A₀ · stress(x / free_length)``, slack below ``free_length``.

    ``x`` is the length between the clamps, ``A₀`` the unstretched cross-section. Rubber keeps its
    volume, so both diameters shrink with ``1/sqrt(stretch)``, and clamps must follow them. In its
    middle range soft rubber pulls nearly in proportion to its whole length, as a spring of zero
    free length does: ask :meth:`effective_free_length`.

    ``load`` is what the law says. A law fitted to first-loading readings belongs to a fresh tube
    being stretched slowly; for a spring in use fit the middle of both branches of a preconditioned
    tube, or change the fresh law with :meth:`preconditioned`, :meth:`after`, :meth:`at_temperature`,
    :meth:`aged` and :meth:`with_set`, in the order of events. Stress figures of standard tensile
    tests ("M100", "M300") are first-loading nominal stresses at that elongation, not slopes.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A value out of range or of another dimension, ``inner_diameter`` not below
        ``outer_diameter``, or an object that is no law.

    Warns
    -----
    RubberStretchWarning
        ``stretch_range`` goes beyond the stretches over which the law was fitted, or in which it holds.
    RubberModulusWarning
        The law's modulus is that of no rubber, so that its unit is in doubt.

    Examples
    --------
    >>> from springpoise.springs.rubber import Yeoh
    >>> latex = Yeoh(c1="0.23155 MPa", c2="-3.3075 kPa", c3="107.03 Pa", fitted_over=(1.0, 4.4))
    >>> tube = RubberTube(outer_diameter="9.525 mm", inner_diameter="6.35 mm", free_length="100 mm", law=latex)
    >>> round(tube.load(0.300), 2), tube.load(0.080)
    (46.14, 0.0)
    >>> [round(x, 3) for x in tube.working_range]
    [0.1, 0.44]
    """

    outer_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Outer diameter at rest [m], > 0."""
    inner_diameter: Carrier = attrs.field(converter=units.metre, validator=units.not_negative)
    """Inner diameter at rest [m], >= 0 and below ``outer_diameter``; 0 for a solid cord."""
    free_length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Length between the clamps at rest [m], > 0."""
    law: RubberLaw = attrs.field(converter=_law)
    """Stress-stretch law of the rubber."""
    stretch_range: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Permissible stretches (lowest, highest) [1], chosen by the user; None for the law's fitted range."""
    loop_loss: Carrier = attrs.field(default=0.0, converter=units.number, validator=_below_one)
    """Share of the work of stretching that is lost in a loop [1], 0 to below 1; 0 for none.

    Seen in slow loops of Treloar (1944), traced from his figures: 0.05 for latex at 50 °C to
    stretch 4.7, 0.345 for the same to 7.4, 0.20 for a vulcanizate with 8 % sulphur to 7.5, which
    was reversible to at least 4.5.
    """
    loop_stretch: Carrier | None = attrs.field(default=None, converter=units.number)
    """Stretch up to which ``loop_loss`` was measured [1]; None for not given."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.asarray(self.inner_diameter >= self.outer_diameter)):
            raise InputError(
                f"RubberTube.inner_diameter must be < outer_diameter ({self.outer_diameter}) m, got {self.inner_diameter}"
            )
        modulus: Any = getattr(self.law, "shear_modulus", None)
        if modulus is not None and np.any(np.asarray((modulus < _SOFTEST) | (modulus > _HARDEST))):
            warnings.warn(
                f"RubberTube.law has a shear modulus of {modulus:.4g} Pa, which no rubber has "
                f"({_SOFTEST:g} to {_HARDEST:g} Pa, values from memory); is it in MPa? write '0.4 MPa'",
                RubberModulusWarning,
                stacklevel=3,
            )
        if self.stretch_range is not None:
            self._warn_of_range(*self.stretch_range, "RubberTube.stretch_range", stacklevel=4)

    def _warn_of_range(self, low: float, high: float, what: str, stacklevel: int) -> None:
        fitted = fitted_over_of(self.law)
        end: Any = highest_stretch_of(self.law)
        beyond = []
        if fitted is not None and low < fitted[0]:
            beyond.append(f"{fitted[0] - low:.3g} below the lowest stretch the law was fitted to, {fitted[0]:.4g}")
        if fitted is not None and high > fitted[1]:
            beyond.append(f"{high - fitted[1]:.3g} above the highest stretch the law was fitted to, {fitted[1]:.4g}")
        if np.any(np.asarray(high > end)):
            least = float(np.min(end))
            beyond.append(f"{high - least:.3g} above the stretch to which the law holds, {least:.4g}")
        if beyond:
            text = f"{what} {low:.4g} to {high:.4g} goes {' and '.join(beyond)}"
            warnings.warn(text, RubberStretchWarning, stacklevel=stacklevel)

    @property
    def cross_section(self) -> Carrier:
        """Cross-section of the rubber at rest [m²]."""
        return 0.25 * np.pi * (self.outer_diameter * self.outer_diameter - self.inner_diameter * self.inner_diameter)

    @property
    def volume(self) -> Carrier:
        """Volume of the rubber between the clamps [m³]."""
        return self.cross_section * self.free_length

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """Lengths [m] of the permissible stretches, or else of those over which the law was fitted."""
        low, high = self.stretch_range or fitted_over_of(self.law) or (1.0, np.inf)
        end = highest_stretch_of(self.law)
        return max(low, 1.0) * self.free_length, namespace(end).minimum(end, high) * self.free_length

    def stretch(self, x: Carrier) -> Carrier:
        """Length over free length at ``x`` [1]; 1 when slack."""
        return namespace(x, self.free_length).maximum(x / self.free_length, 1.0)

    def outer_diameter_at(self, x: Carrier) -> Carrier:
        """Outer diameter at length ``x`` [m]."""
        stretch = self.stretch(x)
        return self.outer_diameter / namespace(stretch).sqrt(stretch)

    def inner_diameter_at(self, x: Carrier) -> Carrier:
        """Inner diameter at length ``x`` [m]."""
        stretch = self.stretch(x)
        return self.inner_diameter / namespace(stretch).sqrt(stretch)

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], shape of ``x``; positive pulls the ends together, 0 when slack."""
        return self.cross_section * self.law.stress(self.stretch(x))

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m], 0 when slack."""
        slope = self.cross_section / self.free_length * self.law.tangent(self.stretch(x))
        return namespace(x, slope).where(x <= self.free_length, 0.0, slope)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero when slack."""
        return self.volume * self.law.energy_density(self.stretch(x))

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]: the share of the load that makes a loop lose ``loop_loss``."""
        return self.loop_loss / (2.0 - self.loop_loss) * self.load(x)

    def effective_free_length(self, over: Any) -> ZeroLengthFit:
        """How near the tube is to a straight load line and to a spring of zero free length.

        Parameters
        ----------
        over
            Range of lengths (shortest, longest) between the clamps [m].

        Returns
        -------
        ZeroLengthFit
            Rate, effective free length and deviation of the best straight line, and of the best
            spring of zero free length, for the least rms and for the least worst deviation.

        Warns
        -----
        RubberStretchWarning
            The range goes beyond the stretches over which the law was fitted.

        Examples
        --------
        >>> from springpoise.springs.rubber import Yeoh
        >>> latex = Yeoh(c1="0.23155 MPa", c2="-3.3075 kPa", c3="107.03 Pa", fitted_over=(1.0, 4.4))
        >>> tube = RubberTube(outer_diameter="9.525 mm", inner_diameter="6.35 mm", free_length="100 mm", law=latex)
        >>> tube.effective_free_length(over=("220 mm", "380 mm")).status
        'load within ±0.96 % of proportional to length from 220.0 mm to 380.0 mm'
        """
        low, high = units.pair(over, "m", "over")
        free = np.asarray(self.free_length)
        if low > float(free.min()):
            self._warn_of_range(low / float(free.max()), high / float(free.min()), "over: stretch", stacklevel=3)
        return zero_length_fit(self.load, (low, high))

    def stretch_margins(
        self,
        over: Any,
        *,
        duty: Literal["sustained", "cyclic"],
        break_stretch: ScalarLike | None = None,
        limits: StretchLimits | None = None,
    ) -> StretchMargins:
        """How far a range of lengths is from every limit of stretch.

        Parameters
        ----------
        over
            Range of lengths (shortest, longest) between the clamps [m].
        duty
            "sustained" for a spring that holds a load for long, "cyclic" for one in motion.
        break_stretch
            Stretch at break [1]; 750 % elongation is 8.5.
        limits
            The limits of use; None for ``StretchLimits()``, which are values from memory.

        Warns
        -----
        RubberStretchWarning
            For each limit that is exceeded, by how much.
        """
        low, high = units.pair(over, "m", "over")
        if not 0.0 < low <= high:
            raise InputError(f"over must be lengths (shorter, longer) above 0 m, got {(low, high)}")
        free = np.asarray(self.free_length)
        return stretch_margins(
            self.law,
            (low / float(free.max()), high / float(free.min())),
            duty=duty,
            limits=limits or StretchLimits(),
            break_stretch=None if break_stretch is None else units.number(break_stretch, "break_stretch"),
            loop_stretch=self.loop_stretch,
        )

    def preconditioned(self, to_stretch: ScalarLike, *, r: ScalarLike, m: ScalarLike) -> RubberTube:
        """The tube after it has been stretched to ``to_stretch`` and let go: softer below it.

        Parameters
        ----------
        to_stretch
            Largest earlier stretch [1].
        r, m
            Parameters of the softening, from loops of the compound at hand; see
            :class:`~springpoise.springs.rubber.Softened`. ``m`` in J/m³ or Pa.
        """
        if self._has(Softened):
            raise InputError(
                "RubberTube.preconditioned must start from a tube that is not preconditioned, got one that is; "
                "only the largest earlier stretch counts: give that"
            )
        return attrs.evolve(self, law=Softened(self.law, to_stretch=to_stretch, r=r, m=m))

    def _has(self, change: type) -> bool:
        """Whether the law has been through a change of this kind."""
        law: Any = self.law
        while law is not None and not isinstance(law, change):
            law = getattr(law, "law", None)
        return law is not None

    def after(self, time: ScalarLike, *, environment: Environment) -> RubberTube:
        """The tube after ``time`` under load: by creep the same load needs a longer tube.

        Parameters
        ----------
        time
            Whole time under load [s], at least one minute; the present law is that after one minute.
        environment
            How fast it creeps, such as :data:`~springpoise.springs.rubber.HUMID_AIR`. The published
            numbers are for pure-gum natural rubber; filled compounds lose 5 to 10 % of load a
            decade (value from memory), and above stretch 3 relaxation is much faster.

        Warns
        -----
        RubberCreepWarning
            ``time`` is longer than creep was measured over.
        """
        if self._has(Crept):
            raise InputError(
                "RubberTube.after must start from a tube that has not crept, got one that has; "
                "creep goes with the logarithm of the whole time: give that"
            )
        if not isinstance(environment, Environment):
            raise InputTypeError(
                f"environment must be an Environment, such as springs.rubber.DRY_AIR, got {environment!r}"
            )
        return attrs.evolve(self, law=Crept(self.law, environment._creep(time, 3)))

    def at_temperature(self, temperature: ScalarLike, *, energy_share: ScalarLike, reference: ScalarLike) -> RubberTube:
        """The tube at another temperature.

        Parameters
        ----------
        temperature
            Temperature [K]; ``"40 degC"`` as a string. Latex: at most 70 °C in continuous use
            (specification sheet of latex tubing, after A-A-50247C).
        energy_share
            Share of the stress that does not go with the absolute temperature [1]. Wood (1976) found
            from 0.51 for lightly to 0.09 for highly cross-linked natural rubber
            (:func:`~springpoise.springs.rubber.peroxide_cured_energy_share`). For soft latex 0.2 is
            a derived middle value, within a band of 0 to 0.5: try both ends.
        reference
            Temperature at which the present law holds [K].

        Notes
        -----
        Thermal expansion is left out. It is felt below stretch 1.3 or so, where at fixed length the
        load rises less, or falls.
        """
        factor = thermal_factor(temperature, energy_share=energy_share, reference=reference)
        return attrs.evolve(self, law=Stiffened(self.law, factor))

    def aged(self, *, load_change: ScalarLike) -> RubberTube:
        """The tube after a measured change of its load at equal stretch, such as in an ageing test.

        Parameters
        ----------
        load_change
            Relative change of the load [1]: -0.1 for a loss of 10 %. How long in use a test stands
            for is what :func:`~springpoise.springs.rubber.equivalent_time` says.
        """
        return attrs.evolve(self, law=Stiffened(self.law, 1.0 + units.number(load_change, "load_change")))

    def with_set(self, share: ScalarLike) -> RubberTube:
        """The tube with permanent set: longer and thinner at rest, of the same volume.

        Parameters
        ----------
        share
            Growth of the free length [1]. After long holds at 200 to 300 % extension 2 to 5 % when
            well cured (value from memory): measure it.
        """
        growth = 1.0 + units.number(share, "share")
        if np.any(np.asarray(growth < 1.0)):
            raise InputError(f"share must be >= 0, got {share}")
        return attrs.evolve(
            self,
            free_length=self.free_length * growth,
            outer_diameter=self.outer_diameter / growth**0.5,
            inner_diameter=self.inner_diameter / growth**0.5,
        )
