"""Flux of a small source through a coil, against a general magnetics library, surface sums and textbooks."""

from __future__ import annotations

import math

import magpylib
import numpy as np
import pytest

from tests.coil.polygons import outline
from windctl.coil.dipole import MU0_OVER_4PI, Placed, all_round, linkage
from windctl.coil.geometry import Core
from windctl.coil.turns_area import mean_area_mm2

CORE = Core(26.5, 0.0, 2.5)
COIL = Placed(CORE, 5.0, 6.5)
SOURCES = np.array(
    [[0.0, 0.0, 1.0], [0.3, -0.8, 0.52], [0.05, 0.04, 0.03], [0.0, 0.06, 0.0], [-0.9, 0.1, -0.42]]
)


def test_a_coil_sees_a_dipole_as_the_dipole_would_see_the_coil() -> None:
    """Reciprocity: flux per moment is the field of the coil with one ampere, as magpylib has it for turns
    drawn as polylines."""
    field = np.zeros_like(SOURCES)
    layers, heights = (np.arange(12) + 0.5) / 12, ((np.arange(12) + 0.5) / 12 - 0.5) * 6.5
    for part in layers:
        flat = outline(26.5, 0.0, 2.5, 5.0 * part, 24)
        for height in heights:
            points = np.column_stack([flat, np.full(len(flat), height)]) / 1000
            turn = magpylib.current.Polyline(current=1.0, vertices=np.vstack([points, points[:1]]))
            field += turn.getB(SOURCES) / 144
    seen = linkage(COIL, SOURCES)
    scale = np.linalg.norm(field, axis=1, keepdims=True)
    assert np.abs(seen - field) / scale == pytest.approx(0.0, abs=2e-3)


def test_the_line_integral_is_the_flux_through_the_turns_area() -> None:
    """Stokes: the field of each dipole component, summed over small squares inside one turn of the core."""
    one = Placed(CORE, 0.0, 0.0)
    side = 0.05
    x, y = np.meshgrid(np.arange(-29, 29, side) + side / 2, np.arange(-2.5, 2.5, side) + side / 2)
    inside = np.hypot(np.maximum(np.abs(x) - 26.5, 0.0), y) < 2.5
    at = np.column_stack([x[inside], y[inside], np.zeros(int(inside.sum()))]) / 1000
    seen = linkage(one, SOURCES)
    for source, known in zip(SOURCES, seen, strict=True):
        r = at - source
        distance = np.linalg.norm(r, axis=1)
        # B_z of unit moments along x, y, z
        along = 3 * r[:, 2:] * r / distance[:, None] ** 5 - np.eye(3)[2] / distance[:, None] ** 3
        flux = MU0_OVER_4PI * along.sum(axis=0) * (side / 1000) ** 2
        assert flux == pytest.approx(known, rel=3e-3, abs=3e-3 * float(np.abs(known).max()))


def test_on_the_axis_of_a_ring_it_is_the_textbooks_field() -> None:
    """B = mu0*R^2/(2*(R^2 + z^2)^1.5) (from memory; in every textbook of electrodynamics)."""
    ring, z = Placed(Core(0.0, 0.0, 30.0), 0.0, 0.0), 0.05
    known = 4e-7 * math.pi * 0.03**2 / (2 * (0.03**2 + z**2) ** 1.5)
    assert linkage(ring, np.array([[0.0, 0.0, z]]))[0] == pytest.approx([0.0, 0.0, known], abs=known * 1e-6)


def test_from_afar_only_the_mean_area_counts() -> None:
    far = 100.0 * all_round(20)
    area = mean_area_mm2(CORE, 5.0) * 1e-6
    seen = linkage(COIL, far) / area
    n = np.array([0.0, 0.0, 1.0])
    up = far[:, 2:] / 100.0
    dipole = MU0_OVER_4PI * (3 * up * far / 100.0 - n) / 100.0**3
    assert seen == pytest.approx(dipole, rel=1e-5, abs=1e-18)


def test_moving_coil_and_source_together_changes_nothing() -> None:
    shift = np.array([20.0, -30.0, 5.0])
    moved = Placed(CORE, 5.0, 6.5, (20.0, -30.0, 5.0))
    assert linkage(moved, SOURCES + shift / 1000) == pytest.approx(
        linkage(COIL, SOURCES), rel=1e-9, abs=1e-14
    )


def test_directions_lie_evenly_all_round() -> None:
    ways = all_round()
    assert np.linalg.norm(ways, axis=1) == pytest.approx(1.0)
    assert np.abs(ways.mean(axis=0)).max() < 0.01
