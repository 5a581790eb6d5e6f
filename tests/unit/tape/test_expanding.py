"""Sums of products that cancel once they are multiplied out; expected forms by hand."""

import math

import pytest

from springpoise.tape import record


def lever(q, px, py, ax, ay):
    """dx·Jx + dy·Jy of a straight line from (ax, ay) to a point of an arm: by hand, ax·y - ay·x."""
    from springpoise.carriers import namespace

    xp = namespace(q)
    c, s = xp.cos(q), xp.sin(q)
    x, y = px * c - py * s, px * s + py * c
    return (x - ax) * -y + (y - ay) * x


@pytest.mark.parametrize(
    ("px", "py", "ax", "ay"), [(0.08, 0.0, 0.0, 0.1), (0.08, 0.0, 0.02, 0.1), (0.08, 0.03, 0.02, -0.1)]
)
def test_a_lever_loses_the_products_of_coordinates(px, py, ax, ay):
    program = record(lambda q: lever(q, px, py, ax, ay))
    assert len(program) <= (12 if py else 5)
    for q in (-1.0, 0.3, 2.0):
        x, y = px * math.cos(q) - py * math.sin(q), px * math.sin(q) + py * math.cos(q)
        assert program.python_function()(q) == pytest.approx(ax * y - ay * x, rel=1e-13, abs=1e-17)


def test_like_terms_merge():
    assert len(record(lambda q: 2.0 * q + 3.0 * q)) == 1
    assert len(record(lambda q: (2.0 * q + 1.0) - (2.0 * q - 3.0))) == 0
    assert record(lambda q: (2.0 * q + 1.0) - (2.0 * q - 3.0)).python_function()(0.4) == 4.0


def test_what_would_grow_is_left_as_it_is():
    product = record(lambda a, b: (a + 1.0) * (b + 2.0) + (a + 3.0) * (b + 4.0), inputs=("a", "b"))
    assert len(product) == 7
    assert product.python_function()(0.5, 0.25) == pytest.approx(1.5 * 2.25 + 3.5 * 4.25)


def square_of_a_length(q, a, b):
    """Distance of a point at radius b on an arm from an anchor at height a; by hand a² + b² - 2 a b sin q."""
    from springpoise.carriers import distance, namespace

    xp = namespace(q)
    return distance(b * xp.cos(q), b * xp.sin(q) - a)


def test_a_length_follows_the_law_of_cosines_where_it_never_vanishes():
    far, near = (record(lambda q, b=b: square_of_a_length(q, 0.1, b)) for b in (0.06, 0.0999999))
    assert len(far) == 4  # sin, times, plus, sqrt
    assert len(near) > 6  # close to coincidence the squares stay, with all their digits
    for q in (-1.2, 0.1, 1.5, math.pi / 2):
        for program, b in ((far, 0.06), (near, 0.0999999)):
            by_hand = math.hypot(b * math.cos(q), b * math.sin(q) - 0.1)
            assert program.python_function()(q) == pytest.approx(by_hand, rel=2e-15)
