"""How often is drawn, over a quick line and a slow one."""

from __future__ import annotations

from windctl.tui.pace import DIGITS_S, FORGIVEN_S, Pace


def drawn(pace: Pace, start: float, seconds: float, backlog: int = 0) -> tuple[int, int]:
    """Texts and charts drawn in a time, looked at as often as the screen does."""
    dues = [pace.due(start + tick * DIGITS_S, backlog) for tick in range(round(seconds / DIGITS_S))]
    return sum(due.texts for due in dues), sum(due.charts for due in dues)


def test_a_quick_line_sees_eight_texts_and_two_charts_a_second() -> None:
    assert drawn(Pace(), 0.0, 10.0) == (80, 20)


def test_nothing_is_drawn_while_the_line_is_behind() -> None:
    assert drawn(Pace(), 0.0, 10.0, backlog=5) == (0, 0)


def test_a_line_that_falls_behind_again_and_again_is_slow_until_it_is_forgiven() -> None:
    pace = Pace()
    for tick in range(3):
        pace.due(float(tick), 9)
    assert pace.slow
    assert drawn(pace, 3.0, 10.0) == (10, 1)
    drawn(pace, 13.0, FORGIVEN_S)
    assert not pace.slow


def test_once_behind_is_not_slow() -> None:
    pace = Pace()
    for start in (0.0, 20.0, 40.0):
        pace.due(start, 9)
        assert not pace.slow


def test_beneath_a_dialog_little_is_drawn_and_over_a_slow_line_nothing() -> None:
    pace = Pace()
    dues = [pace.due(tick / 10, 0, covered=True) for tick in range(100)]
    assert (sum(due.texts for due in dues), sum(due.charts for due in dues)) == (10, 1)
    for tick in range(3):
        pace.due(10.0 + tick, 9)
    assert not any(any(pace.due(13.0 + tick / 10, 0, covered=True)) for tick in range(100))
    assert drawn(pace, 23.0, 10.0) == (10, 1)
