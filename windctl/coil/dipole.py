"""Hum from a small source nearby: a magnetic dipole, such as a transformer some way off.

The flux of a dipole m through a loop is the line integral of its vector potential mu0/(4 pi) * m x r / r^3
along the loop (Stokes), r from the source to the wire. So a coil's flux linkage is m . v with

    v = mu0/(4 pi) * sum over turns of the integral of (r x dl) / r^3

one vector per place of the source, whichever way the source's own axis points. Turns lie on the core's
outline grown by their build, spread over gap and build; outlines, gap and build are integrated by Gauss and
Legendre, which at some coil lengths' distance leaves nothing that could be seen.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.coil.geometry import Core

F64 = NDArray[np.float64]

MU0_OVER_4PI = 1e-7  # T m/A, to within 1e-9 (CODATA 2018)

_NODES = 6  # of a straight or a corner
_LAYERS = 3  # over the gap, and over the build


@dataclass(frozen=True, slots=True)
class Placed:
    """A coil in space: x along its core, z towards the strings, its middle at `at_mm`. Its turns lie between
    the core and a build of `build_mm`, over `gap_mm` along z."""

    core: Core
    build_mm: float
    gap_mm: float
    at_mm: tuple[float, float, float] = (0.0, 0.0, 0.0)


def linkage(coil: Placed, sources_m: F64) -> F64:
    """v of one turn, the mean over the coil's turns, Wb per A m2. Turns run counter-clockwise seen from +z.

    sources_m: f64[n, 3], places outside the coil. Returns f64[n, 3].
    """
    total: F64 = np.zeros_like(sources_m)
    nodes, weights = np.polynomial.legendre.leggauss(_LAYERS)
    for up, share in zip(nodes, weights / 2, strict=True):
        for out, part in zip((nodes + 1) / 2, weights / 2, strict=True):
            path, step = outline(coil.core.grown(coil.build_mm * float(out)))
            shift = np.array([0.0, 0.0, coil.gap_mm * float(up) / 2]) + np.array(coil.at_mm)
            total += float(share * part) * _round(path + shift, step, sources_m)
    return total


def _round(path_mm: F64, step_mm: F64, sources_m: F64) -> F64:
    """Once along a loop."""
    x, y, z = np.moveaxis(path_mm[None, :, :] / 1000 - sources_m[:, None, :], 2, 0)
    dx, dy, _ = step_mm.T / 1000
    near = MU0_OVER_4PI * (x * x + y * y + z * z) ** -1.5
    around: F64 = np.stack([near * -z * dy, near * z * dx, near * (x * dy - y * dx)]).sum(axis=2).T
    return around


def outline(core: Core) -> tuple[F64, F64]:
    """Points on an outline and the weighted steps along it there, f64[n, 3] each, in mm, counter-clockwise
    seen from +z."""
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    at, share = (nodes + 1) / 2, weights / 2
    long, short, radius = core.half_long_mm, core.half_short_mm, core.radius_mm
    points, steps = [], []
    corners = [(long, short), (-long, short), (-long, -short), (long, -short)]
    for quarter, corner in enumerate(corners):
        angle = (quarter + at) * math.pi / 2
        normal = np.stack([np.cos(angle), np.sin(angle)], axis=1)
        tangent = np.stack([-np.sin(angle), np.cos(angle)], axis=1)
        points.append(np.array(corner) + radius * normal)
        steps.append(radius * math.pi / 2 * share[:, None] * tangent)
        turn = (quarter + 1) * math.pi / 2  # the straight to the next corner begins here
        begin = np.array(corner) + radius * np.array([math.cos(turn), math.sin(turn)])
        way = np.array(corners[(quarter + 1) % 4]) - np.array(corner)
        points.append(begin + at[:, None] * way)
        steps.append(share[:, None] * way)
    flat, along = np.concatenate(points), np.concatenate(steps)
    nothing = np.zeros((len(flat), 1))
    return np.hstack([flat, nothing]), np.hstack([along, nothing])


def all_round(points: int = 200) -> F64:
    """f64[points, 3]: directions spread evenly over the sphere (a golden spiral), and the six main ones."""
    n = np.arange(points) + 0.5
    up = 1 - 2 * n / points
    turn = math.pi * (3 - math.sqrt(5)) * n
    across = np.sqrt(1 - up**2)
    spiral = np.stack([across * np.cos(turn), across * np.sin(turn), up], axis=1)
    main = np.concatenate([np.eye(3), -np.eye(3)])
    return np.concatenate([main, spiral])
