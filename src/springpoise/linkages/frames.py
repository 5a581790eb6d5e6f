"""Frames of planar bodies: where each stands and how it moves with each joint.

All planar linkages are lists of frames, made one from another: a joint, a frame carried parallel
to the ground, a loop closed by two bodies.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from springpoise.carriers import Carrier, namespace

__all__ = ["GROUND", "Frame", "Rate", "divisor", "still"]

GROUND = "ground"


class Rate(NamedTuple):
    """How a frame moves for one rad (or m) of one joint."""

    x: Carrier  # of its origin, to the right
    y: Carrier  # of its origin, up
    turn: Carrier  # counter-clockwise


class Frame(NamedTuple):
    """A body's frame in ground coordinates."""

    x: Carrier
    y: Carrier
    cos: Carrier
    sin: Carrier
    rates: tuple[Rate, ...]

    def place(self, at: tuple[Carrier, Carrier]) -> tuple[Carrier, Carrier]:
        """Ground coordinates of a point fixed in the frame."""
        px, py = at
        return self.x + (px * self.cos - py * self.sin), self.y + (px * self.sin + py * self.cos)

    def moves(self, at: tuple[Carrier, Carrier]) -> tuple[tuple[Carrier, Carrier], ...]:
        """For each joint, the derivative of the point's ground coordinates."""
        px, py = at
        rx, ry = px * self.cos - py * self.sin, px * self.sin + py * self.cos
        return tuple((rate.x - rate.turn * ry, rate.y + rate.turn * rx) for rate in self.rates)

    def at(self, at: tuple[Carrier, Carrier]) -> Frame:
        """The frame of the same body with its origin moved to a point of it."""
        x, y = self.place(at)
        moves = self.moves(at)
        rates = tuple(Rate(dx, dy, rate.turn) for (dx, dy), rate in zip(moves, self.rates, strict=True))
        return Frame(x, y, self.cos, self.sin, rates)

    def turned(self, cos: Carrier, sin: Carrier, turns: tuple[Carrier, ...]) -> Frame:
        """A frame at the same origin, turned by an angle that moves by ``turns`` with the joints."""
        rates = tuple(Rate(r.x, r.y, r.turn + t) for r, t in zip(self.rates, turns, strict=True))
        return Frame(self.x, self.y, self.cos * cos - self.sin * sin, self.sin * cos + self.cos * sin, rates)

    def slid(self, by: Carrier, slides: tuple[Carrier, ...]) -> Frame:
        """The frame moved along its own x axis by a way that grows by ``slides`` with the joints."""
        moved = self.at((by, 0.0))
        rates = tuple(
            Rate(r.x + s * self.cos, r.y + s * self.sin, r.turn) for r, s in zip(moved.rates, slides, strict=True)
        )
        return moved._replace(rates=rates)

    def level(self) -> Frame:
        """A frame at the same origin that stays parallel to the ground."""
        return Frame(self.x, self.y, 1.0, 0.0, tuple(Rate(r.x, r.y, 0.0) for r in self.rates))


def still(joints: int) -> Frame:
    """The ground's own frame, for a linkage with so many joints."""
    return Frame(0.0, 0.0, 1.0, 0.0, (Rate(0.0, 0.0, 0.0),) * joints)


def divisor(value: Carrier) -> Carrier:
    """The value, NaN where it is zero: nothing is known at a dead point, and floats must not raise there."""
    return namespace(value).where(value == 0.0, math.nan, value)
