"""Adjusting for a payload against closed forms and energy identities.

For a spring of zero free length k·a·b = g·M, so that a' = a M'/M; work of moving the anchor
``k [(a'² - a²)/2 - (a' - a) b sin θ]``; none at ``sin θ* = (a + a')/(2b)``; half-way the energy is lower by
``k ((a' - a)/2)²/2``. All follow from U = k |B - A|²/2 (the law is in Streit and Gilmore 1989,
Perfect spring equilibrators for rotatable bodies; the adjustment in Barents et al. 2011, J. Mech.
Design 133(6):061010, of which the abstract was seen). Friction holds payloads within ±Tc/(g r).
"""

from __future__ import annotations

import math

import numpy as np
import pytest
import scipy.optimize

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Friction,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
    balance,
)
from springpoise.balance.payloads.adjust import adjust_for_payload
from springpoise.gravity import STANDARD_GRAVITY

A, B, R, M = 0.10, 0.16, 0.35, 2.0
G = M * STANDARD_GRAVITY * R
RATE = G / (A * B)
TRAVEL = (-1.2, 1.3)
MOUNT = SpringMount(ZeroLengthSpring(RATE), Straight(Point("ground", (0, A)), Point("arm", (B, 0))))
LIFT = Mechanism(Arm(Body(M, (R, 0))), springs=MOUNT, friction=Friction(0.3), travel=TRAVEL)
GRIP = Point("arm", (0.5, 0.0))
Q = np.linspace(*TRAVEL, 41)


def _adjusted(**options):
    return adjust_for_payload(LIFT, **{"payloads": (0.4, 1.2), "at": GRIP, "steps": 5, **options})


@pytest.mark.parametrize("move", ["anchor", "attachment"])
def test_places_in_closed_form(move):
    found = _adjusted(move=move)
    now = A if move == "anchor" else B
    assert [step.payload for step in found.chosen.steps] == pytest.approx([0.4, 0.6, 0.8, 1.0, 1.2])
    for step in found.chosen.steps:
        ratio = (M * R + step.payload * 0.5) / (M * R)
        assert step.shift == pytest.approx(now * (ratio - 1), rel=1e-12)
        there = step.place[1] if move == "anchor" else step.place[0]
        assert there == pytest.approx(now * ratio, rel=1e-12)
        assert step.exact_place == pytest.approx(step.place, abs=1e-15)
        assert step.residual.worst < 1e-12 * G
        # without moving: the payload's own torque is left over, all of it
        poses = np.linspace(*TRAVEL, 181)
        unmoved = step.payload * STANDARD_GRAVITY * 0.5 * np.max(np.cos(poses))
        assert step.residual_before.worst == pytest.approx(unmoved, rel=1e-12)


def test_energies():
    for step in _adjusted(move="anchor").chosen.steps:
        a = A + step.shift
        work = RATE * ((a**2 - A**2) / 2 - (a - A) * B * np.sin(Q))
        assert np.allclose(step.energy_to_adjust(Q), work, rtol=0, atol=1e-13)
        # and from the mechanisms' whole energies, the payload's height being the same
        assert np.allclose(step.mechanism.energy(Q) - step.before.energy(Q), work, rtol=0, atol=1e-13)
        (free,) = step.free_at
        assert math.sin(free) == pytest.approx((A + a) / (2 * B), rel=1e-12)
        assert step.dip == pytest.approx(RATE * ((a - A) / 2) ** 2 / 2, rel=1e-9)
        # the spring is as long before as after
        lengths = [mech.spring_states(free)[0].length for mech in (step.before, step.mechanism)]
        assert lengths[0] == pytest.approx(lengths[1], rel=1e-12)


def test_no_free_pose_beyond_twice_the_attachment():
    # a + a' > 2b
    step = _adjusted(payloads=(4.0, 5.0), move="anchor").chosen.steps[-1]
    assert 2 * A + step.shift > 2 * B
    assert step.free_at == ()
    assert math.isnan(step.dip)


def test_attachment_has_its_own_free_pose():
    # |b' - a|² = |b - a|² along the arm: b + b' = 2 a sin θ, here beyond the vertical, so nowhere
    step = _adjusted(move="attachment").chosen.steps[-1]
    assert B + (B + step.shift) > 2 * A
    assert step.free_at == ()
    b = B + step.shift
    work = RATE * ((b**2 - B**2) / 2 - (b - B) * A * np.sin(Q))
    assert np.allclose(step.energy_to_adjust(Q), work, rtol=0, atol=1e-13)


def test_friction_window():
    """±Tc/(g r) with Tc 0.3 N·m at 0.35 m: ±0.08740424683 kg."""
    at = Point("arm", (R, 0))
    now = balance.sine_match(
        Mechanism(Arm(Body(M - 1.0, (R, 0))), friction=Friction(0.3)).with_payload(1.0, at),
        attach_radius=B,
        anchor_height=A,
    ).mechanism
    low, high = adjust_for_payload(now, payloads=(0, 2), at=at).friction_payloads
    assert (low, high) == pytest.approx((1 - 0.08740424683, 1 + 0.08740424683), abs=6e-11)
    assert adjust_for_payload(LIFT, payloads=(0, 1), at=at).friction_payloads == pytest.approx(
        (0, 0.08740424683), abs=6e-11
    )


def test_payload_off_the_arm_line():
    """k conj(a) b = -i g M for every direction: the exact anchor leaves the vertical, a slide cannot follow."""
    at = Point("arm", (0.3, 0.12))
    found = adjust_for_payload(LIFT, payloads=(0, 1.0), at=at, move="anchor", along="90 deg")
    step = found.chosen.steps[-1]
    moment = M * R + 1.0 * complex(*at.at)
    exact = (-1j * STANDARD_GRAVITY * moment / (RATE * B)).conjugate()
    # conj(a) = -i g M/(k b), with b along the arm; here b is real
    assert step.exact_place == pytest.approx((exact.real, exact.imag), rel=1e-12)
    mount = SpringMount(MOUNT.spring, Straight(Point("ground", step.exact_place), Point("arm", (B, 0))))
    assert np.max(np.abs(step.mechanism.with_springs(mount).holding_torque(Q))) < 1e-12 * G
    # Along the vertical a sinusoid stays: D = (x part of the exact place) k b, over the poses; what is least is known
    poses = np.linspace(*TRAVEL, 181)

    def worst(a):
        d = RATE * B * (exact - 1j * a).conjugate()
        return np.max(np.abs(np.imag(d * np.exp(1j * poses))))

    best = scipy.optimize.minimize_scalar(worst, bounds=(0.05, 0.3), method="bounded", options={"xatol": 1e-12})
    assert step.residual.worst == pytest.approx(best.fun, rel=1e-8)
    assert step.place[1] == pytest.approx(best.x, abs=1e-7)


def test_a_spring_with_free_length():
    """The best anchor by the written-out torque τ = k a b cos θ (1 - l0/d) and an independent search."""
    free, rate = 0.05, 900.0
    mount = SpringMount(ExtensionSpring(rate, free_length=free), MOUNT.path)
    mech = Mechanism(Arm(Body(M, (R, 0))), springs=mount, travel=(-0.8, 0.8))
    q = np.linspace(-0.8, 0.8, 181)
    found = adjust_for_payload(mech, payloads=(0.2, 1.0), at=GRIP, move="anchor", steps=3)
    for step in found.chosen.steps:
        load = (M * R + step.payload * 0.5) * STANDARD_GRAVITY

        def worst(a, load=load):
            d = np.sqrt(a * a + B * B - 2 * a * B * np.sin(q))
            return np.max(np.abs((load - rate * a * B * (1 - free / d)) * np.cos(q)))

        tried = np.linspace(0.02, 0.4, 400)
        start = tried[np.argmin([worst(a) for a in tried])]
        best = scipy.optimize.minimize_scalar(
            worst, bounds=(start - 1e-3, start + 1e-3), method="bounded", options={"xatol": 1e-12}
        )
        assert step.residual.worst == pytest.approx(best.fun, rel=1e-7)
        assert step.place[1] == pytest.approx(best.x, abs=1e-7)
        assert step.exact_place is None


def test_a_carriage_with_pulley_and_spring():
    """All that a cable meets on the ground moves together, so that a tiny pulley's carriage acts as an anchor does."""
    tiny = 1e-7
    cable = Cable(
        Point("ground", (-tiny, A - 0.5)), Disc(Point("ground", (0, A)), radius=tiny, turn="cw"), Point("arm", (B, 0))
    )
    mech = LIFT.with_springs(SpringMount(ZeroLengthSpring(RATE), cable, rigid_length=0.5))
    step = adjust_for_payload(mech, payloads=(0, 0.8), at=GRIP, move="anchor").chosen.steps[-1]
    assert step.shift == pytest.approx(A * 0.8 * 0.5 / (M * R), abs=1e-5)
    assert step.residual.worst < 1e-4 * G


def test_storage_spring():
    """On a right-angle crank, a = A cos f and s = A sin f, k_s = k: k a²/2 + k s²/2 does not change.

    With the arm held where sin θ = 0, k |B - ia|²/2 is k a²/2 and a constant, so the adjuster moves freely.
    """
    crank = 0.2
    storage = ZeroLengthSpring(RATE)
    held = []
    for f in np.linspace(0.1, 1.4, 7):
        a, s = crank * math.cos(f), crank * math.sin(f)
        mount = SpringMount(MOUNT.spring, Straight(Point("ground", (0, a)), Point("arm", (B, 0))))
        held.append(LIFT.with_springs(mount).energy(0.0) + storage.energy(s))
    assert np.ptp(held) < 1e-13
    assert held[0] == pytest.approx(RATE * (crank**2 + B**2) / 2, rel=1e-13)
