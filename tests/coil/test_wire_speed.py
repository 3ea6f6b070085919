"""Wire speed over a revolution, against a string wound round a polygon."""

from __future__ import annotations

import math

import numpy as np
import pytest

from windctl.coil.geometry import Core
from windctl.coil.wire_speed import over_a_revolution, wire_speed

RACETRACK = Core(25, 0, 3)  # 56 x 6 mm
PLAIN = Core(18, 9, 2)


def string_speeds(outline: Core, rpm: float, distance: float) -> np.ndarray:
    """Speed of a taut string at a guide, from how its whole length (free and wound) changes with the angle.

    The outline is a fine polygon; at each angle the string touches the corner from which the wound
    length back to a fixed corner and the free length to the guide add up to the most a taut string can have.
    """
    corners = 20_000
    angle = 2 * np.pi * (np.arange(corners) + 0.5) / corners
    x = np.copysign(outline.half_long_mm, np.cos(angle)) + outline.radius_mm * np.cos(angle)
    y = np.copysign(outline.half_short_mm, np.sin(angle)) + outline.radius_mm * np.sin(angle)
    edges = np.hypot(np.diff(x, append=x[0]), np.diff(y, append=y[0]))
    wound = np.concatenate([[0.0], np.cumsum(edges)])
    x, y = np.append(x, x[0]), np.append(y, y[0])
    steps = 720
    lengths = []
    for step in range(steps + 1):
        turn = 2 * np.pi * step / steps
        guide = distance * np.cos(turn), distance * np.sin(turn)
        # the tangent on one side: the corner with the extreme bearing as seen from the guide
        along = distance - (x * np.cos(turn) + y * np.sin(turn))
        across = y * np.cos(turn) - x * np.sin(turn)
        touch = int(np.argmin(np.arctan2(across, along)[:-1]))
        free = math.hypot(guide[0] - x[touch], guide[1] - y[touch])
        lengths.append((wound[touch], free))
    arc = np.unwrap(np.array([a for a, _ in lengths]), period=float(wound[-1]))
    total = arc + np.array([f for _, f in lengths])
    per_radian = np.diff(total) / (2 * np.pi / steps)
    return np.abs(per_radian) * rpm * 2 * np.pi / 60 / 1000


@pytest.mark.parametrize("outline", [RACETRACK, PLAIN])
@pytest.mark.parametrize("distance", [60.0, 500.0])
def test_mean_and_peak_are_those_of_a_wound_string(outline: Core, distance: float) -> None:
    speeds = string_speeds(outline, 1000, distance)
    speed = wire_speed(outline, 1000)
    assert speed.mean_m_s == pytest.approx(speeds.mean(), rel=1e-3)
    assert speed.peak_m_s == pytest.approx(speeds.max(), rel=5e-3)
    course = list(over_a_revolution(outline, 1000, distance, points=3600))
    angles, expected = np.array(course).T
    midway = 2 * np.pi * (np.arange(len(speeds)) + 0.5) / len(speeds)
    # this string leaves the outline on the other side: the course mirrored
    assert np.interp(-midway, angles, expected, period=2 * np.pi) == pytest.approx(speeds, abs=0.05)


def test_a_long_bobbin_at_1000_rpm() -> None:
    """Mean about 2.0 m/s, peak 2.9 m/s (computed beforehand). They are those of a core 56 mm long; one
    62 mm long cannot have them: its peak is half of 62 mm at 104.72 rad/s, 3.25 m/s."""
    speed = wire_speed(RACETRACK, 1000)
    assert speed.mean_m_s == pytest.approx(2.0, abs=0.05)
    assert speed.peak_m_s == pytest.approx(2.9, abs=0.05)
    assert wire_speed(Core(28, 0, 3), 1000).peak_m_s == pytest.approx(31 * 104.72 / 1000, rel=1e-4)


def test_a_round_bobbin_has_one_speed() -> None:
    speed = wire_speed(Core(0, 0, 10), 600)
    assert speed.mean_m_s == pytest.approx(speed.peak_m_s) == pytest.approx(0.01 * 20 * math.pi)


def test_the_course_peaks_twice_a_turn() -> None:
    course = list(over_a_revolution(RACETRACK, 1000, 100))
    speeds = [speed for _, speed in course]
    peaks = [
        i
        for i in range(len(speeds))
        if speeds[i] > speeds[i - 1] and speeds[i] >= speeds[(i + 1) % len(speeds)]
    ]
    assert len(peaks) == 2
    angles = [angle for angle, _ in course]
    assert angles == sorted(angles)


def test_a_guide_inside_the_bobbin_is_refused() -> None:
    with pytest.raises(ValueError, match="28 mm"):
        next(over_a_revolution(RACETRACK, 1000, 20))
