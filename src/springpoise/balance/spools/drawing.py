"""A spool's lines as a drawing to scale, in SVG."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise.balance.spools.files import finite_lines

if TYPE_CHECKING:
    from springpoise.balance.spools.result import ShapedSpool

__all__ = ["svg_text"]

EDGE = 0.12
"""Free edge around the lines, over the drawing's greater side [1]."""

CABLE = 0.3
"""Length of the cable that is drawn, over the drawing's greater side [1]."""


def svg_text(spool: ShapedSpool) -> str:
    """Pitch line, machined line, axis and the cable at both ends of the range; one unit is one mm.

    The link's x axis points to the right and its y axis up; SVG's own y axis points down, so
    that a point (x, y) of the link stands at (x, -y).
    """
    pitch, machined = finite_lines(spool)
    size = float(np.max(np.ptp(np.concatenate([pitch, machined, [[0.0, 0.0]]]), axis=0)))
    ends = [_cable(spool, pitch, index, CABLE * size) for index in (0, -1)]
    line, letter = size / 300.0, size / 32.0
    axis = [[-letter, -letter], [0.35 * size + 8.0 * letter, letter]]
    words = np.array([9.0 * letter, 0.0])  # room beside the cables' ends
    beside = [end + way * words for end in ends for way in (1.0, -1.0)]
    everything = np.concatenate([pitch, machined, axis, *ends, *beside])
    low, high = everything.min(axis=0) - EDGE * size, everything.max(axis=0) + EDGE * size
    low[1] -= 3.2 * letter
    high[0] = max(high[0], low[0] + 42.0 * letter)  # room for the caption
    width, height = (high - low).tolist()
    ruler = 10.0 ** math.floor(math.log10(0.5 * size))
    tie = pitch[spool.tie_at]
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width:.3f}mm" height="{height:.3f}mm" '
        f'viewBox="{low[0]:.3f} {-high[1]:.3f} {width:.3f} {height:.3f}" '
        f'font-family="sans-serif" font-size="{letter:.3f}" fill="none" stroke-width="{line:.4f}">',
        "<title>Spool: machined line and pitch line, to scale in mm</title>",
        f'<rect x="{low[0]:.3f}" y="{-high[1]:.3f}" width="{width:.3f}" height="{height:.3f}" fill="white"/>',
        f'<path id="machined-line" stroke="black" stroke-width="{2 * line:.4f}" d="{_path(machined)}"/>',
        f'<path id="pitch-line" stroke="#0b5fa5" stroke-dasharray="{6 * line:.4f} {3 * line:.4f}" d="{_path(pitch)}"/>',
        f'<g id="axis" stroke="#b3261e"><circle cx="0" cy="0" r="{0.4 * letter:.3f}"/>'
        f'<path d="M {-letter:.3f} 0 H {0.35 * size:.3f} M 0 {-letter:.3f} V {letter:.3f}"/></g>',
    ]
    for end, index in zip(ends, (0, -1), strict=True):
        outward = np.array([math.cos(spool.normals[index]), math.sin(spool.normals[index])])
        anchor = "middle" if abs(outward[0]) < 0.5 else "start" if outward[0] > 0 else "end"
        at = end[1] + letter * outward - np.array([0.0, 0.35 * letter])
        parts.append(f'<path class="cable" stroke="#6f6f6f" d="{_path(end)}"/>')
        parts.append(_text(at, f"cable at {math.degrees(spool.angles[index]):.1f}°", "#6f6f6f", anchor=anchor))
    parts += [
        f'<circle id="tie" cx="{tie[0]:.6f}" cy="{-tie[1]:.6f}" r="{2.5 * line:.4f}" fill="#6f6f6f"/>',
        _text(np.array([0.35 * size + 0.3 * letter, -0.3 * letter]), "x of the link", "#b3261e"),
        _ruler(low + letter, ruler, letter),
        _text(
            low + np.array([letter, 2.9 * letter]),
            "black: machined line; dashed: pitch line; cross: joint axis; dot: end at which the cable is tied",
            "black",
            0.8 * letter,
        ),
        "</svg>",
    ]
    return "\n".join(parts) + "\n"


def _cable(spool: ShapedSpool, pitch: Any, index: int, length: float) -> Any:
    """The cable's straight run at one end of the range, in the link's frame."""
    way = 1.0 if spool.pull == "ccw" else -1.0
    normal = spool.normals[index]
    along = way * np.array([-math.sin(normal), math.cos(normal)])
    return np.stack([pitch[index], pitch[index] + length * along])


def _path(points: Any) -> str:
    return "M " + " L ".join(f"{x:.6f} {-y:.6f}" for x, y in points.tolist())


def _text(at: Any, words: str, colour: str, letter: float | None = None, anchor: str = "start") -> str:
    size = "" if letter is None else f' font-size="{letter:.3f}"'
    return f'<text x="{at[0]:.3f}" y="{-at[1]:.3f}" fill="{colour}" text-anchor="{anchor}"{size}>{words}</text>'


def _ruler(at: Any, length: float, letter: float) -> str:
    x, y = float(at[0]), -float(at[1])
    tick = 0.3 * letter
    return (
        f'<g id="ruler" stroke="black"><path d="M {x:.3f} {y - tick:.3f} V {y + tick:.3f} '
        f'M {x:.3f} {y:.3f} H {x + length:.3f} M {x + length:.3f} {y - tick:.3f} V {y + tick:.3f}"/></g>'
        f'<text x="{x + length + tick:.3f}" y="{y + tick:.3f}" fill="black">{length:g} mm</text>'
    )
