"""What must be true of any spring, path or linkage."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from springpoise.errors import InputError
from springpoise.linkages.body import Point
from springpoise.linkages.protocol import Linkage
from springpoise.paths.protocol import Path
from springpoise.springs.protocol import Spring, spring_like
from springpoise.testing.identities import Array, Check, IdentityError, IdentityReport, joints_over

__all__ = ["check_linkage", "check_path", "check_spring"]

CORNER = 0.3
"""How far from its origin the points of a frame lie that are tried [m]."""


def check_spring(spring: Spring, *, over: Any, tolerance: float = 1e-9) -> IdentityReport:
    """Energy, load and stiffness of a spring agree with each other, on floats, arrays and recordings.

    Load and energy at NaN must be NaN; of a stiffness, which may well be constant, that is not asked.

    Parameters
    ----------
    spring
        Any object with a spring's three methods.
    over
        Range (from, to) of the spring's own length [m] or angle [rad]; or a NumPy array of them.
    tolerance
        Allowed difference over the greatest value [1].

    Returns
    -------
    IdentityReport
        The identities and how well they hold.

    Raises
    ------
    IdentityError
        The first identity that does not hold, with the place and both numbers.
    InputError, InputTypeError
        Something that is not a spring, or an empty range.

    Examples
    --------
    >>> from springpoise import ExtensionSpring
    >>> print(check_spring(ExtensionSpring(800.0, free_length=0.1), over=(0.05, 0.3)))
    ExtensionSpring at 64 places
      load is the slope of energy       within ...
      stiffness is the slope of load    within ...
      hysteresis is not negative        within ...
      arrays are one by one             within ...
      recorded is computed              within ...
      NaN gives NaN                     within ...
    """
    spring = spring_like(spring, "spring")
    own: Any = spring
    check = Check(type(spring).__name__, "x", joints_over(over, 1), tolerance)
    energy, load, stiffness = (check.values(name, getattr(own, name)) for name in ("energy", "load", "stiffness"))
    slope = check.slope("energy", own.energy, 0)
    check.equal("load is the slope of energy", "load", load, "the slope of energy", slope, scale=energy)
    slope = check.slope("load", own.load, 0)
    check.equal("stiffness is the slope of load", "stiffness", stiffness, "the slope of load", slope, scale=load)
    functions = {"energy": own.energy, "load": own.load, "stiffness": own.stiffness}
    band: Any = np.zeros_like(load)
    if callable(getattr(spring, "hysteresis", None)):
        functions["hysteresis"] = own.hysteresis
        band = check.values("hysteresis", own.hysteresis)
    check.equal("hysteresis is not negative", "hysteresis", band, "its size", np.abs(band))
    for name, function in functions.items():
        check.carriers(name, function, through_nan=name in ("energy", "load"))
    return check.report()


def check_path(path: Path, linkage: Linkage, *, over: Any, tolerance: float = 1e-9) -> IdentityReport:
    """Length and gradient of a path agree with each other, on floats, arrays and recordings.

    Where the path has ``pulls``, their power is that of the tension at the growing path, and they
    add up to nothing.

    Parameters
    ----------
    path
        Any object with a path's two methods.
    linkage
        What the path runs on.
    over
        Range (from, to) of the joint [rad, or m], for several joints a range each; or a NumPy
        array of poses, shape (N,) or (N, n).
    tolerance
        Allowed difference over the greatest value [1].

    Returns
    -------
    IdentityReport
        The identities and how well they hold.

    Raises
    ------
    IdentityError
        The first identity that does not hold, with the place and both numbers.
    InputError, InputTypeError
        An empty range, or another number of ranges than joints.
    """
    count = linkage.joint_count
    check = Check(type(path).__name__, "q", joints_over(over, count), tolerance)
    check.size = check.values("length", check.posed(path.length, linkage))
    gradient = check.posed(lambda at, q: tuple(path.gradient(at, q)), linkage)
    rates = check.values("gradient", gradient, count)
    for joint in range(count):
        slope = check.slope("length", check.posed(path.length, linkage), joint)
        named = f"gradient[{joint}]"
        check.equal("gradient is the slope of length", named, rates[joint], "the slope of length", slope)
    _check_pulls(check, path, linkage, rates)
    functions: dict[str, Callable[..., Any]] = {"length": check.posed(path.length, linkage), "gradient": gradient}
    own: Any = getattr(path, "friction_gradient", None)
    if callable(own):
        bands_of: Callable[..., Any] = own
        functions["friction_gradient"] = check.posed(lambda at, q: tuple(bands_of(at, q)), linkage)
        bands = check.values("friction_gradient", functions["friction_gradient"], count)
        check.equal("friction gradient is not negative", "friction_gradient", bands, "its size", np.abs(bands))
    for name, function in functions.items():
        check.carriers(name, function)
    return check.report()


def _check_pulls(check: Check, path: Any, linkage: Linkage, rates: Array) -> None:
    """Power of one newton of tension, and the sum of its forces."""
    if not callable(getattr(path, "pulls", None)):
        return
    q = check.places[0] if len(check.places) == 1 else np.stack(check.places, axis=-1)
    try:
        pulls = path.pulls(linkage, q)
    except InputError:  # a path that says that it does not know
        return
    if not pulls:  # a torsion spring turns its joint and pulls at nothing
        return
    moves = [linkage.jacobian(at, q) for at, _ in pulls]
    for joint in range(linkage.joint_count):
        power: Any = sum(
            f * v
            for (_, force), move in zip(pulls, moves, strict=True)
            for f, v in zip(force, move[joint], strict=True)
        )
        named = f"-gradient[{joint}]"
        check.equal("power of the pulls is that of the tension", "power of pulls", power, named, -rates[joint])
    for axis in range(len(pulls[0][1])):
        total = sum(force[axis] for _, force in pulls)
        check.equal("pulls add up to nothing", f"sum of pulls[{axis}]", total, "nothing", 0.0 * rates[0], scale=1.0)


def check_linkage(linkage: Linkage, *, over: Any, tolerance: float = 1e-9) -> IdentityReport:
    """Positions and their derivatives agree with each other, bodies stay rigid, and the ground stays.

    Parameters
    ----------
    linkage
        Any object with a linkage's members.
    over
        Range (from, to) of the joint [rad, or m], for several joints a range each; or a NumPy
        array of poses, shape (N,) or (N, n).
    tolerance
        Allowed difference over the greatest value [1].

    Returns
    -------
    IdentityReport
        The identities and how well they hold.

    Raises
    ------
    IdentityError
        The first identity that does not hold, with the place and both numbers.
    InputError, InputTypeError
        An empty range, or another number of ranges than joints.

    Examples
    --------
    >>> from springpoise import Arm, Body
    >>> report = check_linkage(Arm(Body(2.0, (0.3, 0.0))), over=(-3.0, 3.0))
    >>> report.identities[0].name
    'jacobian is the derivative of position'
    """
    count, axes = linkage.joint_count, range(getattr(linkage, "dimensions", 2))
    check = Check(type(linkage).__name__, "q", joints_over(over, count), tolerance)
    check.size = CORNER
    corners = [tuple(CORNER * (axis == corner) for axis in axes) for corner in (None, *axes)]
    for frame in linkage.frames:
        placed = []
        for corner in corners:
            point = Point(frame, corner)
            places, moves = _of_point(check, linkage, point)
            at = check.values(f"position of {point}", places, len(axes))
            rates = check.values(f"jacobian of {point}", moves, count * len(axes))
            placed.append(at)
            for joint in range(count):
                for axis in axes:
                    check.equal(
                        "jacobian is the derivative of position",
                        f"jacobian[{joint}][{axis}] of {point}",
                        rates[joint * len(axes) + axis],
                        "the derivative of position",
                        check.slope(f"position[{axis}] of {point}", _item(places, axis), joint),
                        scale=at,
                    )
            check.carriers(f"position of {point}", places)
            check.carriers(f"jacobian of {point}", moves)
        _check_rigid(check, frame, np.array(placed), corners)
    for mass, place in linkage.masses:
        if place.body not in linkage.frames:
            raise IdentityError(f"{check.subject}.masses must be in its frames {linkage.frames}, got {place}")
        weighed = np.asarray(mass)
        check.equal("masses are not negative", f"mass at {place}", weighed, "its size", np.abs(weighed))
    _check_gravity(check, linkage)
    return check.report()


def _of_point(check: Check, linkage: Linkage, point: Point) -> tuple[Callable[..., Any], Callable[..., Any]]:
    def places(*q: Any) -> Any:
        return tuple(linkage.position(point, q[0] if len(q) == 1 else q))

    def moves(*q: Any) -> Any:
        return tuple(c for move in linkage.jacobian(point, q[0] if len(q) == 1 else q) for c in move)

    return places, moves


def _item(function: Callable[..., Any], index: int) -> Callable[..., Any]:
    return lambda *args: function(*args)[index]


def _check_rigid(check: Check, frame: str, placed: Array, corners: list[tuple[float, ...]]) -> None:
    """Edges keep their length and angles, and are not mirrored; the ground's do not move."""
    edges = (placed[1:] - placed[0]) / CORNER
    for i, one in enumerate(edges):
        for j, other in enumerate(edges[: i + 1]):
            named = f"edge {i} times edge {j} of {frame!r}"
            product = np.sum(one * other, axis=0)
            check.equal("bodies stay rigid", named, product, "that at rest", 0.0 * product + (i == j), scale=1.0)
    turned = np.linalg.det(np.moveaxis(edges, -1, 0))
    check.equal("bodies are not mirrored", f"handedness of {frame!r}", turned, "one", 0.0 * turned + 1.0, scale=1.0)
    if frame == "ground":
        still = np.broadcast_to(np.array(corners)[:, :, None], placed.shape)
        check.equal("the ground stays", "position", placed, "where it was", still, scale=1.0)


def _check_gravity(check: Check, linkage: Any) -> None:
    """A linkage's own shorter way to its gravity torques against the sum over its masses."""
    own = getattr(linkage, "gravity_torques", None)
    if own is None:
        return
    gravity = (1.0, -2.0, 3.0)[: getattr(linkage, "dimensions", 2)]
    q = check.places if len(check.places) > 1 else check.places[0]
    short = own(q, gravity)
    for joint in range(linkage.joint_count):
        long: Any = sum(
            mass * g * move
            for mass, at in linkage.masses
            for g, move in zip(gravity, linkage.jacobian(at, q)[joint], strict=True)
        )
        named = f"gravity_torques[{joint}]"
        check.equal("gravity torques are those of the masses", named, short[joint], "sum over the masses", long)
