"""A spool's lines as files: a table, and a drawing for a machine."""

from __future__ import annotations

import csv
import io
from importlib import import_module
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise.errors import InputError

if TYPE_CHECKING:
    from springpoise.balance.spools.result import ShapedSpool

__all__ = ["csv_text", "dxf_text", "finite_lines"]

COLUMNS = (
    "joint angle [deg]",
    "spring length [mm]",
    "moment radius [mm]",
    "normal [deg]",
    "curvature radius [mm]",
    "pitch x [mm]",
    "pitch y [mm]",
    "machined x [mm]",
    "machined y [mm]",
)

MILLIMETRES = 4
"""How DXF says that its unit is the millimetre."""


def finite_lines(spool: ShapedSpool) -> tuple[Any, Any]:
    """Pitch line and machined line in mm.

    Raises
    ------
    InputError
        There is no line, since the spring cannot do the work.
    """
    if not np.all(np.isfinite(spool.pitch_line)):
        raise InputError(f"pitch_line must be finite to be written, got NaN: {spool.status}")
    return 1e3 * spool.pitch_line, 1e3 * spool.machined_line


def csv_text(spool: ShapedSpool) -> str:
    """All arrays of a spool as CSV, a row for each pose."""
    pitch, machined = finite_lines(spool)
    columns = [
        np.degrees(spool.angles),
        1e3 * spool.spring_lengths,
        1e3 * spool.moment_radii,
        np.degrees(spool.normals),
        1e3 * spool.curvature_radii,
        *pitch.T,
        *machined.T,
    ]
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(COLUMNS)
    writer.writerows([f"{value:.9f}" for value in row] for row in np.stack(columns, axis=1).tolist())
    return text.getvalue()


def dxf_text(spool: ShapedSpool) -> str:
    """Pitch line, machined line and axis as DXF, in mm, with the joint's axis as origin."""
    pitch, machined = finite_lines(spool)
    try:
        ezdxf: Any = import_module("ezdxf")
    except ImportError as error:
        raise ImportError(
            "ShapedSpool.write_dxf needs the package ezdxf, which is not installed; pip install 'springpoise[cam]'"
        ) from error
    document = ezdxf.new("R2010")
    document.units = MILLIMETRES
    for layer, colour in (("MACHINED", 7), ("PITCH", 5), ("AXIS", 1)):
        document.layers.add(layer, color=colour)
    space = document.modelspace()
    space.add_lwpolyline(machined.tolist(), dxfattribs={"layer": "MACHINED"})
    space.add_lwpolyline(pitch.tolist(), dxfattribs={"layer": "PITCH"})
    space.add_circle((0.0, 0.0), radius=1.0, dxfattribs={"layer": "AXIS"})
    for dx, dy in ((2.0, 0.0), (0.0, 2.0)):
        space.add_line((-dx, -dy), (dx, dy), dxfattribs={"layer": "AXIS"})
    stream = io.StringIO()
    document.write(stream)
    return stream.getvalue()
