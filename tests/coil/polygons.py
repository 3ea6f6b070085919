"""Turns as polygons: what geometry says without any formula for build, growth or area."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

F64 = NDArray[np.float64]


def outline(long_mm: float, short_mm: float, radius_mm: float, build_mm: float, corner: int = 200) -> F64:
    """f64[n, 2]: a rectangle with half sides long, short between the corners' centres, its corners rounded
    with radius + build; counter-clockwise."""
    radius = radius_mm + build_mm
    points = []
    for quarter, (x, y) in enumerate([(1, 1), (-1, 1), (-1, -1), (1, -1)]):
        for step in range(corner + 1):
            angle = (quarter + step / corner) * math.pi / 2
            points.append((x * long_mm + radius * math.cos(angle), y * short_mm + radius * math.sin(angle)))
    whole = np.array(points)
    steps = np.linalg.norm(whole - np.roll(whole, 1, axis=0), axis=1)
    return whole[steps > 1e-9]  # where a side has no length its ends are one point


def area_of(points: F64) -> float:
    """The shoelace formula: positive for a polygon that runs counter-clockwise."""
    x, y = points.T
    return float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)) / 2)


def length_of(points: F64) -> float:
    """Once round."""
    return float(np.linalg.norm(points - np.roll(points, -1, axis=0), axis=1).sum())
